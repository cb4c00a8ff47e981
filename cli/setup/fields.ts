/**
 * The leaves of the setup schema. Each reads one scalar or says in our own words what is wrong with it, and carries
 * the piece of JSON Schema that tells an editor the same.
 */
import * as z from 'zod';
import { Complaint, complaints } from '../errors.js';
import { hasUnsafeCharacters, showNumber } from '../show.js';
import {
  baseUnit,
  parseNumber,
  parseQuantity,
  quantityPattern,
  unitExample,
  type Dimension,
} from '../units.js';

/** Bounds in the base unit; `words` replaces the wording made from the numbers. */
export interface Range {
  readonly moreThan?: number;
  readonly atLeast?: number;
  readonly lessThan?: number;
  readonly atMost?: number;
  readonly words?: string;
}

export interface Described {
  readonly description: string;
  readonly examples?: readonly unknown[];
  /** What stands for the key where it is left out, as it would be written. */
  readonly default?: unknown;
}

type Meta = Readonly<Record<string, unknown>>;

/** Only what is there: an editor takes `default: undefined` for a default. */
function describe(described: Described): Meta {
  return Object.fromEntries(Object.entries(described).filter(([, value]) => value !== undefined));
}

/** A schema leaf from a reading function; the complaint travels in the issue's `params`. */
export function field<T>(meta: Meta, read: (raw: unknown) => T | Complaint) {
  return z
    .unknown()
    .transform((raw, context): T => {
      const result = read(raw);
      if (!(result instanceof Complaint)) return result;
      context.addIssue({ code: 'custom', message: result.rule, params: { complaint: result }, input: raw });
      return z.NEVER;
    })
    .meta(meta);
}

/** The bound that the value breaks, or null. */
export function rangeComplaint(value: number, range: Range, unit: string): Complaint | null {
  if (Number.isNaN(value) || !Number.isFinite(value)) return complaints.notFinite();
  const rule = brokenBound(value, range, unit);
  return rule === null ? null : complaints.outOfRange(range.words ?? rule);
}

function brokenBound(value: number, range: Range, unit: string): string | null {
  const bound = (words: string, limit: number) =>
    `${words} ${showNumber(limit)}${unit === '' || limit === 0 ? '' : ` ${unit}`}`;
  const { moreThan, atLeast, lessThan, atMost } = range;
  if (moreThan !== undefined && !(value > moreThan)) return bound('more than', moreThan);
  if (atLeast !== undefined && !(value >= atLeast)) return bound('at least', atLeast);
  if (lessThan !== undefined && !(value < lessThan)) return bound('less than', lessThan);
  if (atMost !== undefined && !(value <= atMost)) return bound('at most', atMost);
  return null;
}

/** A number with a unit; the value is in the base unit of the dimension. */
export function quantity(dimension: Dimension, range: Range, described: Described) {
  const meta = {
    type: 'string',
    pattern: quantityPattern([dimension]),
    examples: [unitExample([dimension])],
    ...describe(described),
  };
  return field(meta, (raw) => {
    const parsed = parseQuantity(raw, [dimension]);
    if (parsed instanceof Complaint) return parsed;
    return rangeComplaint(parsed.value, range, baseUnit(dimension)) ?? parsed.value;
  });
}

/** A number without a unit, as YAML number or as text such as "1e6". */
export function plainNumber(range: Range, described: Described) {
  return field({ type: ['number', 'string'], ...describe(described) }, (raw) => {
    const value = parseNumber(raw);
    if (Number.isNaN(value))
      return typeof raw === 'number' ? complaints.notFinite() : complaints.notANumber('a number');
    return rangeComplaint(value, range, '') ?? value;
  });
}

export function wholeNumber(least: number, most: number, described: Described) {
  return field({ type: ['number', 'string'], ...describe(described) }, (raw) => {
    const value = parseNumber(raw);
    if (Number.isNaN(value)) return complaints.notANumber('a whole number');
    const broken = rangeComplaint(value, { atLeast: least, atMost: most }, '');
    if (broken !== null) return broken;
    return Number.isInteger(value) ? value : complaints.notANumber('a whole number');
  });
}

/** A share: 0.005 or "0.5 %". */
export function share(range: Range, described: Described) {
  const meta = { type: ['number', 'string'], examples: ['0.5 %', 0.005], ...describe(described) };
  return field(meta, (raw) => {
    const plain = parseNumber(raw);
    if (!Number.isNaN(plain)) return rangeComplaint(plain, range, '') ?? plain;
    const parsed = typeof raw === 'number' ? complaints.notFinite() : parseQuantity(raw, ['percent']);
    if (parsed instanceof Complaint) {
      return parsed.code === 'not_finite'
        ? parsed
        : complaints.notANumber('a number or a percentage, as in 0.5 %');
    }
    return rangeComplaint(parsed.value / 100, range, '') ?? parsed.value / 100;
  });
}

export function trueOrFalse(described: Described) {
  return field({ type: 'boolean', ...describe(described) }, (raw) =>
    typeof raw === 'boolean' ? raw : complaints.wrongType('true or false'),
  );
}

/** One of a few words. */
export function choice<const T extends string>(what: string, words: readonly T[], described: Described) {
  return field({ type: 'string', enum: words, ...describe(described) }, (raw) => choose(what, words, raw));
}

/** The word itself, or a complaint with the nearest one. */
export function choose<const T extends string>(
  what: string,
  words: readonly T[],
  raw: unknown,
): T | Complaint {
  const found = words.find((word) => word === raw);
  if (found !== undefined) return found;
  if (typeof raw !== 'string') return complaints.wrongType(`one of ${words.join(', ')}`);
  return complaints.unknownChoice(what, raw, words);
}

/** A list; its bounds stand in the metadata, where they can be read back. */
export function list<S extends z.ZodType>(item: S, least: number, most: number, described: Described & Meta) {
  return z
    .array(item)
    .min(least)
    .max(most)
    .meta({ minItems: least, maxItems: most, ...describe(described) });
}

/** A short text on one line. */
export function text(longest: number, described: Described) {
  return field({ type: 'string', minLength: 1, maxLength: longest, ...describe(described) }, (raw) =>
    readText(raw, longest),
  );
}

export function readText(raw: unknown, longest: number): string | Complaint {
  if (typeof raw === 'number' || typeof raw === 'boolean')
    return complaints.wrongType('a text', 'put it in quotes');
  if (typeof raw !== 'string') return complaints.wrongType('a text');
  const trimmed = raw.trim();
  if (trimmed === '') return complaints.emptyText();
  if (trimmed.length > longest) return complaints.badText(`must have at most ${longest} characters`);
  if (hasUnsafeCharacters(trimmed))
    return complaints.badText('must not hold line breaks or control characters');
  return trimmed;
}
