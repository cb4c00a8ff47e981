/** A sweep on one screen, finished or under way: how the points stand, and the figure each is watched by. */
import { CAUTION } from '../text/caution.js';
import {
  formatCount,
  formatDuration,
  formatFigure,
  formatNumber,
  formatPercent,
} from '../text/figure-format.js';
import { alignFigures, alignRight, renderTable, wrap } from '../text/text-table.js';
import type { Style } from '../text/style.js';
import { clip } from '../show.js';
import { relativeErrorOf } from './point-entry.js';
import { finalStatus, pointsOf, type FinalStatus } from './points-table.js';
import type { BeginRecord, PointEntry } from './records.js';
import { countStatus, warningsOf } from './sweep-manifest.js';

/** What a text is made from. */
export interface SweepView {
  readonly begin: BeginRecord;
  readonly points: ReadonlyMap<number, PointEntry>;
  readonly elapsedS: number;
  /** running: a process works on it; ended: nothing is left to do. */
  readonly state: 'running' | 'stopped' | 'ended';
}

/** Rows shown of a long table; the file has them all. */
const MOST_ROWS = 40;
const MOST_FAILURES = 5;

const STATUS_WORDS: Readonly<Record<FinalStatus, string>> = {
  done: 'done',
  unfinished: 'not done',
  failed: 'failed',
  not_begun: 'not begun',
};

export function sweepLines(view: SweepView, style: Style): string[] {
  return [
    ...head(view, style),
    '',
    ...table(view, style),
    ...failures(view, style),
    ...warnings(view, style),
    '',
    ...wrap(CAUTION, style.width).map(style.note),
  ];
}

function head(view: SweepView, style: Style): string[] {
  const { begin, points, elapsedS, state } = view;
  const own = pointsOf(begin.points, begin.shard);
  const counts = countStatus(begin, points);
  const told = (Object.keys(counts) as FinalStatus[])
    .filter((status) => counts[status] > 0)
    .map((status) => `${formatCount(counts[status])} ${STATUS_WORDS[status]}`);
  const part = begin.shard === null ? '' : ` (shard ${begin.shard.index} of ${begin.shard.count})`;
  const words = { running: 'running now', stopped: 'stopped: go on with --resume', ended: 'ended' };
  return [
    ...wrap(clip(begin.title, 200), style.width).map(style.heading),
    ...wrap(
      `${formatCount(own.length)} points${part}: ${told.join(', ')}; seed ${clip(begin.seed)}`,
      style.width,
    ),
    `${words[state]}, ${formatDuration(elapsedS)} so far${worstText(view)}`,
  ];
}

function worstText({ points }: SweepView): string {
  const worst = worstPoint(points.values());
  return worst === null
    ? ''
    : `, largest error ${formatPercent(relativeErrorOf(worst))} at point ${worst.point + 1}`;
}

/** The point with the largest known error of its watched figure. */
export function worstPoint(entries: Iterable<PointEntry>): PointEntry | null {
  let worst: PointEntry | null = null;
  for (const entry of entries) {
    const error = relativeErrorOf(entry);
    if (Number.isFinite(error) && (worst === null || error > relativeErrorOf(worst))) worst = entry;
  }
  return worst;
}

/** A value with its unit, as people write it. */
export function valueText(value: number | string, unit: string | null): string {
  if (typeof value === 'string') return clip(value, 30);
  return `${formatNumber(value, 6)}${unit ? ` ${unit}` : ''}`;
}

function table({ begin, points }: SweepView, style: Style): string[] {
  const own = pointsOf(begin.points, begin.shard);
  const shown = own.slice(0, MOST_ROWS);
  const entries = shown.map((point) => points.get(point));
  const figures = alignFigures(entries.map(figureText), style.plusMinus);
  const errors = alignRight(
    entries.map((entry) =>
      entry && Number.isFinite(relativeErrorOf(entry)) ? formatPercent(relativeErrorOf(entry)) : '',
    ),
  );
  const quantities = entries.map(quantityOf);
  const [first] = quantities.filter((name) => name !== '');
  const same = quantities.every((name) => name === '' || name === first);
  const rows = shown.map((point, at) => [
    String(point + 1),
    ...begin.parameters.map(({ values, unit }) => valueText(values[point], unit)),
    ...(same ? [] : [quantities[at]]),
    figures[at],
    errors[at],
    entries[at]?.status === 'done' ? '' : STATUS_WORDS[finalStatus(entries[at])],
  ]);
  const names = shortNames(begin.parameters.map(({ name }) => name));
  const titles = same ? [first ?? ''] : ['figure', 'per photon'];
  const [header, ...lines] = renderTable([['point', ...names, ...titles, 'error', ''], ...rows]);
  const more = own.length - shown.length;
  return [
    style.heading(header),
    ...lines,
    ...(more > 0
      ? [style.note(`  and ${formatCount(more)} more points; points.arrow and --json have all`)]
      : []),
  ];
}

/** The ends of paths, as far as they are needed to tell them apart. */
export function shortNames(names: readonly string[]): string[] {
  const ending = (name: string, steps: number) => name.split('.').slice(-steps).join('.');
  return names.map((name) => {
    let steps = 1;
    const isShared = () =>
      names.some((other) => other !== name && ending(other, steps) === ending(name, steps));
    while (isShared() && ending(name, steps) !== name) steps++;
    return clip(ending(name, steps), 40);
  });
}

function quantityOf(entry: PointEntry | undefined): string {
  const row = entry?.watched === null || entry === undefined ? undefined : entry.rows[entry.watched];
  if (row === undefined) return '';
  return row.layer === null ? row.quantity : `${row.quantity} ${clip(row.layer, 20)}`;
}

function figureText(entry: PointEntry | undefined) {
  const row = entry?.watched === null || entry === undefined ? undefined : entry.rows[entry.watched];
  if (entry === undefined || row === undefined) return { value: '', error: '', unit: '' };
  const [mean, stdError] = [2 * entry.watched!, 2 * entry.watched! + 1].map((at) => known(entry.figures[at]));
  return { ...formatFigure(mean, stdError), unit: row.unit === '1' ? '' : row.unit };
}

const known = (value: number) => (Number.isNaN(value) ? null : value);

function failures({ points }: SweepView, style: Style): string[] {
  const failed = [...points.values()].filter(({ status }) => status === 'failed');
  if (failed.length === 0) return [];
  const lines = failed
    .slice(0, MOST_FAILURES)
    .flatMap(({ point, error }) => wrap(`point ${point + 1}: ${clip(error ?? '', 300)}`, style.width - 2));
  const more = failed.length - MOST_FAILURES;
  return [
    '',
    style.heading('Failed'),
    ...lines.map((line) => style.alert(`  ${line}`)),
    ...(more > 0 ? [`  and ${formatCount(more)} more`] : []),
  ];
}

function warnings({ points }: SweepView, style: Style): string[] {
  const all = warningsOf(points);
  if (all.length === 0) return [];
  const lines = all.flatMap(({ message, count }) =>
    wrap(`${clip(message, 300)}${count > 1 ? ` (${formatCount(count)} times)` : ''}`, style.width - 2),
  );
  return ['', style.heading('Warnings'), ...lines.map((line) => `  ${line}`)];
}
