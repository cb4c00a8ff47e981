import { readFileSync } from 'node:fs';
import { tableFromIPC } from 'apache-arrow';
import { describe, expect, it, test } from 'vitest';
import {
  absorptionEdges,
  coefficientArrays,
  elementCoefficients,
  fillCoefficients,
  findMaterial,
  materialCoefficients,
  MaterialError,
  type Coefficients,
} from '../../materials/index.js';
import { publishedRows } from '../published/csv.js';

const TOLERANCE = 0.01;
/** cm²/g. XCOM tabulates 0 at 1022 keV, 2 eV above the threshold, where a trace of pair production begins. */
const PAIR_AT_THRESHOLD = 1e-12;

describe('mass attenuation coefficients', () => {
  const published = publishedRows('mass-attenuation');
  const names = [...new Set(published.map((row) => row.material))];

  it.each(names)('of %s lie within 1 %% of the published ones', (name) => {
    // Source: NISTIR 5632 (Hubbell and Seltzer 1995), Tables 3 and 4; the table of each row is named in it.
    const rows = published.filter((row) => row.material === name);
    expect(rows.length).toBeGreaterThanOrEqual(10);
    const deviating = rows
      .map((row) => {
        const got = materialCoefficients(findMaterial(name)!, Number(row.energy_keV)).total;
        return { ...row, got, deviation: got / Number(row.mass_attenuation_cm2_per_g) - 1 };
      })
      .filter(({ deviation }) => !(Math.abs(deviation) <= TOLERANCE));
    expect(deviating).toEqual([]);
  });

  it('are the sums of their parts, weighted by mass', () => {
    const water = { constituents: [1, 8].map((z, i) => ({ z, massFraction: [0.2, 0.8][i] })) };
    for (const energyKeV of [1, 37.5, 661.7, 1500, 20_000]) {
      const [hydrogen, oxygen] = [elementCoefficients(1, energyKeV), elementCoefficients(8, energyKeV)];
      const mixed = materialCoefficients(water, energyKeV);
      for (const part of ['photoelectric', 'incoherent', 'coherent', 'pair', 'total'] as const) {
        expect(mixed[part]).toBeCloseTo(0.2 * hydrogen[part] + 0.8 * oxygen[part], 12);
      }
      const { photoelectric, incoherent, coherent, pair, total } = mixed;
      expect(total / (photoelectric + incoherent + coherent + pair)).toBeCloseTo(1, 14);
    }
  });

  it('are the same for one energy and for an array of energies in any order', () => {
    const energies = Float64Array.of(20_000, 1, 88.004, 661.7, 1, 2614.5, 88.004, 13.035);
    const lead = findMaterial('lead')!;
    const out = coefficientArrays(energies.length);
    fillCoefficients(lead, energies, out, 'below');
    energies.forEach((energyKeV, i) => {
      const one = materialCoefficients(lead, energyKeV, 'below');
      for (const part of Object.keys(one) as (keyof Coefficients)[]) expect(out[part][i]).toBe(one[part]);
    });
  });

  test.each([0.999, 20_001, 0, -5, NaN, Infinity])('do not exist at %f keV', (energyKeV) => {
    expect(() => elementCoefficients(13, energyKeV)).toThrowError(MaterialError);
    expect(() => elementCoefficients(13, energyKeV)).toThrowError(/from 1 keV to 20 MeV, got/);
  });

  test.each([0, 101, 1.5, NaN])('do not exist for atomic number %f', (z) => {
    expect(() => elementCoefficients(z, 100)).toThrowError(/atomic number from 1 to 100, got/);
  });
});

describe('the parts at the nodes of the table', () => {
  const address = new URL('../../materials/data/photon-cross-sections.arrow', import.meta.url);
  const rows = tableFromIPC(readFileSync(address))
    .toArray()
    .map((row) => row.toJSON())
    .filter(({ energy_keV }) => energy_keV >= 1 && energy_keV <= 20_000);

  it.each(['photoelectric', 'incoherent', 'coherent', 'pair'] as const)('give the tabulated %s', (part) => {
    // Source: XCOM (NBSIR 87-3597), every row of the table for Z = 1–100. 0.1 % is the rounding of neighbouring
    // rows; the spline passes through all but a few of them exactly.
    const deviating = rows.filter((row, i) => {
      const next = rows[i + 1];
      const lower = next && next.z === row.z && next.energy_keV === row.energy_keV;
      const got = elementCoefficients(row.z, row.energy_keV, lower ? 'below' : 'above')[part];
      return !(Math.abs(got - row[part]) <= 1e-3 * row[part] + PAIR_AT_THRESHOLD);
    });
    expect(rows.length).toBeGreaterThan(7000);
    expect(deviating).toEqual([]);
  });
});

