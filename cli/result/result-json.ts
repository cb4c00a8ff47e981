/** A result as the one object that `--json` prints; the rows of `totals` have the columns of totals.arrow. */
import type { QuantityRow } from '../../engine/result.js';
import { doseRates } from '../dose-rates.js';
import { curveJson } from '../efficiency/curve-json.js';
import type { Analysis } from '../response/analysis.js';
import { peaksJson, ratesJson, responseJson } from '../response/response-json.js';
import { CAUTION } from '../text/caution.js';
import { flawOf, watchedRow } from '../text/convergence.js';
import { relativeError } from '../text/figure-format.js';
import type { Manifest } from './manifest.js';
import type { StoredResult } from './stored-result.js';

/** What belongs to the files rather than to the result. */
const LEFT_OUT: ReadonlySet<string> = new Set(['format', 'setup', 'files'] satisfies (keyof Manifest)[]);

function totalsRow({ quantity, layer, lineKeV, mean, stdError, unit }: QuantityRow): Record<string, unknown> {
  return { quantity, layer, line_keV: lineKeV, mean, std_error: stdError, unit };
}

/** Relative error and figure of merit of a figure: 1/(error² · time inside workers), which more histories leave alone. */
function precisionOf(
  { quantity, layer, lineKeV, mean, stdError }: QuantityRow,
  { timings }: Manifest,
): object[] {
  const error = relativeError(mean, stdError);
  if (error === null || error === 0) return [];
  const merit = timings.worker_s > 0 ? 1 / (error * error * timings.worker_s) : null;
  return [{ quantity, layer, line_keV: lineKeV, relative_error: error, figure_of_merit_per_s: merit }];
}

/** The object for a result; `out` is its folder, null when nothing could be written. */
export function resultObject(
  { manifest, totals, efficiency }: StoredResult,
  out: string | null,
  analysis: Analysis | null = null,
): Record<string, unknown> {
  const watched = manifest.run.until && watchedRow(totals, manifest.run.until);
  const flawed = totals.flatMap((row) => {
    const flaw = flawOf(row, manifest, watched);
    const { quantity, layer, lineKeV } = row;
    const error = relativeError(row.mean, row.stdError);
    return flaw === null ? [] : [{ quantity, layer, line_keV: lineKeV, relative_error: error, reason: flaw }];
  });
  const facts = Object.fromEntries(Object.entries(manifest).filter(([key]) => !LEFT_OUT.has(key)));
  return {
    out,
    ...facts,
    setup_sha256: manifest.setup?.sha256 ?? null,
    totals: totals.map(totalsRow),
    ...(efficiency ? curveJson(efficiency) : {}),
    dose_rates: doseRates(totals, manifest.source).map(({ row, mean, stdError, unit }) => ({
      quantity: row.quantity,
      layer: row.layer,
      mean,
      std_error: stdError,
      unit,
    })),
    rates: ratesJson(totals, manifest.source),
    response: analysis === null ? [] : responseJson(analysis, manifest.source),
    peaks: analysis === null ? [] : peaksJson(analysis),
    precision: totals.flatMap((row) => precisionOf(row, manifest)),
    not_converged: flawed,
    caution: CAUTION,
  };
}
