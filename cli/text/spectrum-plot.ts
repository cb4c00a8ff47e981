/**
 * A spectrum drawn with characters: columns of eighth blocks over a labelled energy axis. Heights are per keV, so
 * the area stands for the counts however many bins one column covers.
 */
import { padStart, truncate } from './display-width.js';
import { chooseCountsAxis, energyTicks, type CountsAxis } from './plot-axes.js';

/** The bins of one spectrum; equal lengths, ascending, mean per bin (NaN where unknown). */
export interface PlottedSpectrum {
  readonly energyLowKeV: ArrayLike<number>;
  readonly energyHighKeV: ArrayLike<number>;
  readonly mean: ArrayLike<number>;
}

export interface PlotStyle {
  readonly width: number;
  readonly unicode: boolean;
}

interface Glyphs {
  /** From nothing to a full cell. */
  readonly fill: readonly string[];
  readonly side: string;
  readonly mark: string;
  readonly corner: string;
  readonly base: string;
  readonly tick: string;
}

const BLOCKS: Glyphs = { fill: [...' ▁▂▃▄▅▆▇█'], side: '│', mark: '┤', corner: '└', base: '─', tick: '┴' };
const ASCII: Glyphs = { fill: [...' .:#'], side: '|', mark: '+', corner: '+', base: '-', tick: '+' };

const LABEL_WIDTH = 7;
const WIDEST = 120;
/** Columns of the terminal from one energy label to the next, at least. */
const TICK_SPACING = 9;

/** Mean density (per keV) in each of `columns` equal steps of energy; bins are shared out by overlap. */
export function densityColumns(spectrum: PlottedSpectrum, columns: number): Float64Array {
  const { energyLowKeV: low, energyHighKeV: high, mean } = spectrum;
  const bins = mean.length;
  const start = low[0];
  const step = (high[bins - 1] - start) / columns;
  const density = new Float64Array(columns);
  for (let bin = 0; bin < bins; bin++) {
    if (!(mean[bin] > 0)) {
      continue;
    }
    const perKeV = mean[bin] / (high[bin] - low[bin]);
    const first = Math.max(0, Math.floor((low[bin] - start) / step));
    const last = Math.min(columns - 1, Math.floor((high[bin] - start) / step));
    for (let column = first; column <= last; column++) {
      const from = Math.max(low[bin], start + column * step);
      const to = Math.min(high[bin], start + (column + 1) * step);
      density[column] += (perKeV * Math.max(0, to - from)) / step;
    }
  }
  return density;
}

function drawRow(row: number, density: Float64Array, axis: CountsAxis, fill: readonly string[]): string {
  const full = fill.length - 1;
  let text = '';
  for (const value of density) {
    // Whatever is above 0 shows at least as a sliver on the base line.
    const steps = value > 0 ? Math.max(1, Math.round(axis.height(value) * axis.rows * full)) : 0;
    text += fill[Math.min(full, Math.max(0, steps - row * full))];
  }
  return text.trimEnd();
}

function drawEnergyAxis(low: number, high: number, columns: number, glyphs: Glyphs): [string, string] {
  const base = new Array<string>(columns).fill(glyphs.base);
  let labels = '';
  const unit = ' keV';
  for (const tick of energyTicks(low, high, Math.floor(columns / TICK_SPACING))) {
    const column = Math.min(columns - 1, Math.round(((tick - low) / (high - low)) * columns));
    const label = String(tick);
    const at = Math.max(0, column - Math.floor(label.length / 2));
    base[column] = glyphs.tick;
    const fits = at + label.length + unit.length <= columns;
    if (fits && (labels === '' || at > labels.length)) {
      labels = labels.padEnd(at) + label;
    }
  }
  return [base.join(''), labels + unit];
}

/**
 * The lines of the plot, none wider than `style.width`; an empty list where the spectrum holds nothing.
 * `logarithmic` tells the caption which axis was chosen.
 */
export function plotSpectrum(
  spectrum: PlottedSpectrum,
  style: PlotStyle,
): { readonly lines: readonly string[]; readonly logarithmic: boolean } {
  const glyphs = style.unicode ? BLOCKS : ASCII;
  const columns = Math.max(20, Math.min(style.width, WIDEST) - LABEL_WIDTH - 2);
  const density = densityColumns(spectrum, columns);
  if (!density.some((value) => value > 0)) {
    return { lines: [], logarithmic: false };
  }
  const axis = chooseCountsAxis([...density]);
  const margin = (edge: number, side: string): string => {
    const label = axis.labels.get(edge);
    return `${padStart(label ?? '', LABEL_WIDTH)} ${label === undefined ? side : side === glyphs.side ? glyphs.mark : side}`;
  };
  const lines: string[] = [];
  for (let row = axis.rows - 1; row >= 0; row--) {
    lines.push(margin(row + 1, glyphs.side) + drawRow(row, density, axis, glyphs.fill));
  }
  const last = spectrum.mean.length - 1;
  const [base, labels] = drawEnergyAxis(
    spectrum.energyLowKeV[0],
    spectrum.energyHighKeV[last],
    columns,
    glyphs,
  );
  lines.push(margin(0, glyphs.corner) + base, ' '.repeat(LABEL_WIDTH + 2) + labels);
  return { lines: lines.map((line) => truncate(line, style.width)), logarithmic: axis.logarithmic };
}
