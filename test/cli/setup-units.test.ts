/** Numbers with units. */
import { describe, expect, it } from 'vitest';
import { Complaint } from '../../cli/errors.js';
import { parseNumber, parseQuantity, quantityPattern, unitNames, type Dimension } from '../../cli/units.js';

/** Values by definition of the units: SI Brochure (9th edition), inch 25.4 mm, curie 3.7e10 Bq (NIST SP 811). */
const GOOD: readonly [string, Dimension, number][] = [
  ['7.62 cm', 'length', 7.62],
  ['7.62cm', 'length', 7.62],
  [' 3 mm ', 'length', 0.3],
  ['1e-2 m', 'length', 1],
  ['+.5 cm', 'length', 0.5],
  ['5. cm', 'length', 5],
  ['3 in', 'length', 7.62],
  ['12 um', 'length', 12e-4],
  ['12 µm', 'length', 12e-4],
  ['12 μm', 'length', 12e-4],
  ['5 nm', 'length', 5e-7],
  ['2 g/cm2', 'mass_per_area', 2],
  ['2 g/cm²', 'mass_per_area', 2],
  ['2 g / cm^2', 'mass_per_area', 2],
  ['20 kg/m2', 'mass_per_area', 2],
  ['7 mg/cm2', 'mass_per_area', 0.007],
  ['11.34 g/cm3', 'density', 11.34],
  ['11340 kg/m³', 'density', 11.34],
  ['1.2 g/l', 'density', 0.0012],
  ['1.2 mg/cm^3', 'density', 0.0012],
  ['661.7 keV', 'energy', 661.7],
  ['5.9E3 eV', 'energy', 5.9],
  ['1.3325 MeV', 'energy', 1332.5],
  ['37 GBq', 'activity', 37e9],
  ['1 TBq', 'activity', 1e12],
  ['370 kBq', 'activity', 370e3],
  ['1 MBq', 'activity', 1e6],
  ['1 Bq', 'activity', 1],
  ['1 Ci', 'activity', 3.7e10],
  ['10 mCi', 'activity', 3.7e8],
  ['10 uCi', 'activity', 3.7e5],
  ['10 µCi', 'activity', 3.7e5],
  ['1 nCi', 'activity', 37],
  ['1.5 h', 'time', 5400],
  ['10 min', 'time', 600],
  ['2 d', 'time', 172_800],
  ['500 ms', 'time', 0.5],
  ['30 deg', 'angle', 30],
  ['30 °', 'angle', 30],
  ['3.141592653589793 rad', 'angle', 180],
  ['0.5 %', 'percent', 0.5],
  ['1.5 keV^0.5', 'root_energy', 1.5],
  ['0.2 1/MeV', 'per_energy', 0.0002],
];

const BAD: readonly [unknown, Dimension, string][] = [
  [7.62, 'length', 'missing_unit'],
  ['7.62', 'length', 'missing_unit'],
  ['7.62 ft', 'length', 'unknown_unit'],
  ['7.62 CM', 'length', 'unknown_unit'],
  ['7.62 cm2', 'length', 'unknown_unit'],
  ['7.62 cm 5', 'length', 'unknown_unit'],
  ['1 g/cm2', 'density', 'unknown_unit'],
  ['1 kev', 'energy', 'unknown_unit'],
  ['1e keV', 'energy', 'unknown_unit'],
  ['7,62 cm', 'length', 'not_a_quantity'],
  ['cm', 'length', 'not_a_quantity'],
  ['', 'length', 'not_a_quantity'],
  ['--1 cm', 'length', 'not_a_quantity'],
  ['0x10 cm', 'length', 'unknown_unit'],
  [null, 'length', 'not_a_quantity'],
  [true, 'length', 'not_a_quantity'],
  [{ cm: 1 }, 'length', 'not_a_quantity'],
  ['1'.repeat(300), 'length', 'not_a_quantity'],
  ['nan cm', 'length', 'not_finite'],
  ['-inf cm', 'length', 'not_finite'],
  ['1e400 cm', 'length', 'not_finite'],
  [NaN, 'length', 'not_finite'],
];

describe('A quantity', () => {
  it.each(GOOD)('"%s" is a %s of %d in the fixed unit', (text, dimension, value) => {
    const parsed = parseQuantity(text, [dimension]);
    expect(parsed).toMatchObject({ dimension });
    // One rounding of the decimal text and one of the factor.
    const relative = Math.abs((parsed as { value: number }).value / value - 1);
    expect(relative).toBeLessThanOrEqual(2 * Number.EPSILON);
  });

  it.each(BAD)('%j as %s is refused: %s', (raw, dimension, code) => {
    const parsed = parseQuantity(raw, [dimension]);
    expect(parsed).toBeInstanceOf(Complaint);
    expect((parsed as Complaint).code).toBe(code);
  });

  it('of two dimensions keeps the one that was meant', () => {
    expect(parseQuantity('2 g/cm2', ['length', 'mass_per_area'])).toEqual({
      dimension: 'mass_per_area',
      value: 2,
    });
    expect(parseQuantity('2 cm', ['length', 'mass_per_area'])).toEqual({ dimension: 'length', value: 2 });
  });

  it.each(GOOD)('"%s" as %s fits the pattern that editors check', (text, dimension) => {
    expect(text).toMatch(new RegExp(quantityPattern([dimension])));
  });

  it.each(BAD.filter(([raw, , code]) => typeof raw === 'string' && code !== 'not_finite' && raw.length < 99))(
    '%j as %s does not fit the pattern that editors check',
    (raw, dimension) => {
      expect(raw).not.toMatch(new RegExp(quantityPattern([dimension])));
    },
  );

  it('is refused with all units that are taken', () => {
    const complaint = parseQuantity('1 ft', ['length']) as Complaint;
    for (const unit of unitNames(['length'])) expect(complaint.wayOut).toContain(unit);
  });
});

describe('A number without unit', () => {
  it.each([
    [1, 1],
    ['1e6', 1e6],
    [' -2.5 ', -2.5],
  ])('%j is %d', (raw, value) => {
    expect(parseNumber(raw)).toBe(value);
  });

  it.each(['', '1 000', '1_000', '0x10', 'Infinity', '1e', 'one', null, true, []])('%j is none', (raw) => {
    expect(parseNumber(raw)).toBeNaN();
  });
});
