/**
 * Where each tally stands in the arrays of a batch.
 *
 * Spectra are cells of one array, scored within a history and then added to a sum and a sum of squares, so that their
 * standard errors are history-level ones even when a history scores twice in a cell. Figures are numbers of a history
 * whose sum and sum of squares are kept likewise.
 */
import { makeCoincidenceLayout, type CoincidenceLayout } from './coincidence.js';
import { makeDoseLayout, type DoseLayout } from './dose-layout.js';
import type { Setup, SourceLine } from './setup.js';

/** Figures of the whole stack; those of layers and lines follow. */
export const FIGURE = {
  incident: 0,
  transmitted: 1,
  transmittedEnergy: 2,
  uncollided: 3,
  reflected: 4,
  reflectedEnergy: 5,
  sideEscape: 6,
  sideEscapeEnergy: 7,
  sourceEnergy: 8,
} as const;
export const STACK_FIGURES = 9;

/** A deposit this close to the line's energy is the whole of it: rounding of the sums of deposits. */
export const FULL_ENERGY = 1 - 1e-9;

export interface TallyLayout {
  readonly bins: number;
  readonly edgesKeV: Float64Array;
  /** First bin to try at index floor(E × binScale): finds the bin of any grid of edges in a step or two. */
  readonly binGuide: Int32Array;
  readonly binScale: number;
  /** False: bins are of one width and floor(E × binScale) is the bin itself. */
  readonly unevenBins: boolean;

  readonly layers: number;
  /** Number of the layer's pulse-height spectrum, −1 for a layer that is no detector. */
  readonly detectorOfLayer: Int32Array;
  readonly detectors: number;
  readonly lines: number;

  /** First cells of the spectra. */
  readonly transmittedCell: number;
  readonly reflectedCell: number;
  readonly sideEscapeCell: number;
  readonly depositedCell: number;
  readonly pulseHeightCell: number;
  readonly cells: number;

  /** First figures of the layers (deposited energy) and (interacting), and of full energy per detector and line. */
  readonly depositedFigure: number;
  readonly interactingFigure: number;
  readonly fullEnergyFigure: number;
  readonly dose: DoseLayout;
  /** Null where coincidences are not asked for. */
  readonly coincidence: CoincidenceLayout | null;
  /**
   * Products of incident with what a detector got, for the errors of intrinsic efficiencies: for each detector with
   * interacting, then with full energy by line. Sums only, and only where incident differs from history to history.
   */
  readonly incidentProductFigure: number;
  readonly figures: number;

  /** Histories carry weights: nothing that needs the whole of one is known. */
  readonly weighted: boolean;
}

/** Lays out the tallies of a setup; without lines (continuum) full energy has one figure per detector. */
export function makeTallyLayout(setup: Setup, weighted = false): TallyLayout {
  const layers = setup.stack.length;
  const edgesKeV = setup.tally.energyEdgesKeV;
  const bins = edgesKeV.length - 1;
  const lines = Math.max(1, setup.source.emission.lines.length);
  let detectors = 0;
  const detectorOfLayer = Int32Array.from(setup.stack, (layer) => (layer.detector ? detectors++ : -1));
  const binScale = guideScale(edgesKeV);
  const depositedCell = 3 * bins;
  const pulseHeightCell = depositedCell + layers * bins;
  const interactingFigure = STACK_FIGURES + layers;
  const fullEnergyFigure = interactingFigure + layers;
  const dose = makeDoseLayout(setup, fullEnergyFigure + detectors * lines);
  const cells = pulseHeightCell + detectors * bins;
  const coincidence = makeCoincidenceLayout(setup, { bins, lines, cells, figures: dose.end });
  const incidentProductFigure = coincidence?.end ?? dose.end;
  return {
    bins,
    edgesKeV,
    binScale,
    unevenBins: !scaleGivesBin(edgesKeV, binScale),
    binGuide: makeBinGuide(edgesKeV, binScale),
    layers,
    detectorOfLayer,
    detectors,
    lines,
    transmittedCell: 0,
    reflectedCell: bins,
    sideEscapeCell: 2 * bins,
    depositedCell,
    pulseHeightCell,
    cells: coincidence?.endCell ?? cells,
    depositedFigure: STACK_FIGURES,
    interactingFigure,
    fullEnergyFigure,
    dose,
    coincidence,
    incidentProductFigure,
    figures: incidentProductFigure + detectors * (1 + lines),
    weighted,
  };
}

/** Steps per keV of the guide: the edges' own for even bins, else fine enough for most bins. */
function guideScale(edgesKeV: Float64Array): number {
  const bins = edgesKeV.length - 1;
  const width = edgesKeV[1] - edgesKeV[0];
  const top = edgesKeV[bins];
  const even = edgesKeV.every((edge, i) => Math.abs(edge - edgesKeV[0] - i * width) <= 1e-9 * top);
  return even ? 1 / width : Math.min(65536, 8 * bins) / top;
}

/** Whether floor(E × scale) is the bin of every energy, rounding at the edges included. */
function scaleGivesBin(edgesKeV: Float64Array, scale: number): boolean {
  const justBelow = 1 - 2 ** -53;
  return edgesKeV.every(
    (edge, i) =>
      Math.floor(edge * scale) === i && (i === 0 || Math.floor(edge * justBelow * scale) === i - 1),
  );
}

function makeBinGuide(edgesKeV: Float64Array, scale: number): Int32Array {
  const bins = edgesKeV.length - 1;
  const guide = new Int32Array(Math.ceil(edgesKeV[bins] * scale) + 2);
  let bin = 0;
  for (let i = 0; i < guide.length; i++) {
    // The guide may start a bin early, never late: the bound is lowered by the rounding of E × scale.
    const lowest = (i / scale) * (1 - 1e-12);
    while (bin < bins - 1 && edgesKeV[bin + 1] <= lowest) bin++;
    guide[i] = bin;
  }
  return guide;
}

/** Source lines of a setup that full energy is told apart by. */
export function fullEnergyLines(setup: Setup): readonly (SourceLine | null)[] {
  return setup.source.emission.lines.length > 0 ? setup.source.emission.lines : [null];
}

/** The bin of an energy below the last edge. */
export function binOf({ binGuide, binScale, edgesKeV }: TallyLayout, energyKeV: number): number {
  let bin = binGuide[(energyKeV * binScale) | 0];
  while (energyKeV >= edgesKeV[bin + 1]) bin++;
  return bin;
}
