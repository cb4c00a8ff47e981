/**
 * The materials known by name: the elements and the tables of compounds and mixtures in `tables/`. Case, spaces,
 * hyphens and underscores make no difference in names and aliases.
 */
import { checkDensity, checkedMaterial, constituentsOfFormula, constituentsOfMixture } from './compound.js';
import { elementAliases, elementBySymbol, elements, findElement, type Element } from './elements.js';
import { MaterialError } from './errors.js';
import type { Constituent, Material } from './material.js';
import { nearestWord, plain } from './nearest.js';
import { ELEMENT_DENSITIES, ELEMENT_DENSITY_EXCEPTIONS } from './tables/elements.js';
import { DETECTOR_ROWS } from './tables/detectors.js';
import { PLASTIC_ROWS } from './tables/plastics.js';
import type { MaterialRow } from './tables/row.js';
import { SHIELD_ROWS } from './tables/shields.js';
import { SUBSTANCE_ROWS } from './tables/substances.js';
import { TISSUE_ROWS } from './tables/tissues.js';

/** A material of the tables, with where its numbers come from. */
export interface NamedMaterial extends Material {
  readonly aliases: readonly string[];
  readonly description: string;
  readonly densitySource: string;
  readonly compositionSource: string;
}

const ROWS: readonly MaterialRow[] = [
  ...DETECTOR_ROWS,
  ...SHIELD_ROWS,
  ...PLASTIC_ROWS,
  ...SUBSTANCE_ROWS,
  ...TISSUE_ROWS,
];

const rowsByName = new Map<string, MaterialRow>();
for (const row of ROWS) {
  for (const name of [row.name, ...row.aliases]) rowsByName.set(plain(name), row);
}
const built = new Map<MaterialRow, NamedMaterial>();

/**
 * The material with this name, alias, element name or symbol; undefined where there is none. Case,
 * spaces, hyphens and underscores do not matter, except for symbols (see `findElement`).
 */
export function findMaterial(name: string): NamedMaterial | undefined {
  const row = rowsByName.get(plain(name));
  if (row) return materialOfRow(row);
  const element = findElement(name);
  return element && materialOfElement(element);
}

/** All compounds and mixtures of the tables, then the elements that have a density. */
export function namedMaterials(): readonly NamedMaterial[] {
  return [...ROWS.map(materialOfRow), ...elements().flatMap((element) => materialOfElement(element) ?? [])];
}

/** The known name nearest to a mistyped one; undefined where none is near. */
export function nearestMaterialName(name: string): string | undefined {
  const elementNames = elements().flatMap((element) => [element.name, ...elementAliases(element)]);
  return (
    nearestWord(name, [...ROWS.flatMap((row) => [row.name, ...row.aliases]), ...elementNames]) ?? undefined
  );
}

/**
 * The material meant by a word: a name of the tables, or any formula where a density is given with it.
 *
 * @param densityGPerCm3 takes the place of the table's density
 * @throws MaterialError `unknown_material`, `no_density`, `bad_density`, `bad_formula`, `unknown_element`
 */
export function resolveMaterial(nameOrFormula: string, densityGPerCm3?: number): Material {
  if (densityGPerCm3 !== undefined) checkDensity(densityGPerCm3);
  const named = findMaterial(nameOrFormula);
  if (named) return densityGPerCm3 === undefined ? named : { ...named, densityGPerCm3 };
  const constituents = constituentsByWord(nameOrFormula);
  if (densityGPerCm3 === undefined) {
    throw new MaterialError({
      code: 'no_density',
      value: JSON.stringify(nameOrFormula),
      rule: 'must be a material known by name, or a formula together with its density',
    });
  }
  return checkedMaterial(nameOrFormula.trim(), densityGPerCm3, constituents);
}

/**
 * A mixture by mass fractions.
 *
 * @param fractions keyed by element symbols, names of the tables, or formulas (tried in that order); they must
 *   add up to 1 within 0.001 and are then divided by their sum
 * @throws MaterialError `bad_mass_fraction`, `mass_fractions_sum`, `bad_density`, `bad_name` and those of
 *   unknown parts
 */
export function materialFromMassFractions(
  fractions: Readonly<Record<string, number>>,
  densityGPerCm3: number,
  name: string,
): Material {
  return checkedMaterial(name, densityGPerCm3, constituentsOfMixture(fractions, constituentsByWord));
}

/** The elements of a symbol, a named material or a formula. */
function constituentsByWord(word: string): readonly Constituent[] {
  const symbol = elementBySymbol(word);
  if (symbol) return [{ z: symbol.z, massFraction: 1 }];
  const row = rowsByName.get(plain(word));
  if (row) return materialOfRow(row).constituents;
  const element = findElement(word);
  if (element) return [{ z: element.z, massFraction: 1 }];
  try {
    return constituentsOfFormula(word);
  } catch (error) {
    throw error instanceof MaterialError ? unknownWord(word, error) : error;
  }
}

/** What to say of a word that is neither a name nor a formula: the nearest name, or what the formula lacks. */
function unknownWord(word: string, formulaError: MaterialError): MaterialError {
  const formulaLike = /^[A-Z([][A-Za-z0-9()[\].·*]*$/.test(word);
  if (formulaLike && /[0-9()[\]]/.test(word)) return formulaError;
  const suggestion = nearestMaterialName(word) ?? null;
  if (suggestion === null && formulaLike && /[A-Z]/.test(word.slice(1))) return formulaError;
  return new MaterialError({
    code: 'unknown_material',
    value: JSON.stringify(word),
    rule: 'must be the name of a material, the symbol of an element or a chemical formula',
    suggestion,
  });
}

function materialOfRow(row: MaterialRow): NamedMaterial {
  const known = built.get(row);
  if (known) return known;
  const constituents =
    typeof row.composition === 'string'
      ? constituentsOfFormula(row.composition)
      : constituentsOfMixture(row.composition, constituentsByWord);
  const material = {
    ...checkedMaterial(row.name, row.densityGPerCm3, constituents),
    aliases: row.aliases,
    description: row.description,
    densitySource: row.densitySource,
    compositionSource: row.compositionSource,
  };
  built.set(row, material);
  return material;
}

function materialOfElement(element: Element): NamedMaterial | undefined {
  if (element.densityGPerCm3 === null) return undefined;
  return {
    name: element.name,
    densityGPerCm3: element.densityGPerCm3,
    constituents: [{ z: element.z, massFraction: 1 }],
    aliases: elementAliases(element),
    description: `element ${element.z}`,
    densitySource: ELEMENT_DENSITY_EXCEPTIONS[element.symbol] ?? ELEMENT_DENSITIES,
    compositionSource: 'element',
  };
}
