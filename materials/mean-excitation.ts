/**
 * Mean excitation energy of a material: the additivity rule of ICRU Report 37 (1984, section 5.3 and table 5.1),
 * which gives the constituents of compounds other values than the free elements have.
 */
import { elementMeanExcitationEv } from './electron-data.js';
import { elementOf } from './elements.js';
import type { Constituent } from './material.js';

/** Gases (and vapours) are thinner, everything condensed is denser. */
const GAS_BELOW_G_PER_CM3 = 0.02;

/** Constituents of compounds: values of ICRU 37, table 5.1, in eV. */
const IN_GASES = new Map([
  [1, 19.2],
  [6, 70],
  [7, 82],
  [8, 97],
]);
const IN_LIQUIDS_AND_SOLIDS = new Map([
  [1, 19.2],
  [6, 81],
  [7, 82],
  [8, 106],
  [9, 112],
  [17, 180],
]);
/** All other elements in condensed compounds: 1.13 times the element's value (ibid.). */
const CONDENSED_FACTOR = 1.13;

/** H, C, N, O, F, P, S, Cl, As, Se, Br, Te, I: elements that bind as the other partner of metals. */
const NON_METALS = new Set([1, 6, 7, 8, 9, 15, 16, 17, 33, 34, 35, 52, 53]);
/** Share of non-metal atoms from which a material counts as a compound; cast iron has 0.15 at most. */
const COMPOUND_FROM_SHARE = 0.16;

/** What the stopping of electrons needs of a material. */
export interface Matter {
  readonly densityGPerCm3: number;
  readonly constituents: readonly Constituent[];
}

/** Electrons per mass, Σ w Z / A, mol/g. */
export function electronsPerMass({ constituents }: Matter): number {
  return constituents.reduce(
    (sum, { z, massFraction }) => sum + (massFraction * z) / elementOf(z).atomicWeight,
    0,
  );
}

/** Whether the material is a compound, whose electrons are all bound, and not an element or an alloy. */
export function isCompound({ constituents }: Matter): boolean {
  if (constituents.length < 2) return false;
  let atoms = 0;
  let nonMetals = 0;
  for (const { z, massFraction } of constituents) {
    const share = massFraction / elementOf(z).atomicWeight;
    atoms += share;
    if (NON_METALS.has(z)) nonMetals += share;
  }
  return nonMetals > COMPOUND_FROM_SHARE * atoms;
}

/** Mean excitation energy of a material in eV. */
export function meanExcitationEv(material: Matter): number {
  const ofConstituent = constituentRule(material);
  let sum = 0;
  for (const { z, massFraction } of material.constituents) {
    sum += ((massFraction * z) / elementOf(z).atomicWeight) * Math.log(ofConstituent(z));
  }
  return Math.exp(sum / electronsPerMass(material));
}

function constituentRule(material: Matter): (z: number) => number {
  if (material.constituents.length < 2) return elementMeanExcitationEv;
  if (material.densityGPerCm3 < GAS_BELOW_G_PER_CM3) {
    return (z) => IN_GASES.get(z) ?? elementMeanExcitationEv(z);
  }
  if (!isCompound(material)) return elementMeanExcitationEv;
  return (z) => IN_LIQUIDS_AND_SOLIDS.get(z) ?? CONDENSED_FACTOR * elementMeanExcitationEv(z);
}
