import { describe, expect, it } from 'vitest';
import {
  elements,
  elementOf,
  findElement,
  findMaterial,
  materialFromFormula,
  materialFromMassFractions,
  MaterialError,
  namedMaterials,
  nearestMaterialName,
  resolveMaterial,
  type Material,
} from '../../materials/index.js';

function fraction(material: Material, symbol: string): number {
  return material.constituents.find(({ z }) => elementOf(z).symbol === symbol)?.massFraction ?? 0;
}

describe('the named materials', () => {
  const compounds = namedMaterials().filter(({ compositionSource }) => compositionSource !== 'element');

  it('are at least 80 beside the elements', () => {
    expect(compounds.length).toBeGreaterThanOrEqual(80);
  });

  it('have mass fractions that add up to 1, ascending elements, a density and both sources', () => {
    for (const material of namedMaterials()) {
      const { name, constituents, densityGPerCm3, densitySource, compositionSource } = material;
      const sum = constituents.reduce((total, { massFraction }) => total + massFraction, 0);
      expect(sum, name).toBeCloseTo(1, 12);
      const zs = constituents.map(({ z }) => z);
      expect(zs, name).toEqual([...new Set(zs)].sort((a, b) => a - b));
      expect(densityGPerCm3, name).toBeGreaterThan(0);
      expect(densityGPerCm3, name).toBeLessThan(23);
      expect(densitySource.length * compositionSource.length, name).toBeGreaterThan(0);
    }
  });

  it('are each found by their name and every alias, and no word means two of them', () => {
    for (const material of namedMaterials()) {
      for (const word of [material.name, ...material.aliases, material.name.toUpperCase()]) {
        expect(findMaterial(word)?.name, word).toBe(material.name);
      }
    }
  });

  it.each([
    ['NaI', 3.667, 'NISTIR 5632, Table 2'],
    ['lead', 11.35, 'NISTIR 5632, Table 1'],
    ['aluminium', 2.699, 'NISTIR 5632, Table 1'],
    ['concrete', 2.3, 'NISTIR 5632, Table 2'],
    ['water', 1, 'NISTIR 5632, Table 2'],
    ['air', 1.20479e-3, 'NIST ESTAR'],
    ['tungsten', 19.3, 'NISTIR 5632, Table 1'],
    ['germanium', 5.323, 'NISTIR 5632, Table 1'],
  ])('%s has the density %f g/cm3 of %s', (name, density) => {
    expect(findMaterial(name)?.densityGPerCm3).toBe(density);
  });

  it.each([
    // Source: NIST list of compounds (ICRU Reports 37 and 49), mass fractions rounded to six digits there.
    ['NaI', { Na: 0.153373, I: 0.846627 }],
    ['BGO', { O: 0.154126, Ge: 0.17482, Bi: 0.671054 }],
    ['CdWO4', { O: 0.177644, Cd: 0.312027, W: 0.510329 }],
    ['PMMA', { H: 0.080538, C: 0.599848, O: 0.319614 }],
    ['kapton', { H: 0.026362, C: 0.691133, N: 0.07327, O: 0.209235 }],
    ['gypsum', { H: 0.023416, O: 0.557572, S: 0.186215, Ca: 0.232797 }],
    ['HgI2', { I: 0.55856, Hg: 0.44144 }],
    ['GOS', { O: 0.084528, S: 0.08469, Gd: 0.830782 }],
  ])('the formula of %s gives the published mass fractions', (name, published) => {
    for (const [symbol, expected] of Object.entries(published)) {
      expect(Math.abs(fraction(findMaterial(name)!, symbol) - expected), symbol).toBeLessThan(2e-4);
    }
  });

  it.each([
    ['Sodium Iodide', 'NaI'],
    ['  lead glass ', 'lead glass'],
    ['TUNGSTEN-HEAVY_ALLOY', 'tungsten heavy alloy'],
    ['Pb', 'lead'],
    ['pb', 'lead'],
    ['aluminum', 'aluminium'],
    ['DU', 'depleted uranium'],
    ['plexiglas', 'PMMA'],
  ])('%j means %s', (word, name) => {
    expect(findMaterial(word)?.name).toBe(name);
  });

  it.each(['CO', 'unobtainium', '', '__proto__', 'constructor', 'Es'])('%j means none of them', (word) => {
    expect(findMaterial(word)).toBeUndefined();
  });

  it.each([
    ['leed', 'lead'],
    ['tungstn', 'tungsten'],
    ['concreet', 'concrete'],
    ['alumnium', 'aluminium'],
    ['polyethylen', 'polyethylene'],
    ['xqzvwk', undefined],
  ])('a mistyped %j is nearest to %s', (word, nearest) => {
    expect(nearestMaterialName(word)).toBe(nearest);
  });
});

describe('the elements', () => {
  it('are 100, each found by symbol and name', () => {
    expect(elements()).toHaveLength(100);
    for (const element of elements()) {
      expect(findElement(element.symbol)).toBe(element);
      expect(findElement(element.name.toUpperCase())).toBe(element);
      expect(elementOf(element.z)).toBe(element);
    }
  });

  it.each([
    // Source: IUPAC standard atomic weights 2021, abridged.
    ['H', 1, 1.008],
    ['Fe', 26, 55.845],
    ['I', 53, 126.9],
    ['Tm', 69, 168.93],
    ['Pb', 82, 207.2],
    ['U', 92, 238.03],
  ])('%s has atomic number %i and weight %f', (symbol, z, weight) => {
    expect(elementOf(z)).toMatchObject({ symbol, atomicWeight: weight });
  });

  it('rise in atomic weight but for the known inversions', () => {
    const falls = elements().filter(
      ({ z, atomicWeight }) => z > 1 && atomicWeight < elementOf(z - 1).atomicWeight,
    );
    // Ar–K, Co–Ni, Te–I (Moseley) and, among radioactive elements with mass numbers only, the pairs named here.
    expect(falls.map(({ symbol }) => symbol)).toEqual(['K', 'Ni', 'I', 'Pa', 'Np', 'Am']);
  });
});

