/** The figure a run is watched by: the one `until` names, or the leading one of the setup. */
import { EngineError } from './errors.js';
import type { Problem } from './problem.js';
import { isUnreliable } from './reliability-verdict.js';
import type { QuantityRow } from './result.js';
import type { RunSums } from './run-sums.js';
import type { DoseQuantity, Setup, Until } from './setup.js';
import { totalsOf } from './totals.js';

/** Batches before an error is trusted enough to stop on it. */
const MIN_BATCHES = 10;

const DOSES: readonly string[] = ['air_kerma', 'ambient_dose', 'effective_dose_ap'] satisfies DoseQuantity[];

export interface Watch {
  /** Whether `until` is met at this batch boundary. */
  met(sums: RunSums): boolean;
  figure(sums: RunSums): QuantityRow | null;
  /** Work needed in all over work done, by the 1/√N law; Infinity where nothing is aimed at. */
  workFactor(sums: RunSums): number;
}

/** The watch of a setup. Throws EngineError when `until` names a figure the setup does not give. */
export function watchFor(setup: Setup, problem: Problem): Watch {
  const { until } = setup.run;
  const layout = problem.tally;
  const find = (sums: RunSums) => {
    const rows = totalsOf({
      setup,
      layout,
      historyWeight: problem.historyWeight,
      histories: Math.max(1, sums.histories),
      sums: sums.figures(layout),
    });
    return until ? rowFor(rows, until) : leadingRow(rows);
  };
  return {
    met: (sums) => {
      if (!until || sums.batches < MIN_BATCHES) return false;
      const row = find(sums);
      // An error that cannot be relied on has not reached anything.
      if (row?.reliability && isUnreliable(row.reliability) && row.stdError !== 0) return false;
      return relativeError(row) <= until.relativeError;
    },
    figure: find,
    workFactor: (sums) => (until ? (relativeError(find(sums)) / until.relativeError) ** 2 : Infinity),
  };
}

function rowFor(rows: readonly QuantityRow[], until: Until): QuantityRow {
  const candidates = rows.filter(
    ({ quantity, layer }) => quantity === until.quantity && (until.layer === null || layer === until.layer),
  );
  const row = allLines(candidates);
  if (!row) {
    const where = until.layer === null ? '' : ` in layer ${until.layer}`;
    throw new EngineError('unsupported', `until: this setup gives no ${until.quantity}${where}`);
  }
  return row;
}

/** Of rows of one quantity the one for all source lines together, where there is one. */
function allLines(rows: readonly QuantityRow[]): QuantityRow | undefined {
  return rows.find(({ lineKeV }) => lineKeV === null) ?? rows[0];
}

function leadingRow(rows: readonly QuantityRow[]): QuantityRow | null {
  const named = (name: string) => allLines(rows.filter(({ quantity }) => quantity === name));
  const dose = rows.find(({ quantity, mean }) => mean !== null && DOSES.includes(quantity));
  return named('full_energy') ?? dose ?? named('transmitted') ?? null;
}

function relativeError(row: QuantityRow | null): number {
  const { mean, stdError } = row ?? { mean: null, stdError: null };
  return mean !== null && stdError !== null && mean > 0 ? stdError / mean : Infinity;
}
