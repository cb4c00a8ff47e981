/**
 * Scores of deep transport: sums of weights within a history, closed into sums, squares and the moments that tell how
 * far a figure can be relied on.
 */
import { MAX_TOUCHED, type BatchTally } from '../batch-tally.js';
import { MOMENT_PLACES } from '../dose-layout.js';
import type { Constants } from '../uncollided.js';
import { FIGURE, type TallyLayout } from '../tally-layout.js';

export class DeepScores {
  private readonly layout: TallyLayout;
  private readonly pendingCells: Float64Array;
  private readonly touchedCells: Int32Array;
  private cellCount = 0;
  private readonly pendingFigures: Float64Array;
  private readonly touchedFigures: Int32Array;
  private figureCount = 0;
  /** Place of each figure's moments, −1: none are kept. */
  private readonly momentOf: Int32Array;

  constructor(private readonly tally: BatchTally) {
    const { layout } = tally;
    this.layout = layout;
    this.pendingCells = tally.pending;
    this.touchedCells = tally.touched;
    this.pendingFigures = new Float64Array(layout.figures);
    this.touchedFigures = new Int32Array(layout.figures);
    this.momentOf = new Int32Array(layout.figures).fill(-1);
    layout.dose.leading.forEach((figure, i) => {
      this.momentOf[figure] = layout.dose.momentFigure + MOMENT_PLACES * i;
    });
  }

  /** Adds a positive score to a figure of the history. */
  addFigure(figure: number, score: number): void {
    const { pendingFigures } = this;
    if (pendingFigures[figure] === 0) this.touchedFigures[this.figureCount++] = figure;
    pendingFigures[figure] += score;
  }

  /** Adds a positive score to the spectrum that begins at `firstCell`. */
  addSpectrum(firstCell: number, energyKeV: number, score: number): void {
    const { binGuide, binScale, edgesKeV } = this.layout;
    let bin = binGuide[(energyKeV * binScale) | 0];
    while (energyKeV >= edgesKeV[bin + 1]) bin++;
    const cell = firstCell + bin;
    const { pendingCells } = this;
    if (pendingCells[cell] === 0) {
      if (this.cellCount >= MAX_TOUCHED) throw new Error(`more than ${MAX_TOUCHED} scores in one history`);
      this.touchedCells[this.cellCount++] = cell;
    }
    pendingCells[cell] += score;
  }

  /** Closes a history whose source photon had `sourceKeV`, `uncollidedKeV` of which leave for certain. */
  close(sourceKeV: number, uncollidedKeV: number): void {
    const { tally, layout, pendingFigures, pendingCells } = this;
    const { figureSum, figureSquare, cellSum, cellSquare } = tally;
    let leftKeV = sourceKeV - uncollidedKeV;
    leftKeV -= pendingFigures[FIGURE.transmittedEnergy] + pendingFigures[FIGURE.reflectedEnergy];
    for (let l = 0; l < layout.layers; l++) leftKeV -= pendingFigures[layout.depositedFigure + l];
    const gap = layout.dose.gapFigure;
    figureSum[gap] += leftKeV;
    figureSquare[gap] += leftKeV * leftKeV;
    figureSum[FIGURE.sourceEnergy] += sourceKeV;
    figureSquare[FIGURE.sourceEnergy] += sourceKeV * sourceKeV;
    for (let i = 0; i < this.figureCount; i++) {
      const figure = this.touchedFigures[i];
      const value = pendingFigures[figure];
      pendingFigures[figure] = 0;
      const square = value * value;
      figureSum[figure] += value;
      figureSquare[figure] += square;
      const moment = this.momentOf[figure];
      if (moment < 0) continue;
      figureSum[moment]++;
      figureSquare[moment] += value;
      figureSum[moment + 1] += square;
      figureSquare[moment + 1] += square * value;
      figureSum[moment + 2] += square * square;
    }
    for (let i = 0; i < this.cellCount; i++) {
      const cell = this.touchedCells[i];
      const value = pendingCells[cell];
      pendingCells[cell] = 0;
      cellSum[cell] += value;
      cellSquare[cell] += value * value;
    }
    this.figureCount = 0;
    this.cellCount = 0;
  }

  /** Adds what every one of the batch's histories scores for certain: Σ(x + c)² = Σx² + 2 c Σx + n c². */
  addConstants(histories: number, { figures, transmitted, reflected }: Constants): void {
    const { tally, layout } = this;
    shift(tally.figureSum, tally.figureSquare, 0, figures, histories);
    shift(tally.cellSum, tally.cellSquare, layout.transmittedCell, transmitted, histories);
    shift(tally.cellSum, tally.cellSquare, layout.reflectedCell, reflected, histories);
    tally.figureSum[FIGURE.incident] += histories;
    tally.figureSquare[FIGURE.incident] += histories;
  }
}

function shift(
  sums: Float64Array,
  squares: Float64Array,
  first: number,
  constants: Float64Array,
  histories: number,
): void {
  for (let i = 0; i < constants.length; i++) {
    const constant = constants[i];
    if (constant === 0) continue;
    squares[first + i] += constant * (2 * sums[first + i] + histories * constant);
    sums[first + i] += histories * constant;
  }
}
