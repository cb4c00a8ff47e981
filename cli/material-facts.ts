/** Everything `thickset material` tells of a material, as plain data for text and JSON alike. */
import {
  absorptionEdges,
  elementOf,
  findMaterial,
  materialCoefficients,
  resolveMaterial,
  type Coefficients,
} from '../materials/index.js';

export interface ElementShare {
  readonly symbol: string;
  readonly z: number;
  readonly massFraction: number;
}

export interface MaterialEdge {
  readonly symbol: string;
  readonly shell: string;
  readonly energyKeV: number;
}

export interface AttenuationRow {
  readonly energyKeV: number;
  /** cm²/g. */
  readonly coefficients: Coefficients;
  /** 1/cm. */
  readonly linear: number;
  /** cm, like the other two lengths: narrow beam, uncollided photons. */
  readonly meanFreePathCm: number;
  readonly halfValueCm: number;
  readonly tenthValueCm: number;
}

export interface MaterialFacts {
  readonly name: string;
  readonly aliases: readonly string[];
  readonly description: string | null;
  readonly densityGPerCm3: number;
  readonly densitySource: string;
  readonly compositionSource: string;
  readonly elements: readonly ElementShare[];
  /** K and L edges from 1 keV upwards, descending. */
  readonly edges: readonly MaterialEdge[];
  readonly attenuation: readonly AttenuationRow[];
}

/** Round energies over the whole range, with the lines of common calibration sources among them. */
export const DEFAULT_ENERGIES_KEV: readonly number[] = [
  1, 2, 5, 10, 15, 20, 30, 40, 59.5, 80, 100, 150, 200, 300, 400, 511, 661.7, 800, 1000, 1250, 1500, 2000,
  3000, 5000, 10_000, 20_000,
];

/**
 * Looks a material up and evaluates its coefficients.
 *
 * @param nameOrFormula a named material or element, or a formula with a density
 * @param densityGPerCm3 takes the place of the density of the tables
 * @throws MaterialError
 */
export function materialFacts(
  nameOrFormula: string,
  densityGPerCm3: number | undefined,
  energiesKeV: readonly number[],
): MaterialFacts {
  const material = resolveMaterial(nameOrFormula, densityGPerCm3);
  const named = findMaterial(nameOrFormula);
  const elements = material.constituents.map(({ z, massFraction }) => ({
    symbol: elementOf(z).symbol,
    z,
    massFraction,
  }));
  return {
    name: material.name,
    aliases: named?.aliases ?? [],
    description: named?.description ?? null,
    densityGPerCm3: material.densityGPerCm3,
    densitySource: densityGPerCm3 === undefined && named ? named.densitySource : 'given',
    compositionSource: named?.compositionSource ?? 'chemical formula',
    elements,
    edges: elements
      .flatMap(({ symbol, z }) => absorptionEdges(z).map((edge) => ({ symbol, ...edge })))
      .filter(({ shell }) => /^[KL]/.test(shell))
      .sort((a, b) => b.energyKeV - a.energyKeV),
    attenuation: energiesKeV.map((energyKeV) => {
      const coefficients = materialCoefficients(material, energyKeV);
      const linear = coefficients.total * material.densityGPerCm3;
      return {
        energyKeV,
        coefficients,
        linear,
        meanFreePathCm: 1 / linear,
        halfValueCm: Math.LN2 / linear,
        tenthValueCm: Math.LN10 / linear,
      };
    }),
  };
}
