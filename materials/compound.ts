/** Materials made from a formula or from mass fractions. */
import { elementOf } from './elements.js';
import { MaterialError } from './errors.js';
import { parseFormula } from './formula.js';
import type { Constituent, Material } from './material.js';

/** The densest solid at room conditions, osmium, has 22.6 g/cm³; more than this is a slip of units. */
const MAX_DENSITY_G_PER_CM3 = 30;
/** How far the given mass fractions may be from adding up to 1; they are then divided by their sum. */
export const MASS_FRACTION_TOLERANCE = 1e-3;
const MAX_NAME_LENGTH = 100;

/**
 * A material by chemical formula.
 *
 * @param formula see `formula.ts`
 * @param densityGPerCm3 above 0, at most 30
 * @throws MaterialError `bad_formula`, `unknown_element`, `bad_density`, `bad_name`
 */
export function materialFromFormula(
  formula: string,
  densityGPerCm3: number,
  name = formula.trim(),
): Material {
  return checkedMaterial(name, densityGPerCm3, constituentsOfFormula(formula));
}

/** The elements of a formula with their shares by mass, ascending in z. */
export function constituentsOfFormula(formula: string): Constituent[] {
  const masses = new Map<number, number>();
  for (const [z, count] of parseFormula(formula)) masses.set(z, count * elementOf(z).atomicWeight);
  return normalised(masses);
}

/**
 * The elements of a mixture.
 *
 * @param fractions mass fraction of each part; they must add up to 1 within 0.001 and are then divided by their
 *   sum; parts with fraction 0 are left out
 * @param constituentsOf the elements of a part by its word
 * @throws MaterialError `bad_mass_fraction`, `mass_fractions_sum`, and what `constituentsOf` throws
 */
export function constituentsOfMixture(
  fractions: Readonly<Record<string, number>>,
  constituentsOf: (part: string) => readonly Constituent[],
): Constituent[] {
  const masses = new Map<number, number>();
  let sum = 0;
  for (const [part, fraction] of Object.entries(fractions)) {
    checkFraction(part, fraction);
    sum += fraction;
    for (const { z, massFraction } of constituentsOf(part)) {
      if (fraction > 0) masses.set(z, (masses.get(z) ?? 0) + fraction * massFraction);
    }
  }
  if (!(Math.abs(sum - 1) <= MASS_FRACTION_TOLERANCE)) {
    throw new MaterialError({
      code: 'mass_fractions_sum',
      value: `a sum of ${Number(sum.toPrecision(6))}`,
      rule: `must be mass fractions that add up to 1 (within ${MASS_FRACTION_TOLERANCE})`,
    });
  }
  return normalised(masses);
}

/** The material after its name and density have been checked. */
export function checkedMaterial(
  name: string,
  densityGPerCm3: number,
  constituents: readonly Constituent[],
): Material {
  if (typeof name !== 'string' || name.trim() === '' || name.length > MAX_NAME_LENGTH) {
    throw new MaterialError({
      code: 'bad_name',
      value: JSON.stringify(name),
      rule: `must be a name of 1 to ${MAX_NAME_LENGTH} characters`,
    });
  }
  checkDensity(densityGPerCm3);
  return { name, densityGPerCm3, constituents };
}

/**
 * Checks a density in g/cm³.
 *
 * @throws MaterialError `bad_density`
 */
export function checkDensity(densityGPerCm3: number): void {
  if (densityGPerCm3 > 0 && densityGPerCm3 <= MAX_DENSITY_G_PER_CM3) return;
  throw new MaterialError({
    code: 'bad_density',
    value: `${densityGPerCm3} g/cm3`,
    rule: `must be a density above 0 and at most ${MAX_DENSITY_G_PER_CM3} g/cm3`,
  });
}

function checkFraction(part: string, fraction: number): void {
  if (fraction >= 0 && fraction <= 1 + MASS_FRACTION_TOLERANCE) return;
  throw new MaterialError({
    code: 'bad_mass_fraction',
    value: `${fraction} for ${part}`,
    rule: 'must be a mass fraction from 0 to 1',
  });
}

function normalised(masses: ReadonlyMap<number, number>): Constituent[] {
  const total = [...masses.values()].reduce((sum, mass) => sum + mass, 0);
  return [...masses].map(([z, mass]) => ({ z, massFraction: mass / total })).sort((a, b) => a.z - b.z);
}
