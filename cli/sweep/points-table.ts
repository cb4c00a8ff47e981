/**
 * points.arrow: one row for each point, with a column for each varied parameter and two for each figure. What may
 * differ between two machines, such as times, is not in it.
 */
import type { Shard } from '../../engine/index.js';
import { encodeTable, type ColumnContent, type TextColumn } from '../result/arrow-file.js';
import type { BeginRecord, PointEntry, RowLabel } from './records.js';

/** How a point stands at the end of a sweep. */
export type FinalStatus = 'done' | 'unfinished' | 'failed' | 'not_begun';

export function finalStatus(entry: PointEntry | undefined): FinalStatus {
  if (entry === undefined) return 'not_begun';
  return entry.status === 'playing' ? 'unfinished' : entry.status;
}

/** The points of a sweep or of one of its shards, counted from 0. */
export function pointsOf(points: number, shard: Shard | null): number[] {
  const all = Array.from({ length: points }, (_, point) => point);
  // Neighbours cost alike: taken in turn, every shard gets its share of what is dear.
  return shard === null ? all : all.filter((point) => point % shard.count === shard.index - 1);
}

/**
 * Name of a figure in the table: `transmitted`, `deposited_energy.shield`, `full_energy.crystal.1173.2_keV`. The line
 * is left out where a point has one line only, so that energies can be varied.
 */
function figureName({ quantity, layer, lineKeV }: RowLabel, namesLine: boolean): string {
  return [quantity, ...(layer === null ? [] : [layer]), ...(namesLine ? [`${lineKeV}_keV`] : [])].join('.');
}

interface FigureColumn {
  readonly label: RowLabel;
  readonly mean: Float64Array;
  readonly stdError: Float64Array;
}

function figureColumns(entries: readonly (PointEntry | undefined)[]): Map<string, FigureColumn> {
  const columns = new Map<string, FigureColumn>();
  entries.forEach((entry, at) => {
    if (entry === undefined) return;
    const names = figureNames(entry.rows);
    entry.rows.forEach((label, row) => {
      let column = columns.get(names[row]);
      if (column === undefined) {
        const unknown = () => new Float64Array(entries.length).fill(NaN);
        column = { label, mean: unknown(), stdError: unknown() };
        columns.set(names[row], column);
      }
      column.mean[at] = entry.figures[2 * row];
      column.stdError[at] = entry.figures[2 * row + 1];
    });
  });
  return columns;
}

/** The names of the figures of a point; each is there once. */
export function figureNames(rows: readonly RowLabel[]): string[] {
  const lines = new Set(rows.flatMap(({ lineKeV }) => lineKeV ?? []));
  return rows.map((row) => figureName(row, row.lineKeV !== null && lines.size > 1));
}

function texts(values: readonly (string | null)[]): TextColumn {
  const words: string[] = [];
  const codeOf = new Map<string, number>();
  const codes = Int32Array.from(values, (value) => {
    if (value === null) return -1;
    if (!codeOf.has(value)) codeOf.set(value, words.push(value) - 1);
    return codeOf.get(value)!;
  });
  return { words, codes };
}

const numbers = (values: readonly (number | null)[]) => Float64Array.from(values, (value) => value ?? NaN);

/** The bytes of points.arrow. */
export function encodePoints(begin: BeginRecord, entries: ReadonlyMap<number, PointEntry>): Uint8Array {
  const points = pointsOf(begin.points, begin.shard);
  const own = points.map((point) => entries.get(point));
  const column = (name: string, unit: string, description: string, values: ColumnContent['values']) => ({
    name,
    unit,
    description,
    values,
  });
  const parameters = begin.parameters.map(({ name, unit, values }) => {
    const chosen = points.map((point) => values[point]);
    const content = unit === null ? texts(chosen.map(String)) : numbers(chosen.map(Number));
    return column(name, unit === '' ? '1' : (unit ?? ''), 'Varied parameter', content);
  });
  const figures = [...figureColumns(own)].flatMap(([name, { label, mean, stdError }]) => {
    const where = label.layer === null ? 'of the whole stack' : `of ${label.layer}`;
    return [
      column(
        `${name}.mean`,
        label.unit,
        `Estimate of ${label.quantity} ${where} per source photon; null: unknown`,
        mean,
      ),
      column(`${name}.std_error`, label.unit, 'Standard error of the mean; null: unknown', stdError),
    ];
  });
  return encodeTable('Points of a sweep, a row for each', [
    column('point', '1', 'Number of the point, from 1', numbers(points.map((point) => point + 1))),
    ...parameters,
    column('status', '', 'done, unfinished, failed or not_begun', texts(own.map(finalStatus))),
    column(
      'stopped',
      '',
      'Why it is done: all histories, or until the precision; null: it is not done',
      texts(own.map((entry) => entry?.stopped ?? null)),
    ),
    column('histories', '1', 'Source photons played', numbers(own.map((entry) => entry?.histories ?? 0))),
    column(
      'seed',
      '',
      'Seed that gives this point with thickset run',
      texts(points.map((p) => begin.seeds[p])),
    ),
    ...figures,
    column(
      'error',
      '',
      'Why the point failed; null: it did not',
      texts(own.map((entry) => entry?.error ?? null)),
    ),
  ]);
}
