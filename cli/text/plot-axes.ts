/** Ticks and scales for plots made of characters. */

/** The counts axis: which height (0 to 1) a value has and which values are labelled. */
export interface CountsAxis {
  readonly logarithmic: boolean;
  /** Text rows the plot takes. */
  readonly rows: number;
  /** Labels by row, counted from the bottom; a label marks the upper edge of the row below it, 0 the base line. */
  readonly labels: ReadonlyMap<number, string>;
  readonly height: (value: number) => number;
}

/** Where the highest column stands out of the typical one by more than this, straight counts would show it alone. */
const LOGARITHMIC_ABOVE = 20;
const MOST_DECADES = 6;
const LINEAR_ROWS = 8;
/** Text rows of a logarithmic plot by its decades, so that every decade has the same whole number of rows. */
const ROWS_BY_DECADES = [8, 8, 8, 9, 8, 10, 12];

/** The smallest of 1, 2, 2.5, 5 or 10 times a power of ten that is not below x. */
export function roundUp(x: number): number {
  const power = 10 ** Math.floor(Math.log10(x));
  const step = [1, 2, 2.5, 5, 10].find((candidate) => candidate * power >= x * (1 - 1e-12)) ?? 10;
  return Number((step * power).toPrecision(3));
}

function shortNumber(x: number): string {
  const rounded = Number(x.toPrecision(3));
  const plain = rounded === 0 || (rounded >= 1e-3 && rounded < 1e5);
  return plain ? String(rounded) : rounded.toExponential().replace('e+', 'e');
}

function linearAxis(highest: number): CountsAxis {
  const top = roundUp(highest);
  const labels = new Map([0, 0.5, 1].map((part) => [part * LINEAR_ROWS, shortNumber(part * top)]));
  return { logarithmic: false, rows: LINEAR_ROWS, labels, height: (value) => value / top };
}

function logarithmicAxis(ascending: readonly number[]): CountsAxis {
  const top = Math.ceil(Math.log10(ascending[ascending.length - 1]) - 1e-9);
  // The lowest tenth is mostly noise of single counts; it would stretch the axis for nothing.
  const low = Math.floor(Math.log10(ascending[Math.floor(ascending.length / 10)]));
  const bottom = Math.min(top - 1, Math.max(low, top - MOST_DECADES));
  const decades = top - bottom;
  const rows = ROWS_BY_DECADES[decades];
  const labels = new Map<number, string>();
  for (let decade = 0; decade <= decades; decade++) {
    labels.set((decade * rows) / decades, `1e${bottom + decade}`);
  }
  return { logarithmic: true, rows, labels, height: (value) => (Math.log10(value) - bottom) / decades };
}

/** Picks the axis that shows most of the given heights (at least one above 0). */
export function chooseCountsAxis(values: readonly number[]): CountsAxis {
  const ascending = values.filter((value) => value > 0).sort((a, b) => a - b);
  const highest = ascending[ascending.length - 1];
  const typical = ascending[Math.floor(ascending.length / 2)];
  return highest > LOGARITHMIC_ABOVE * typical ? logarithmicAxis(ascending) : linearAxis(highest);
}

/** Round values at even steps inside [low, high], at most `most` of them. */
export function energyTicks(low: number, high: number, most: number): number[] {
  const step = roundUp((high - low) / Math.max(1, most));
  const ticks: number[] = [];
  for (let k = Math.ceil(low / step - 1e-9); k * step <= high * (1 + 1e-9); k++) {
    ticks.push(Number((k * step).toPrecision(10)));
  }
  return ticks;
}