describe('pair production', () => {
  it('is nothing at and below the threshold of 1021.998 keV and rises above it', () => {
    expect(elementCoefficients(82, 1021.99).pair).toBe(0);
    expect(elementCoefficients(82, 1022.5).pair).toBeGreaterThan(0);
    expect(elementCoefficients(82, 1022.5).pair).toBeLessThan(1e-8);
  });

  it.each([1030, 1060, 1100, 1150, 1200, 1300, 1500, 2000])(
    'in hydrogen at %f keV follows the Born approximation within 1 %%',
    (energyKeV) => {
      // Source: Bethe–Heitler total in Maximon's expansion for low energies (J. Res. NBS 72B (1968) 79);
      // below 1.25 MeV nothing is tabulated and this is the check of the extrapolation. Only hydrogen is light
      // enough for it; carbon already differs by 4 % at the threshold through its charge.
      expect(
        Math.abs(elementCoefficients(1, energyKeV).pair / bornPair(1, 1.008, energyKeV) - 1),
      ).toBeLessThan(0.01);
    },
  );
});

/** cm²/g; fine-structure constant, classical electron radius and Avogadro's number of CODATA 2018. */
function bornPair(z: number, atomicWeight: number, energyKeV: number): number {
  const k = energyKeV / 510.99895;
  const rho = (2 * k - 4) / (2 + k + 2 * Math.sqrt(2 * k));
  const series = 1 + rho / 2 + (23 / 40) * rho ** 2 + (11 / 60) * rho ** 3 + (29 / 960) * rho ** 4;
  const perAtom =
    (z ** 2 / 137.035999) * 2.8179403e-13 ** 2 * ((2 * Math.PI) / 3) * ((k - 2) / k) ** 3 * series;
  return (perAtom * 6.02214076e23) / atomicWeight;
}

describe('absorption edges', () => {
  const published = publishedRows('absorption-edges');

  it.each(published)('$symbol $shell is a jump of less than 2 eV width, as published', (row) => {
    // Source: NISTIR 5632, Table 3: coefficients just below and just above each edge.
    const z = Number(row.z);
    const edge = absorptionEdges(z).find(({ shell }) => shell === row.shell)!;
    expect(Math.abs(edge.energyKeV / Number(row.energy_keV) - 1)).toBeLessThan(1e-4);
    const below = elementCoefficients(z, edge.energyKeV - 0.001).total;
    const above = elementCoefficients(z, edge.energyKeV + 0.001).total;
    expect(Math.abs(below / Number(row.below_cm2_per_g) - 1)).toBeLessThan(TOLERANCE);
    expect(Math.abs(above / Number(row.above_cm2_per_g) - 1)).toBeLessThan(TOLERANCE);
  });

  it.each([26, 53, 55, 74, 82, 92])(
    'of K and L shells of Z = %i do not reach beyond their own energy',
    (z) => {
      const innerEdges = absorptionEdges(z).filter(({ shell }) => /^[KL]/.test(shell));
      expect(innerEdges.length).toBe(z === 26 ? 1 : 4);
      for (const { energyKeV } of innerEdges) {
        const sideBySide = [
          [elementCoefficients(z, energyKeV, 'below'), elementCoefficients(z, energyKeV - 0.001)],
          [elementCoefficients(z, energyKeV, 'above'), elementCoefficients(z, energyKeV + 0.001)],
        ];
        // 1 eV of 4.5 keV (the lowest edge here) is 0.02 % in energy, 0.07 % in a curve that falls as E⁻³.
        for (const [at, beside] of sideBySide) {
          expect(Math.abs(beside.photoelectric / at.photoelectric - 1)).toBeLessThan(0.001);
        }
        const [below, above] = sideBySide.map(([at]) => at);
        expect(above.photoelectric / below.photoelectric).toBeGreaterThan(1.01);
        for (const part of ['incoherent', 'coherent', 'pair'] as const) {
          expect(Math.abs(above[part] - below[part])).toBeLessThanOrEqual(1e-12 * below[part]);
        }
      }
    },
  );

  it('of the M5 shell of rhenium lies at its binding energy, between those of its neighbours', () => {
    // XCOM itself places it at 1.8224 keV. Source: F. P. Larkins, At. Data Nucl. Data Tables 20 (1977) 311.
    const m5 = [74, 75, 76].map((z) => absorptionEdges(z).find(({ shell }) => shell === 'M5')!.energyKeV);
    expect(m5).toEqual([1.8092, 1.8829, 1.9601]);
    const [lower, upper] = [1.83, 1.88].map((energyKeV) => elementCoefficients(75, energyKeV).photoelectric);
    expect(upper).toBeLessThan(lower);
  });

  it('are listed from 1 keV upwards with their shells, ascending', () => {
    // Source: XCOM edge energies; below 1 keV (oxygen) none is given.
    expect(absorptionEdges(8)).toEqual([]);
    expect(absorptionEdges(13)).toEqual([{ shell: 'K', energyKeV: 1.5596 }]);
    expect(absorptionEdges(82).map(({ shell }) => shell)).toEqual([
      'M5',
      'M4',
      'M3',
      'M2',
      'M1',
      'L3',
      'L2',
      'L1',
      'K',
    ]);
    for (let z = 1; z <= 100; z++) {
      const energies = absorptionEdges(z).map(({ energyKeV }) => energyKeV);
      expect(energies).toEqual([...energies].sort((a, b) => a - b));
    }
  });
});
