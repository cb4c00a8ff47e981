/** The figures of a run as aligned text, group by group, per photon and in the other scales the source allows. */
import type { QuantityRow } from '../../engine/result.js';
import type { StoredResult } from '../result/stored-result.js';
import type { Manifest } from '../result/manifest.js';
import { clip } from '../show.js';
import { flawOf, watchedRow, type Flaw } from './convergence.js';
import { displayWidth } from './display-width.js';
import {
  formatDuration,
  formatFigure,
  formatNumber,
  formatPercent,
  relativeError,
  type FigureText,
} from './figure-format.js';
import { GROUPS, groupOf, isExtensive, type Group } from './quantities.js';
import type { Style } from './style.js';
import { alignFigures, alignRight, renderTable } from './text-table.js';

/** What figures can be given per; `factor` turns a figure per photon into it. */
export interface Scale {
  readonly title: string;
  readonly factor: number;
}

const PER_PHOTON: Scale = { title: 'per photon', factor: 1 };

export const MARKS: Readonly<Record<Flaw, string>> = {
  imprecise: '*',
  none_seen: '*',
  unreliable: '?',
  short_of_until: '!',
};

/** Per photon first, then what the source makes of it. */
export function scalesOf({ source }: Manifest): Scale[] {
  const scales = [PER_PHOTON];
  const photonsPerDecay = source.photons_per_decay ?? 1;
  if (source.photons_per_decay !== null) {
    scales.push({ title: 'per decay', factor: photonsPerDecay });
  }
  if (source.activity_Bq !== null) {
    const perSecond = source.activity_Bq * photonsPerDecay;
    scales.push({ title: 'per second', factor: perSecond });
    if (source.live_time_s !== null) {
      scales.push({
        title: `in ${formatDuration(source.live_time_s)}`,
        factor: perSecond * source.live_time_s,
      });
    }
  }
  return scales;
}

interface FigureLine {
  readonly group: Group;
  readonly row: QuantityRow;
  readonly flaw: Flaw | null;
}

/** Figures in the order of the summary: by group, inside a group layer by layer as in the stack. */
function orderFigures({ manifest, totals }: StoredResult): FigureLine[] {
  const watched = manifest.run.until && watchedRow(totals, manifest.run.until);
  const place = new Map(manifest.stack.map(({ name }, at) => [name, at]));
  const groups = Object.keys(GROUPS);
  const lines = totals.map((row) => {
    const inDetector = manifest.stack.some(({ name, detector }) => detector && name === row.layer);
    return { group: groupOf(row.quantity, inDetector), row, flaw: flawOf(row, manifest, watched) };
  });
  const rank = ({ group, row }: FigureLine): number =>
    groups.indexOf(group) * (place.size + 1) +
    (row.layer === null ? -1 : (place.get(row.layer) ?? place.size));
  return lines.sort((a, b) => rank(a) - rank(b));
}

function scaled({ row }: FigureLine, { factor }: Scale): FigureText {
  const times = (x: number | null): number | null => (x === null ? null : x * factor);
  return formatFigure(times(row.mean), times(row.stdError));
}

function relativeText({ row, flaw }: FigureLine): string {
  if (flaw === 'none_seen') {
    return 'none seen';
  }
  if (row.stdError === 0) {
    // Counted in every history so far; only of what the source gives is it known that it must be.
    return row.quantity === 'incident' ? 'exact' : '';
  }
  return row.mean === null || row.mean === 0 ? '' : formatPercent(relativeError(row.mean, row.stdError));
}

/** Text of a figure of merit; null where they are not shown. */
type Merit = ((row: QuantityRow) => string) | null;

/** Figures of merit, 1/(error² · time inside workers), are shown of weighted runs, where they differ from figure to figure. */
function meritFor({ reliability = [], timings }: Manifest): Merit {
  if (reliability.length === 0 || !(timings.worker_s > 0)) return null;
  return ({ mean, stdError }) => {
    const error = relativeError(mean, stdError);
    return error === null || error === 0 ? '' : formatNumber(1 / (error * error * timings.worker_s), 2);
  };
}

/** A header, and one line for each figure. */
function tabulate(
  figures: readonly FigureLine[],
  scales: readonly Scale[],
  style: Style,
  merit: Merit = null,
): string[] {
  const columns = scales.map((scale) =>
    alignFigures(
      figures.map((figure) => ({
        ...scaled(figure, scale),
        unit: figure.row.unit === '1' ? '' : figure.row.unit,
      })),
      style.plusMinus,
    ),
  );
  const relative = alignRight(figures.map(relativeText));
  const merits = alignRight(figures.map(({ row }) => merit?.(row) ?? ''));
  const rows = figures.map(({ row, flaw }, at) => [
    row.quantity,
    row.layer === null ? '' : clip(row.layer),
    row.lineKeV === null ? '' : `${formatNumber(row.lineKeV, 6)} keV`,
    ...columns.map((column) => column[at]),
    relative[at],
    merits[at],
    flaw === null ? '' : MARKS[flaw],
  ]);
  return renderTable([
    ['', '', '', ...scales.map(({ title }) => title), 'error', merit ? 'merit' : '', ''],
    ...rows,
  ]);
}

/** A table of figures: the line above it, and its lines by group. */
export interface FiguresText {
  readonly header: string;
  readonly byGroup: ReadonlyMap<Group, readonly string[]>;
}

function asTable(
  figures: readonly FigureLine[],
  scales: readonly Scale[],
  style: Style,
  merit: Merit = null,
): FiguresText {
  const [header, ...lines] = tabulate(figures, scales, style, merit);
  const byGroup = new Map<Group, string[]>();
  figures.forEach(({ group, flaw }, at) => {
    const line = flaw === null ? lines[at] : style.alert(lines[at]);
    byGroup.set(group, [...(byGroup.get(group) ?? []), line]);
  });
  return { header, byGroup };
}

/** Puts as many scales side by side as the width takes. */
function fitScales(figures: readonly FigureLine[], scales: readonly Scale[], style: Style): Scale[][] {
  const tables: Scale[][] = [];
  for (const scale of scales) {
    const last = tables.at(-1);
    const together = [...(last ?? []), scale];
    if (last && tabulate(figures, together, style).every((line) => displayWidth(line) <= style.width)) {
      last.push(scale);
    } else {
      tables.push([scale]);
    }
  }
  return tables;
}

/** All figures per photon; then, without the ratios, what the source makes of them, in as few tables as fit. */
export function figuresText(result: StoredResult, style: Style): FiguresText[] {
  const figures = orderFigures(result);
  const extensive = figures.filter(({ row }) => isExtensive(row.quantity, row.unit));
  const [first, ...others] = scalesOf(result.manifest);
  return [
    asTable(figures, [first], style, meritFor(result.manifest)),
    ...fitScales(extensive, others, style).map((scales) => asTable(extensive, scales, style)),
  ];
}

/** Flaws of the figures shown. */
export function flawsIn(result: StoredResult): ReadonlySet<Flaw> {
  return new Set(orderFigures(result).flatMap(({ flaw }) => (flaw === null ? [] : [flaw])));
}
