/** A sweep as the one object that `--json` prints. */
import { CAUTION } from '../text/caution.js';
import { pointsOf, figureNames, finalStatus } from './points-table.js';
import { sweepFacts } from './sweep-manifest.js';
import type { SweepView } from './sweep-text.js';

export function sweepObject(
  { begin, points, elapsedS, state }: SweepView,
  out: string,
  threads: number | null = null,
): Record<string, unknown> {
  return {
    out,
    state,
    ...sweepFacts(begin, points, { elapsedS, threads }),
    parameters: begin.parameters.map(({ name, unit }) => ({ name, unit })),
    table: pointsOf(begin.points, begin.shard).map((point) => {
      const entry = points.get(point);
      const names = figureNames(entry?.rows ?? []);
      const figures = names.map((name, row) => [
        name,
        {
          mean: known(entry!.figures[2 * row]),
          std_error: known(entry!.figures[2 * row + 1]),
          unit: entry!.rows[row].unit,
        },
      ]);
      return {
        point: point + 1,
        values: Object.fromEntries(begin.parameters.map(({ name, values }) => [name, values[point]])),
        status: finalStatus(entry),
        stopped: entry?.stopped ?? null,
        histories: entry?.histories ?? 0,
        seed: begin.seeds[point],
        error: entry?.error ?? null,
        figures: Object.fromEntries(figures) as Record<string, unknown>,
      };
    }),
    caution: CAUTION,
  };
}

const known = (value: number) => (Number.isNaN(value) ? null : value);
