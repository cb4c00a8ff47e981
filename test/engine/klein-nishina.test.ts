import { describe, expect, it } from 'vitest';
import {
  COLUMNS,
  fillIncoherentTable,
  incoherentRows,
  ROW_LENGTH,
  sampleIncoherent,
} from '../../engine/physics/incoherent.js';
import {
  comptonEnergyRatio,
  kleinNishinaShape,
  kleinNishinaTotalCm2,
} from '../../engine/physics/klein-nishina.js';
import { nextUniform, seedStream } from '../../engine/random.js';
import { publishedRows } from '../published/csv.js';
import { expectNear, integrate, KS_LIMIT, ksOfSamples } from './goodness.js';

/** h c in keV Å and m c² in keV (CODATA 2018): the Compton wavelength is their ratio. */
const HC = 12.39841984;
const REST = 510.99895;
/** h / m c (CODATA 2018), 0.0243 in every textbook. */
const COMPTON_WAVELENGTH = 0.0242631024;

const ENERGIES = [10, 100, 500, 1000, 5000];
const SAMPLES = 1_000_000;
const TOP_KEV = 20_000;

const table = new Float64Array(incoherentRows(TOP_KEV) * ROW_LENGTH);
fillIncoherentTable([{ shareAt: () => 1, binding: null }], incoherentRows(TOP_KEV), table);

/** v = (1 − cos θ)/2 of many scatterings of free electrons. */
function sampledV(energyKeV: number): Float64Array {
  const state = new Float64Array(4);
  seedStream(state, `free electrons at ${energyKeV} keV`, 0);
  return Float64Array.from({ length: SAMPLES }, () =>
    sampleIncoherent(table, 0, energyKeV, nextUniform(state)),
  );
}

/**
 * Share of photons scattered to an energy share below ρ, in closed form: in ρ the law is 1/ρ + ρ − sin² θ with
 * cos θ = 1 − (1/ρ − 1)/k (Evans, The Atomic Nucleus (1955), ch. 23), and that is integrated term by term.
 */
function energyCumulative(energyKeV: number): (ratio: number) => number {
  const k = energyKeV / REST;
  const a = 1 + 1 / k;
  const antiderivative = (r: number) =>
    (1 - (2 * a) / k) * Math.log(r) + (r * r) / 2 + (a * a - 1) * r - 1 / (k * k * r);
  const least = antiderivative(1 / (1 + 2 * k));
  const all = antiderivative(1) - least;
  return (r) => (antiderivative(r) - least) / all;
}

/** The Klein–Nishina law per solid angle, up to a factor, in its textbook form. */
function perSolidAngle(energyKeV: number, cosine: number): number {
  const p = 1 / (1 + (energyKeV / REST) * (1 - cosine));
  return p * p * (p + 1 / p - (1 - cosine * cosine));
}

/** Cumulative over cos θ by quadrature of the law per solid angle on fine, forward-crowded nodes. */
function angleCumulative(energyKeV: number): (v: number) => number {
  const nodes = 4000;
  const at = (i: number) => (i / nodes) ** 3;
  const sums = new Float64Array(nodes + 1);
  for (let i = 1; i <= nodes; i++) {
    sums[i] = sums[i - 1] + integrate((v) => perSolidAngle(energyKeV, 1 - 2 * v), at(i - 1), at(i), 1);
  }
  return (v) => {
    const i = Math.min(nodes - 1, Math.floor(Math.cbrt(v) * nodes));
    const part = (v - at(i)) / (at(i + 1) - at(i));
    return (sums[i] + part * (sums[i + 1] - sums[i])) / sums[nodes];
  };
}

