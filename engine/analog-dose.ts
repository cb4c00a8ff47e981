/**
 * Dose at the two faces in analog transport: each photon that leaves counts with 1/|w| times its dose per fluence. Grazing
 * photons make its error uncertain (the reliability of the figure tells); deep transport does not suffer from them.
 */
import type { BatchTally } from './batch-tally.js';
import { MOMENT_PLACES } from './dose-layout.js';
import { DOSE_LINE, type Problem } from './problem.js';

export class AnalogDose {
  private readonly doses: number;
  /** Of the history in hand: far face, then front face, by quantity. */
  private readonly pending: Float64Array;
  /** Sums of powers 0 to 4 over histories, likewise. */
  private readonly powers: Float64Array;
  private isTouched = false;

  constructor(
    private readonly problem: Problem,
    private readonly tally: BatchTally,
  ) {
    this.doses = tally.layout.dose.doses;
    this.pending = new Float64Array(2 * this.doses);
    this.powers = new Float64Array(5 * this.pending.length);
  }

  /** A photon leaves under direction cosine w. */
  leave(isFar: boolean, energyKeV: number, cell: number, w: number, weight = 1): void {
    const { doseLines, cellCount } = this.problem;
    const first = isFar ? 0 : this.doses;
    for (let d = 0; d < this.doses; d++) {
      const at = (d * cellCount + cell) * DOSE_LINE;
      this.pending[first + d] += (weight * (doseLines[at] + doseLines[at + 1] * energyKeV)) / Math.abs(w);
    }
    this.isTouched = true;
  }

  closeHistory(): void {
    if (!this.isTouched) return;
    this.isTouched = false;
    const { pending, powers } = this;
    for (let i = 0; i < pending.length; i++) {
      const value = pending[i];
      if (value === 0) continue;
      pending[i] = 0;
      for (let n = 0, power = 1; n < 5; n++, power *= value) powers[5 * i + n] += power;
    }
  }

  /** Puts the sums of the batch, and what is known exactly, into the tally. */
  closeBatch(histories: number): void {
    const { figureSum, figureSquare, layout } = this.tally;
    const { dose } = layout;
    const exact = this.problem.faceDose?.figures;
    for (let d = 0; d < this.doses; d++) {
      this.put(dose.farFigure + d, d);
      this.put(dose.frontFigure + d, this.doses + d);
      for (const figure of [dose.farUncollidedFigure + d, dose.farFreeFigure + d]) {
        // Of stacks with edges the uncollided dose is not known.
        const value = exact === undefined ? NaN : exact[figure];
        figureSum[figure] = histories * value;
        figureSquare[figure] = histories * value ** 2;
      }
    }
  }

  private put(figure: number, i: number): void {
    const { figureSum, figureSquare, layout } = this.tally;
    const { leading, momentFigure } = layout.dose;
    const [count, first, second, third, fourth] = this.powers.subarray(5 * i, 5 * i + 5);
    figureSum[figure] = first;
    figureSquare[figure] = second;
    const at = momentFigure + MOMENT_PLACES * leading.indexOf(figure);
    figureSum[at] = count;
    figureSquare[at] = first;
    figureSum[at + 1] = second;
    figureSquare[at + 1] = third;
    figureSum[at + 2] = fourth;
  }
}
