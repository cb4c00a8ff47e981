import { describe, expect, it } from 'vitest';
import { logSampled } from '../../engine/physics/log-sampled.js';
import { photoelectronShape, samplePhotoelectronCosine } from '../../engine/physics/photoelectron.js';
import { seedStream } from '../../engine/random.js';
import { formFactorAt, incoherentFunctionAt } from '../../materials/index.js';
import { integrate, KS_LIMIT, ksOfBins } from './goodness.js';

const REST = 510.99895; // m c², keV (CODATA 2018)

/** Sauter's K-shell law per solid angle (Ann. Phys. 11 (1931) 454, as in Davisson and Evans 1952), up to a factor. */
function sauter(electronKeV: number, cosine: number): number {
  const gamma = 1 + electronKeV / REST;
  const beta = Math.sqrt(1 - gamma ** -2);
  const slant = 1 - beta * cosine;
  return ((1 - cosine ** 2) / slant ** 4) * (1 + 0.5 * gamma * (gamma - 1) * (gamma - 2) * slant);
}

describe('the direction of photoelectrons', () => {
  it.each([2, 30, 300, 1000, 2600, 18_000])('at %d keV follows Sauter’s law', (electronKeV) => {
    const random = new Float64Array(4);
    seedStream(random, `sauter ${electronKeV}`, 0);
    // Bins of 1 − cos θ, crowded forward
    const bins = 400;
    const counts = new Float64Array(bins);
    for (let i = 0; i < 200_000; i++) {
      const nu = 1 - samplePhotoelectronCosine(electronKeV, random);
      counts[Math.min(bins - 1, Math.floor(Math.cbrt(nu / 2) * bins))]++;
    }
    const sums = new Float64Array(bins);
    let sum = 0;
    for (let i = 0; i < bins; i++) {
      sum += integrate((q) => sauter(electronKeV, 1 - 2 * q ** 3) * q * q, i / bins, (i + 1) / bins, 4);
      sums[i] = sum;
    }
    expect(
      ksOfBins(
        counts,
        sums.map((value) => value / sum),
      ),
    ).toBeLessThan(KS_LIMIT);
  });

  it('has a density that is Sauter’s law up to a factor', () => {
    for (const electronKeV of [5, 500, 5000]) {
      const factor = photoelectronShape(electronKeV, 0.7) / sauter(electronKeV, 0.3);
      for (const nu of [0.01, 0.2, 1, 1.9]) {
        expect(photoelectronShape(electronKeV, nu) / sauter(electronKeV, 1 - nu) / factor).toBeCloseTo(1, 9);
      }
    }
  });

  it('stays a cosine at both ends of the uniform numbers', () => {
    for (const electronKeV of [1, 100, 20_000]) {
      // The first state gives 0 twice; the second the largest number first, then 0
      for (const state of [new Float64Array(4), new Float64Array([1 - 2 ** -32, 0, 0, 0])]) {
        const cosine = samplePhotoelectronCosine(electronKeV, state);
        expect(Math.abs(cosine)).toBeLessThanOrEqual(1);
      }
    }
  });
});

describe('a function sampled on an even grid of the logarithm', () => {
  it.each([
    { title: 'F of lead', f: (x: number) => formFactorAt(82, x) },
    { title: 'F of hydrogen', f: (x: number) => formFactorAt(1, x) },
    { title: 'S of lead', f: (x: number) => incoherentFunctionAt(82, x) },
    { title: 'S of carbon', f: (x: number) => incoherentFunctionAt(6, x) },
  ])('gives $title within 0.3 %', ({ f }) => {
    const sampled = logSampled(f, { low: 1e-3, high: 2000, nodes: 900 });
    for (let x = 2e-4; x < 1900; x *= 1.0137) {
      expect(Math.abs(sampled(x) / f(x) - 1), `x = ${x}`).toBeLessThan(3e-3);
    }
  });
});
