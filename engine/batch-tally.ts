/**
 * Tallies of one batch. Within a history scores wait in `pending`; at its end each touched cell adds its sum and its
 * square once. Histories are independent, scores inside one are not: so the errors are right whatever happens inside.
 */
import type { TallyLayout } from './tally-layout.js';

/** Scores one history can leave in spectra; a history that makes more is an error, never cut short silently. */
export const MAX_TOUCHED = 1 << 16;

/** Scratch of the history in hand, one per thread. */
const touchedCells = new Int32Array(MAX_TOUCHED);

export class BatchTally {
  readonly cellSum: Float64Array;
  readonly cellSquare: Float64Array;
  readonly figureSum: Float64Array;
  readonly figureSquare: Float64Array;
  readonly pending: Float64Array;
  readonly touched = touchedCells;

  constructor(readonly layout: TallyLayout) {
    this.cellSum = new Float64Array(layout.cells);
    this.cellSquare = new Float64Array(layout.cells);
    this.figureSum = new Float64Array(layout.figures);
    this.figureSquare = new Float64Array(layout.figures);
    this.pending = new Float64Array(layout.cells);
  }
}

/** Adds one history's value to a figure. */
export function addFigure(tally: BatchTally, figure: number, value: number): void {
  tally.figureSum[figure] += value;
  tally.figureSquare[figure] += value * value;
}

/** Closes a history: pending scores go to the sums. */
export function closeHistory(tally: BatchTally, touchedCount: number): void {
  const { cellSum, cellSquare, pending, touched } = tally;
  if (touchedCount > MAX_TOUCHED) throw new Error(`more than ${MAX_TOUCHED} scores in one history`);
  for (let i = 0; i < touchedCount; i++) {
    const cell = touched[i];
    const value = pending[cell];
    if (value !== 0) {
      cellSum[cell] += value;
      cellSquare[cell] += value * value;
      pending[cell] = 0;
    }
  }
}
