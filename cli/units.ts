/**
 * Texts such as "7.62 cm" or "37 GBq" into numbers in fixed units (cm, g/cm², g/cm³, keV, Bq, s, degrees).
 *
 * Every factor is exact by the definition of the unit (SI Brochure, 9th edition; inch 25.4 mm by the international
 * yard and pound agreement of 1959; curie 3.7e10 Bq by NIST SP 811, appendix B).
 */
import { Complaint, complaints } from './errors.js';

interface UnitTable {
  /** What the unit measures, as in "a length". */
  readonly what: string;
  /** The unit the number is turned into. */
  readonly base: string;
  readonly units: Readonly<Record<string, number>>;
  readonly example: string;
}

const TABLES = {
  length: {
    what: 'a length',
    base: 'cm',
    units: { mm: 0.1, cm: 1, m: 100, um: 1e-4, nm: 1e-7, in: 2.54 },
    example: '7.62 cm',
  },
  mass_per_area: {
    what: 'a mass per area',
    base: 'g/cm2',
    units: { 'g/cm2': 1, 'mg/cm2': 1e-3, 'kg/m2': 0.1 },
    example: '2 g/cm2',
  },
  density: {
    what: 'a density',
    base: 'g/cm3',
    units: { 'g/cm3': 1, 'mg/cm3': 1e-3, 'kg/m3': 1e-3, 'g/l': 1e-3 },
    example: '5.78 g/cm3',
  },
  energy: {
    what: 'an energy',
    base: 'keV',
    units: { keV: 1, MeV: 1000, eV: 1e-3 },
    example: '661.7 keV',
  },
  root_energy: {
    what: 'a square root of an energy',
    base: 'keV^0.5',
    units: { 'keV^0.5': 1, 'MeV^0.5': Math.sqrt(1000) },
    example: '0.7 keV^0.5',
  },
  per_energy: {
    what: 'an inverse energy',
    base: '1/keV',
    units: { '1/keV': 1, '1/MeV': 1e-3 },
    example: '0.2 1/MeV',
  },
  activity: {
    what: 'an activity',
    base: 'Bq',
    units: {
      Bq: 1,
      kBq: 1e3,
      MBq: 1e6,
      GBq: 1e9,
      TBq: 1e12,
      Ci: 3.7e10,
      mCi: 3.7e7,
      uCi: 3.7e4,
      nCi: 37,
    },
    example: '37 kBq',
  },
  time: {
    what: 'a time',
    base: 's',
    units: { s: 1, ms: 1e-3, min: 60, h: 3600, d: 86_400 },
    example: '10 min',
  },
  angle: {
    what: 'an angle',
    base: 'deg',
    units: { deg: 1, rad: 180 / Math.PI },
    example: '30 deg',
  },
  percent: {
    what: 'a share',
    base: '%',
    units: { '%': 1 },
    example: '0.5 %',
  },
} as const satisfies Record<string, UnitTable>;

export type Dimension = keyof typeof TABLES;

/** A number in the base unit of its dimension. */
export interface Quantity {
  readonly dimension: Dimension;
  readonly value: number;
}

/** The unit that quantities of a dimension are turned into: `cm`, `keV` … */
export function baseUnit(dimension: Dimension): string {
  return TABLES[dimension].base;
}

export function unitNames(dimensions: readonly Dimension[]): string[] {
  return dimensions.flatMap((dimension) => Object.keys(TABLES[dimension].units));
}

export function unitExample(dimensions: readonly Dimension[]): string {
  return TABLES[dimensions[0]].example;
}

const NUMBER = String.raw`[-+]?(?:\d+\.?\d*|\.\d+)(?:[eE][-+]?\d+)?`;
const NUMBER_THEN_UNIT = new RegExp(`^(${NUMBER})\\s*(.*)$`, 's');
const NUMBER_ALONE = new RegExp(`^${NUMBER}$`);
const LONGEST_TEXT = 200;

/** A number without a unit: a YAML number or the text of one. NaN where it is neither. */
export function parseNumber(raw: unknown): number {
  if (typeof raw === 'number') return raw;
  if (typeof raw !== 'string' || raw.length > LONGEST_TEXT || !NUMBER_ALONE.test(raw.trim())) return NaN;
  return Number(raw);
}

/** Other spellings of the same unit: µm, g/cm², g/cm^3, °. */
function plainUnit(unit: string): string {
  return unit
    .trim()
    .replace(/^[µμ]/, 'u')
    .replace(/²/g, '2')
    .replace(/³/g, '3')
    .replace(/\^(?=[23]$)/, '')
    .replace(/\s*\/\s*/g, '/')
    .replace(/^°$/, 'deg');
}

/** Reads a number with one of the units of `dimensions`; a complaint says which units are taken. */
export function parseQuantity(raw: unknown, dimensions: readonly Dimension[]): Quantity | Complaint {
  const units = unitNames(dimensions);
  const example = unitExample(dimensions);
  if (typeof raw === 'number') {
    return Number.isFinite(raw) ? complaints.missingUnit(units, example) : complaints.notFinite();
  }
  if (typeof raw !== 'string') return complaints.notAQuantity(units, example);
  const text = raw.trim();
  if (/^[-+]?\.?(nan|inf|infinity)\b/i.test(text)) return complaints.notFinite();
  const match = text.length > LONGEST_TEXT ? null : NUMBER_THEN_UNIT.exec(text);
  if (match === null) return complaints.notAQuantity(units, example);
  const unit = plainUnit(match[2]);
  if (/^,\d/.test(unit)) return complaints.decimalComma(text.replace(',', '.'));
  if (unit === '') return complaints.missingUnit(units, example);
  for (const dimension of dimensions) {
    const table: UnitTable = TABLES[dimension];
    if (!Object.hasOwn(table.units, unit)) continue;
    const value = scale(Number(match[1]), table.units[unit]);
    return Number.isFinite(value) ? { dimension, value } : complaints.notFinite();
  }
  return complaints.unknownUnit(match[2], units);
}

/** Dividing by the whole number 1 / factor rounds once, so that 3 mm is 0.3 cm and not 0.30000000000000004 cm. */
function scale(value: number, factor: number): number {
  return factor < 1 ? value / Math.round(1 / factor) : value * factor;
}

/** A regular expression for editors that accepts what {@link parseQuantity} accepts. */
export function quantityPattern(dimensions: readonly Dimension[]): string {
  return String.raw`^\s*${NUMBER}\s*(?:${unitNames(dimensions).map(unitPattern).join('|')})\s*$`;
}

function unitPattern(unit: string): string {
  return unit
    .replace(/[.^]/g, String.raw`\$&`)
    .replace(/^u/, '[uµμ]')
    .replace(/2$/, '(?:\\^?2|²)')
    .replace(/3$/, '(?:\\^?3|³)')
    .replace(/\//g, String.raw`\s*/\s*`)
    .replace(/^deg$/, '(?:deg|°)');
}