describe('the free-electron law of Klein and Nishina', () => {
  // Attix, Introduction to Radiological Physics (1986), appendix D, and the other sources of klein-nishina.csv
  it.each(publishedRows('klein-nishina').map((row) => ({ ...row, energyMeV: Number(row.energy_MeV) })))(
    'has at $energyMeV MeV the total cross section of the handbooks',
    ({ energyMeV, ...row }) => {
      const barn = kleinNishinaTotalCm2(1000 * energyMeV) * 1e24;
      const published = Number((row as Record<string, string>).sigma_total_b_per_electron);
      expect(Math.abs(barn - published)).toBeLessThan(1e-6 + 1e-6 * published);
    },
  );

  it('has the same total cross section where its series hands over to the closed form', () => {
    const energyKeV = 1e-3 * REST;
    const jump = kleinNishinaTotalCm2(energyKeV * (1 + 1e-9)) / kleinNishinaTotalCm2(energyKeV * (1 - 1e-9));
    expect(Math.abs(jump - 1)).toBeLessThan(1e-7);
  });

  it.each([1, 30, 661.7, 20_000])('integrates at %d keV from its shape to its closed form', (energyKeV) => {
    const radius = 2.8179403262e-13; // classical electron radius, cm, CODATA 2018
    const integral = integrate((root) => 2 * root * kleinNishinaShape(energyKeV, root * root), 0, 1, 400);
    // dΩ = 4π dv, dσ/dΩ = r²/2 × shape
    expect(
      Math.abs((2 * Math.PI * radius ** 2 * integral) / kleinNishinaTotalCm2(energyKeV) - 1),
    ).toBeLessThan(1e-7);
  });

  it.each(ENERGIES)('is followed at %d keV by 10⁶ sampled angles and energies', (energyKeV) => {
    const v = sampledV(energyKeV);
    const ratios = v.map((value) => comptonEnergyRatio(energyKeV, value));
    expect(ksOfSamples(v, angleCumulative(energyKeV))).toBeLessThan(KS_LIMIT);
    expect(ksOfSamples(ratios, energyCumulative(energyKeV))).toBeLessThan(KS_LIMIT);
  });

  it.each(ENERGIES)('shifts at %d keV every wavelength by 0.0243 Å × (1 − cos θ)', (energyKeV) => {
    let worst = 0;
    let [least, most] = [Infinity, 0];
    for (const v of sampledV(energyKeV)) {
      const scatteredKeV = energyKeV * comptonEnergyRatio(energyKeV, v);
      const shift = HC / scatteredKeV - HC / energyKeV;
      worst = Math.max(worst, Math.abs(shift - COMPTON_WAVELENGTH * 2 * v));
      if (v < 0.01) continue; // a quotient of two differences: only where they are not lost in rounding
      least = Math.min(least, shift / (2 * v));
      most = Math.max(most, shift / (2 * v));
    }
    expect(worst).toBeLessThan(1e-9);
    expect(least.toFixed(4)).toBe('0.0243');
    expect(most.toFixed(4)).toBe('0.0243');
  });

  it.each(
    publishedRows('klein-nishina')
      .map(({ energy_MeV }) => Number(energy_MeV))
      .filter((e) => e >= 0.01),
  )('gives the electron at %d MeV the mean share of the handbooks', (energyMeV) => {
    const row = publishedRows('klein-nishina').find((r) => Number(r.energy_MeV) === energyMeV)!;
    const state = new Float64Array(4);
    seedStream(state, `mean share at ${energyMeV}`, 0);
    const samples = 100_000;
    let [sum, squares, back] = [0, 0, 0];
    for (let i = 0; i < samples; i++) {
      const v = sampleIncoherent(table, 0, 1000 * energyMeV, nextUniform(state));
      const share = 1 - comptonEnergyRatio(1000 * energyMeV, v);
      sum += share;
      squares += share * share;
      if (v > 0.5) back++;
    }
    const mean = sum / samples;
    const stdError = Math.sqrt((squares / samples - mean * mean) / samples);
    const rounding = 1e-5; // last digit of the table
    expectNear('share', { mean, stdError }, Number(row.mean_fraction_of_energy_to_electron), {
      slack: rounding,
    });
    const share = back / samples;
    const backError = Math.sqrt((share * (1 - share)) / samples);
    expectNear(
      'beyond 90°',
      { mean: share, stdError: backError },
      Number(row.fraction_scattered_beyond_90deg),
      {
        slack: rounding,
      },
    );
  });

  it.each([1, 1.5, 2, 10.01, 511, 1023.999, 1024, 20_000])(
    'runs at %d keV from 0 to full backscatter and rises with the uniform number',
    (energyKeV) => {
      expect(sampleIncoherent(table, 0, energyKeV, 0)).toBe(0);
      const last = sampleIncoherent(table, 0, energyKeV, 1 - 2 ** -32);
      expect(last).toBeLessThanOrEqual(1);
      expect(last).toBeGreaterThan(1 - 1e-6);
      let before = -1;
      for (let i = 0; i < 16 * COLUMNS; i++) {
        const v = sampleIncoherent(table, 0, energyKeV, i / (16 * COLUMNS));
        expect(v).toBeGreaterThan(before);
        before = v;
      }
    },
  );
});