describe('a material by formula', () => {
  it('has the name, density and mass fractions of its formula', () => {
    const czt = materialFromFormula('Cd0.9Zn0.1Te', 5.78, 'my crystal');
    expect(czt).toMatchObject({ name: 'my crystal', densityGPerCm3: 5.78 });
    // Atomic weights of IUPAC: 0.9 · 112.41, 0.1 · 65.38, 127.60.
    const total = 0.9 * 112.41 + 6.538 + 127.6;
    expect(fraction(czt, 'Cd')).toBeCloseTo((0.9 * 112.41) / total, 12);
    expect(fraction(czt, 'Zn')).toBeCloseTo(6.538 / total, 12);
    expect(materialFromFormula(' H2O', 1).name).toBe('H2O');
  });

  it.each([0, -1, NaN, Infinity, 30.1])('cannot have the density %f', (density) => {
    expect(() => materialFromFormula('H2O', density)).toThrowError(
      expect.objectContaining({
        code: 'bad_density',
        message: `must be a density above 0 and at most 30 g/cm3, got ${density} g/cm3`,
      }),
    );
  });

  it('needs a name', () => {
    expect(() => materialFromFormula('H2O', 1, ' ')).toThrowError(
      expect.objectContaining({ code: 'bad_name' }),
    );
  });
});

describe('a material by mass fractions', () => {
  it('takes symbols, names and formulas side by side', () => {
    const mixed = materialFromMassFractions({ B: 0.05, polyethylene: 0.65, H2O: 0.3 }, 1, 'mix');
    // CH2 is 2 · 1.008 / 14.027 hydrogen, water 2 · 1.008 / 18.015.
    expect(fraction(mixed, 'H')).toBeCloseTo((0.65 * 2.016) / 14.027 + (0.3 * 2.016) / 18.015, 12);
    expect(fraction(mixed, 'B')).toBeCloseTo(0.05, 12);
    expect(mixed.constituents.map(({ z }) => z)).toEqual([1, 5, 6, 8]);
  });

  it('divides by the sum when that is 1 within 0.001, and leaves zeros out', () => {
    const mixed = materialFromMassFractions({ Pb: 0.9, Sb: 0.0995, Sn: 0 }, 11, 'alloy');
    expect(fraction(mixed, 'Pb')).toBeCloseTo(0.9 / 0.9995, 12);
    expect(mixed.constituents).toHaveLength(2);
  });

  it.each([
    [
      { Pb: 0.9, Sb: 0.05 },
      'mass_fractions_sum',
      'must be mass fractions that add up to 1 (within 0.001), got a sum of 0.95',
    ],
    [{}, 'mass_fractions_sum', 'must be mass fractions that add up to 1 (within 0.001), got a sum of 0'],
    [{ Pb: 90, Sb: 10 }, 'bad_mass_fraction', 'must be a mass fraction from 0 to 1, got 90 for Pb'],
    [{ Pb: 1.5, Sb: -0.5 }, 'bad_mass_fraction', 'must be a mass fraction from 0 to 1, got 1.5 for Pb'],
    [{ Pb: NaN }, 'bad_mass_fraction', 'must be a mass fraction from 0 to 1, got NaN for Pb'],
    [
      { leed: 1 },
      'unknown_material',
      'must be the name of a material, the symbol of an element or a chemical formula, got "leed" ' +
        '(did you mean lead?)',
    ],
    [{ 'H2(O': 1 }, 'bad_formula', 'must close each group: a ")" is missing, got "H2(O"'],
  ])('refuses %j', (fractions, code, message) => {
    const make = () => materialFromMassFractions(fractions as Record<string, number>, 1, 'mix');
    expect(make).toThrowError(MaterialError);
    expect(make).toThrowError(expect.objectContaining({ code, message }));
  });
});

describe('resolveMaterial', () => {
  it('takes a name, with another density where one is given', () => {
    expect(resolveMaterial('NaI')).toBe(findMaterial('NaI'));
    expect(resolveMaterial('xenon gas', 0.055)).toMatchObject({ name: 'xenon gas', densityGPerCm3: 0.055 });
  });

  it('takes any formula with a density, and none without', () => {
    expect(resolveMaterial('CuZn', 8.4).constituents.map(({ z }) => z)).toEqual([29, 30]);
    expect(() => resolveMaterial('CuZn')).toThrowError(expect.objectContaining({ code: 'no_density' }));
    expect(() => resolveMaterial('Es')).toThrowError(expect.objectContaining({ code: 'no_density' }));
  });

  it.each([
    ['leed', 'unknown_material', 'lead'],
    ['sodum iodide', 'unknown_material', 'sodium iodide'],
    ['xqzvwk', 'unknown_material', null],
    ['Xx2O3', 'unknown_element', 'Xe'],
    ['H2(O', 'bad_formula', null],
  ])('says of %j what is wrong and what may be meant', (word, code, suggestion) => {
    expect(() => resolveMaterial(word)).toThrowError(expect.objectContaining({ code, suggestion }));
  });
});
