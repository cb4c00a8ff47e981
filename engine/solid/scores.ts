/** What one history of a stack with edges scores: photons that leave, energy that stays, pulses. */
import { LEFT_FAR, LEFT_SIDE, W } from '../../geometry/index.js';
import type { AnalogDose } from '../analog-dose.js';
import { addFigure, closeHistory, MAX_TOUCHED, type BatchTally } from '../batch-tally.js';
import { cellOf, type EnergyGrid } from '../energy-grid.js';
import { ENERGY, WEIGHT } from '../photon.js';
import { scoreCoincidences } from '../coincidence.js';
import { binOf, FIGURE, FULL_ENERGY, type TallyLayout } from '../tally-layout.js';

/** Surfaces by number: far face, front face, side (LEFT_FAR − how it left). */
const SURFACES = 3;
const NUMBER_FIGURES = [FIGURE.transmitted, FIGURE.reflected, FIGURE.sideEscape];
const ENERGY_FIGURES = [FIGURE.transmittedEnergy, FIGURE.reflectedEnergy, FIGURE.sideEscapeEnergy];

/** Scores of the history in hand; one object per batch. */
export class SolidScores {
  private touched = 0;
  private line = 0;
  private readonly outWeight = new Float64Array(SURFACES);
  private readonly outKeV = new Float64Array(SURFACES);
  private readonly depositedKeV: Float64Array;
  private readonly outCell: Int32Array;
  private readonly pending: Float64Array;
  private readonly touchedCells: Int32Array;
  private readonly layout: TallyLayout;
  /** Source energy; weight that left through the far face without a collision; weight that is incident. */
  private readonly source = new Float64Array(3);

  constructor(
    private readonly tally: BatchTally,
    private readonly cutoffKeV: number,
    private readonly grid: EnergyGrid,
    private readonly dose: AnalogDose | null,
  ) {
    const { layers, transmittedCell, reflectedCell, sideEscapeCell } = tally.layout;
    this.layout = tally.layout;
    this.pending = tally.pending;
    this.touchedCells = tally.touched;
    this.depositedKeV = new Float64Array(layers);
    this.outCell = Int32Array.of(transmittedCell, reflectedCell, sideEscapeCell);
  }

  /** Opens a history with its source photon. */
  open(photon: Float64Array, line: number, incident: boolean): void {
    const { tally, source } = this;
    this.touched = 0;
    this.line = line;
    source[0] = photon[ENERGY];
    source[1] = 0;
    source[2] = incident ? photon[WEIGHT] : 0;
    if (incident) addFigure(tally, FIGURE.incident, photon[WEIGHT]);
    addFigure(tally, FIGURE.sourceEnergy, photon[WEIGHT] * photon[ENERGY]);
  }

  /** A photon has left. */
  leave(left: number, photon: Float64Array, untouched: boolean): void {
    const surface = LEFT_FAR - left;
    const weight = photon[WEIGHT];
    this.outWeight[surface] += weight;
    this.outKeV[surface] += weight * photon[ENERGY];
    if (untouched && left === LEFT_FAR) this.source[1] += weight;
    this.add(this.outCell[surface] + binOf(this.layout, photon[ENERGY]), weight);
    if (this.dose !== null && left !== LEFT_SIDE) {
      this.dose.leave(
        left === LEFT_FAR,
        photon[ENERGY],
        cellOf(this.grid, photon[ENERGY]),
        photon[W],
        weight,
      );
    }
  }

  /** Energy has stayed in a layer. */
  deposit(layer: number, depositedKeV: number): void {
    this.depositedKeV[layer] += depositedKeV;
  }

  /** Closes the history: its figures and pulses. `photon` has the weight of all that was deposited. */
  close(photon: Float64Array): void {
    const { tally, outWeight, outKeV, source } = this;
    for (let surface = 0; surface < SURFACES; surface++) {
      if (outWeight[surface] === 0) continue;
      addFigure(tally, NUMBER_FIGURES[surface], outWeight[surface]);
      addFigure(tally, ENERGY_FIGURES[surface], outKeV[surface]);
      outWeight[surface] = 0;
      outKeV[surface] = 0;
    }
    if (source[1] > 0) addFigure(tally, FIGURE.uncollided, source[1]);
    this.dose?.closeHistory();
    this.closePulses(photon[WEIGHT]);
    closeHistory(tally, this.touched);
  }

  private closePulses(weight: number): void {
    const { tally, layout, depositedKeV, cutoffKeV } = this;
    const { layers, lines, bins, depositedCell, detectorOfLayer, pulseHeightCell } = layout;
    const { depositedFigure, interactingFigure, fullEnergyFigure, incidentProductFigure } = layout;
    const { figureSum } = tally;
    const sourceKeV = this.source[0];
    const product = weight * this.source[2];
    if (layout.coincidence !== null) scoreCoincidences(tally, depositedKeV, sourceKeV, this.line, weight);
    for (let layer = 0; layer < layers; layer++) {
      let pulseKeV = depositedKeV[layer];
      if (pulseKeV === 0) continue;
      depositedKeV[layer] = 0;
      addFigure(tally, depositedFigure + layer, weight * pulseKeV);
      const whole = pulseKeV >= sourceKeV * FULL_ENERGY;
      if (whole) pulseKeV = sourceKeV;
      const bin = binOf(layout, pulseKeV);
      this.add(depositedCell + layer * bins + bin, weight * pulseKeV);
      if (pulseKeV <= cutoffKeV) continue;
      addFigure(tally, interactingFigure + layer, weight);
      const detector = detectorOfLayer[layer];
      if (detector < 0) continue;
      const products = incidentProductFigure + detector * (1 + lines);
      const line = lines > 1 ? this.line : 0;
      figureSum[products] += product;
      if (whole) {
        addFigure(tally, fullEnergyFigure + detector * lines + line, weight);
        figureSum[products + 1 + line] += product;
      }
      this.add(pulseHeightCell + detector * bins + bin, weight);
    }
  }

  /** Adds to a cell; a history too long to be written down is an error. */
  private add(cell: number, score: number): void {
    const count = this.touched;
    if (count >= MAX_TOUCHED) throw new Error(`more than ${MAX_TOUCHED} scores in one history`);
    this.pending[cell] += score;
    this.touchedCells[count] = cell;
    this.touched = count + 1;
  }
}
