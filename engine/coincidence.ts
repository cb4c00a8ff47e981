/**
 * Detectors that count together: what of a detector's pulses comes with a pulse in another one, what comes alone, and
 * the spectrum of all detectors added up. Judged history by history; a detector says yes to more than its threshold.
 */
import type { BatchTally } from './batch-tally.js';
import type { Setup } from './setup.js';
import { binOf, FULL_ENERGY } from './tally-layout.js';

export interface CoincidenceLayout {
  readonly layerOfDetector: Int32Array;
  /** Pulses up to it say nothing to the other detectors; by detector. */
  readonly thresholdKeV: Float64Array;
  /** Pulses up to it are none. */
  readonly cutoffKeV: number;

  /** First cells of the spectra of lone pulses, by detector, and of the sums. */
  readonly aloneCell: number;
  readonly sumCell: number;
  readonly endCell: number;

  /** Lone pulses by detector; lone full-energy pulses by detector and line. */
  readonly aloneFigure: number;
  readonly aloneFullEnergyFigure: number;
  /** Pairs of detectors, in the order of {@link pairsOf}. */
  readonly pairFigure: number;
  /** Histories with any pulse; with the whole energy in all detectors together, by line. */
  readonly anyFigure: number;
  readonly sumFullEnergyFigure: number;
  readonly end: number;
}

/** What of the tally layout is known before. */
interface Before {
  readonly bins: number;
  readonly lines: number;
  readonly cells: number;
  readonly figures: number;
}

/** Lays out the cells and figures behind those there are; null where coincidences are not asked for. */
export function makeCoincidenceLayout(setup: Setup, before: Before): CoincidenceLayout | null {
  if (!setup.tally.coincidence) return null;
  const { bins, lines, cells, figures } = before;
  const { cutoffKeV } = setup.physics;
  const layerOfDetector = Int32Array.from(
    setup.stack.flatMap(({ detector }, layer) => (detector === null ? [] : [layer])),
  );
  const detectors = layerOfDetector.length;
  const aloneFullEnergyFigure = figures + detectors;
  const pairFigure = aloneFullEnergyFigure + detectors * lines;
  const anyFigure = pairFigure + (detectors * (detectors - 1)) / 2;
  return {
    layerOfDetector,
    thresholdKeV: Float64Array.from(layerOfDetector, (layer) =>
      Math.max(cutoffKeV, setup.stack[layer].detector?.thresholdKeV ?? cutoffKeV),
    ),
    cutoffKeV,
    aloneCell: cells,
    sumCell: cells + detectors * bins,
    endCell: cells + (detectors + 1) * bins,
    aloneFigure: figures,
    aloneFullEnergyFigure,
    pairFigure,
    anyFigure,
    sumFullEnergyFigure: anyFigure + 1,
    end: anyFigure + 1 + lines,
  };
}

/** The pairs of detectors in the order of their figures. */
export function pairsOf(detectors: number): [number, number][] {
  const pairs: [number, number][] = [];
  for (let a = 0; a < detectors; a++) {
    for (let b = a + 1; b < detectors; b++) pairs.push([a, b]);
  }
  return pairs;
}

/** Scores a history by the energy it left in each layer. Each cell and figure gets one score at most. */
export function scoreCoincidences(
  tally: BatchTally,
  depositedKeV: Float64Array,
  sourceKeV: number,
  line: number,
  weight: number,
): void {
  const layout = tally.layout;
  const { layerOfDetector, thresholdKeV, cutoffKeV, pairFigure, anyFigure } =
    layout.coincidence as CoincidenceLayout;
  const detectors = layerOfDetector.length;
  let pair = pairFigure;
  let registered = 0;
  let sumKeV = 0;
  for (let a = 0; a < detectors; a++) {
    const isPulse = depositedKeV[layerOfDetector[a]] > thresholdKeV[a];
    if (isPulse) {
      registered++;
      sumKeV += depositedKeV[layerOfDetector[a]];
    }
    for (let b = a + 1; b < detectors; b++, pair++) {
      if (isPulse && depositedKeV[layerOfDetector[b]] > thresholdKeV[b]) score(tally, pair, weight);
    }
  }
  for (let detector = 0; detector < detectors; detector++) {
    const pulseKeV = depositedKeV[layerOfDetector[detector]];
    if (pulseKeV <= cutoffKeV) continue;
    const others = registered - (pulseKeV > thresholdKeV[detector] ? 1 : 0);
    if (others === 0) scoreAlone(tally, detector, pulseKeV, sourceKeV, line, weight);
  }
  if (registered === 0) return;
  score(tally, anyFigure, weight);
  scoreSum(tally, sumKeV, sourceKeV, line, weight);
}

function scoreAlone(
  tally: BatchTally,
  detector: number,
  pulseKeV: number,
  sourceKeV: number,
  line: number,
  weight: number,
): void {
  const layout = tally.layout;
  const { aloneCell, aloneFigure, aloneFullEnergyFigure } = layout.coincidence as CoincidenceLayout;
  score(tally, aloneFigure + detector, weight);
  const whole = pulseKeV >= sourceKeV * FULL_ENERGY;
  if (whole)
    score(tally, aloneFullEnergyFigure + detector * layout.lines + lineOf(layout.lines, line), weight);
  scoreCell(tally, aloneCell + detector * layout.bins + binOf(layout, whole ? sourceKeV : pulseKeV), weight);
}

function scoreSum(tally: BatchTally, sumKeV: number, sourceKeV: number, line: number, weight: number): void {
  const layout = tally.layout;
  const { sumCell, sumFullEnergyFigure } = layout.coincidence as CoincidenceLayout;
  const whole = sumKeV >= sourceKeV * FULL_ENERGY;
  if (whole) score(tally, sumFullEnergyFigure + lineOf(layout.lines, line), weight);
  scoreCell(tally, sumCell + binOf(layout, whole ? sourceKeV : sumKeV), weight);
}

/** A continuous spectrum has many bins and one figure. */
function lineOf(lines: number, line: number): number {
  return lines > 1 ? line : 0;
}

function score(tally: BatchTally, figure: number, weight: number): void {
  tally.figureSum[figure] += weight;
  tally.figureSquare[figure] += weight * weight;
}

function scoreCell(tally: BatchTally, cell: number, weight: number): void {
  tally.cellSum[cell] += weight;
  tally.cellSquare[cell] += weight * weight;
}
