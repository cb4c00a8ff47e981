/** Values of a varied parameter: their canonical text, what they are in fixed units, and ranges of them. */
import { Complaint } from '../errors.js';
import { showFlow } from '../show.js';
import { baseUnit, parseNumber, parseQuantity, type Dimension } from '../units.js';

/** All dimensions, in the order in which units are looked for. */
const DIMENSIONS: readonly Dimension[] = [
  'length',
  'mass_per_area',
  'density',
  'energy',
  'root_energy',
  'per_energy',
  'activity',
  'time',
  'angle',
  'percent',
];

/** A value that is a number in a fixed unit; '' for pure numbers. */
export interface Measure {
  readonly value: number;
  readonly unit: string;
}

/** The number and unit of a value; null where it is none. */
export function measureOf(raw: unknown): Measure | null {
  const plain = parseNumber(raw);
  if (Number.isFinite(plain)) return { value: plain, unit: '' };
  if (typeof raw !== 'string') return null;
  const quantity = parseQuantity(raw, DIMENSIONS);
  return quantity instanceof Complaint ? null : { value: quantity.value, unit: baseUnit(quantity.dimension) };
}

/** One text for all spellings of a value: 10 mm and 1 cm are the same. */
export function canonicalText(raw: unknown): string {
  const measure = measureOf(raw);
  if (measure !== null) return `${measure.value} ${measure.unit}`.trim();
  if (Array.isArray(raw)) return `[${raw.map(canonicalText).join(', ')}]`;
  if (typeof raw !== 'object' || raw === null) return String(raw);
  const entries = Object.entries(raw).sort(([a], [b]) => (a < b ? -1 : 1));
  return `{${entries.map(([key, value]) => `${key}: ${canonicalText(value)}`).join(', ')}}`;
}

/** How the values of a parameter stand in tables. */
export interface ValueColumn {
  /** Of all numbers of the column; null where it holds texts. */
  readonly unit: string | null;
  readonly values: readonly (number | string)[];
}

/** Numbers where all values are numbers of one unit, texts otherwise. */
export function columnOf(raws: readonly unknown[]): ValueColumn {
  const measures = raws.map(measureOf);
  const unit = measures[0]?.unit ?? null;
  if (unit !== null && measures.every((measure) => measure?.unit === unit)) {
    return { unit, values: measures.map((measure) => measure!.value) };
  }
  return { unit: null, values: raws.map((raw) => showFlow(raw)) };
}

export type Spacing = 'linear' | 'log';

export interface RangeEnds {
  readonly from: Measure;
  readonly to: Measure;
  readonly spacing: Spacing;
}

/** The value at a share 0–1 of a range, as it may stand in a setup file; the ends are exact. */
export function valueInRange({ from, to, spacing }: RangeEnds, share: number): number | string {
  const value =
    share === 0
      ? from.value
      : share === 1
        ? to.value
        : rounded(
            spacing === 'log'
              ? from.value * (to.value / from.value) ** share
              : from.value + (to.value - from.value) * share,
          );
  return from.unit === '' ? value : `${value} ${from.unit}`;
}

/** Twelve figures: a step of 0.1 cm gives 0.3 cm and not 0.30000000000000004 cm. */
function rounded(value: number): number {
  return Number(value.toPrecision(12));
}
