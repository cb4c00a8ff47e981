/** Which figures of a run cannot be relied on yet. */
import { isUnreliable } from '../../engine/reliability-verdict.js';
import type { QuantityRow } from '../../engine/result.js';
import type { Manifest, ManifestUntil } from '../result/manifest.js';
import { relativeError } from './figure-format.js';
import { isDose } from './quantities.js';

/**
 * Common practice: a Monte Carlo mean with a relative standard error of a tenth is questionable, of a twentieth
 * usable; the error of the error is then small too.
 */
export const CONVERGED_BELOW = 0.05;

export type Flaw =
  /** The standard error is large against the value, or unknown. */
  | 'imprecise'
  /** No history contributed: the value is below what so many histories can show. */
  | 'none_seen'
  /** Few histories contributed, or very unequally: the standard error is itself uncertain. */
  | 'unreliable'
  /** The run ended before this figure reached the precision asked for. */
  | 'short_of_until';

/** The row that `until` watches: of all lines together where there is one, in the layer named if one is. */
export function watchedRow(totals: readonly QuantityRow[], until: ManifestUntil): QuantityRow | null {
  const rows = totals.filter(
    (row) => row.quantity === until.quantity && (until.layer === null || row.layer === until.layer),
  );
  return rows.find((row) => row.lineKeV === null) ?? rows[0] ?? null;
}

/** What is wrong with a figure; null where nothing is. */
export function flawOf(row: QuantityRow, manifest: Manifest, watched: QuantityRow | null): Flaw | null {
  if (row.mean === null && isDose(row.quantity)) {
    return null; // not a matter of precision: the setup does not define it
  }
  if (row.mean === 0 && !(Number(row.stdError) > 0)) {
    return 'none_seen';
  }
  if (row.reliability && Number(row.stdError) > 0 && isUnreliable(row.reliability)) {
    return 'unreliable';
  }
  const error = relativeError(row.mean, row.stdError);
  const asked = manifest.run.until?.relative_error;
  if (
    row === watched &&
    asked !== undefined &&
    manifest.stopped !== 'until' &&
    !(error !== null && error <= asked)
  ) {
    return 'short_of_until';
  }
  return error === null || error > CONVERGED_BELOW ? 'imprecise' : null;
}
