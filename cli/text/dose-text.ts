/** Dose rates of a run with an activity, each in the unit that people read. */
import { doseRates, readableRate } from '../dose-rates.js';
import type { StoredResult } from '../result/stored-result.js';
import { clip } from '../show.js';
import { formatFigure } from './figure-format.js';
import type { Style } from './style.js';
import { alignFigures, renderTable } from './text-table.js';

/** A heading and one line for each dose at a point; nothing without an activity. */
export function doseRateLines({ manifest, totals }: StoredResult, style: Style): string[] {
  const rates = doseRates(totals, manifest.source);
  if (rates.length === 0) return [];
  const cells = alignFigures(
    rates.map((rate) => {
      const { mean, stdError, unit } = readableRate(rate);
      return { ...formatFigure(mean, stdError), unit };
    }),
    style.plusMinus,
  );
  const rows = rates.map(({ row }, at) => [
    row.quantity,
    row.layer === null ? '' : clip(row.layer),
    cells[at],
  ]);
  return ['', style.heading('Dose rates with this source'), ...renderTable(rows)];
}
