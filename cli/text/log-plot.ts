/** Points drawn with characters on two logarithmic axes. */
import { padStart } from './display-width.js';

export interface PlottedPoints {
  /** One character. */
  readonly mark: string;
  readonly points: readonly { readonly x: number; readonly y: number }[];
}

interface LogPlotStyle {
  readonly width: number;
  readonly unicode: boolean;
}

const ROWS = 16;
const LABEL_WIDTH = 7;
const WIDEST = 100;
/** Labels of the energy axis keep this distance. */
const TICK_SPACING = 7;

/** An axis from low to high, both above 0. */
interface Axis {
  readonly low: number;
  readonly high: number;
  /** 0 at low, 1 at high. */
  readonly part: (value: number) => number;
}

function axisOf(values: readonly number[]): Axis {
  const [least, most] = [Math.min(...values), Math.max(...values)];
  // A curve without any height still needs an axis.
  const [low, high] = most > least ? [least, most] : [least / 2, most * 2];
  return { low, high, part: (value) => Math.log(value / low) / Math.log(high / low) };
}

/** 1, 2 and 5 times powers of ten inside an axis. */
function ticksOf({ low, high }: Axis): number[] {
  const ticks: number[] = [];
  for (let power = Math.floor(Math.log10(low)); power <= Math.ceil(Math.log10(high)); power++) {
    for (const step of [1, 2, 5]) ticks.push(Number(`${step}e${power}`));
  }
  return ticks.filter((tick) => tick >= low * (1 - 1e-9) && tick <= high * (1 + 1e-9));
}

function shortNumber(x: number): string {
  return x >= 1e-3 && x < 1e5 ? String(x) : x.toExponential().replace('e+', 'e');
}

/** The lines of the plot; the first series lies on top. Empty where there is nothing above 0. */
export function plotLogLog(series: readonly PlottedPoints[], unit: string, style: LogPlotStyle): string[] {
  const drawn = series.map(({ mark, points }) => ({
    mark,
    points: points.filter(({ x, y }) => x > 0 && y > 0),
  }));
  const all = drawn.flatMap(({ points }) => points);
  if (all.length === 0) return [];
  const columns = Math.max(20, Math.min(style.width, WIDEST) - LABEL_WIDTH - 2);
  const [xAxis, yAxis] = [axisOf(all.map(({ x }) => x)), axisOf(all.map(({ y }) => y))];
  const grid = Array.from({ length: ROWS }, () => new Array<string>(columns).fill(' '));
  for (const { mark, points } of [...drawn].reverse()) {
    for (const { x, y } of points) grid[rowOf(yAxis, y)][columnOf(xAxis, x, columns)] = mark;
  }
  const labels = new Map(ticksOf(yAxis).map((tick) => [rowOf(yAxis, tick), shortNumber(tick)]));
  const [side, tickMark, corner] = style.unicode ? ['│', '┤', '└'] : ['|', '+', '+'];
  const rows = grid.map((cells, row) => {
    const label = labels.get(row);
    const margin = `${padStart(label ?? '', LABEL_WIDTH)} ${label === undefined ? side : tickMark}`;
    return (margin + cells.join('')).trimEnd();
  });
  const [base, text] = energyAxis(xAxis, columns, unit, style.unicode);
  return [...rows, `${' '.repeat(LABEL_WIDTH + 1)}${corner}${base}`, `${' '.repeat(LABEL_WIDTH + 2)}${text}`];
}

function rowOf(axis: Axis, value: number): number {
  return ROWS - 1 - Math.round(axis.part(value) * (ROWS - 1));
}

function columnOf(axis: Axis, value: number, columns: number): number {
  return Math.round(axis.part(value) * (columns - 1));
}

function energyAxis(
  axis: Axis,
  columns: number,
  unit: string,
  unicode: boolean,
): [base: string, labels: string] {
  const [line, mark] = unicode ? ['─', '┴'] : ['-', '+'];
  const base = new Array<string>(columns).fill(line);
  let labels = '';
  for (const tick of ticksOf(axis)) {
    const column = columnOf(axis, tick, columns);
    const label = shortNumber(tick);
    const at = Math.max(0, column - Math.floor(label.length / 2));
    if (labels !== '' && at < labels.length + TICK_SPACING - label.length) continue;
    if (at + label.length + unit.length + 1 > columns) continue;
    base[column] = mark;
    labels = labels.padEnd(at) + label;
  }
  return [base.join(''), `${labels} ${unit}`];
}
