/** Points of a sweep as they are recorded. */
import type { QuantityRow, Run, RunResult } from '../../engine/index.js';
import type { PointEntry } from './records.js';

const NO_FIGURES = new Float64Array(0);

/** What is known of a point from its run, which is complete or can be gone on with. */
export function entryOfRun(
  point: number,
  run: Run,
  result: RunResult,
  times: Pick<PointEntry, 'workerS' | 'elapsedS'>,
): PointEntry {
  const { totals } = result;
  const figures = new Float64Array(2 * totals.length);
  totals.forEach(({ mean, stdError }, at) => {
    figures[2 * at] = mean ?? NaN;
    figures[2 * at + 1] = stdError ?? NaN;
  });
  return {
    point,
    status: run.isComplete ? 'done' : 'playing',
    histories: result.histories,
    batches: result.batches,
    batchesPlanned: run.plan.batches,
    stopped: run.isComplete ? result.stopped : null,
    error: null,
    warnings: result.warnings,
    watched: indexOf(totals, run.progress()?.figure ?? null),
    ...times,
    rows: totals.map(({ quantity, layer, lineKeV, unit }) => ({ quantity, layer, lineKeV, unit })),
    figures,
    state: null,
  };
}

function indexOf(totals: readonly QuantityRow[], figure: QuantityRow | null): number | null {
  if (figure === null) return null;
  const { quantity, layer, lineKeV } = figure;
  return totals.findIndex(
    (row) => row.quantity === quantity && row.layer === layer && row.lineKeV === lineKeV,
  );
}

/** A point that cannot be played. */
export function failedEntry(point: number, error: string, elapsedS: number): PointEntry {
  return {
    point,
    status: 'failed',
    histories: 0,
    batches: 0,
    batchesPlanned: 0,
    stopped: null,
    error,
    warnings: [],
    watched: null,
    workerS: 0,
    elapsedS,
    rows: [],
    figures: NO_FIGURES,
    state: null,
  };
}

/** Relative standard error of the figure a point is watched by; Infinity where it is not known. */
export function relativeErrorOf({ watched, figures }: PointEntry): number {
  if (watched === null || watched < 0) return Infinity;
  const error = Math.abs(figures[2 * watched + 1] / figures[2 * watched]);
  return Number.isFinite(error) ? error : Infinity;
}
