/** Goodness of fit, with the false-alarm rate of each verdict. */
import { expect } from 'vitest';

/**
 * Kolmogorov–Smirnov: largest distance of a cumulative from its law, times √n. Above 2.4 once in 5e4 tries when the
 * law is right (2 exp(−2 · 2.4²), Kolmogorov 1933); 100 tests of fixed seed give a false alarm with 0.2 %.
 */
export const KS_LIMIT = 2.4;

/** Standard errors allowed between a figure and its expectation: false alarm 6.3e-5 each (normal law). */
export const SIGMAS = 4;

/**
 * Distance of samples in bins from a law, times √n. Taken at the bounds of the bins only, which can but lower it: no
 * more false alarms than with the samples themselves.
 *
 * @param counts samples in each bin
 * @param cumulative the law at the upper bound of each bin; the last is 1
 */
export function ksOfBins(counts: ArrayLike<number>, cumulative: ArrayLike<number>): number {
  let total = 0;
  for (let i = 0; i < counts.length; i++) total += counts[i];
  let sum = 0;
  let distance = 0;
  for (let i = 0; i < counts.length; i++) {
    sum += counts[i];
    distance = Math.max(distance, Math.abs(sum / total - cumulative[i]));
  }
  return distance * Math.sqrt(total);
}

/** As `ksOfBins`, with the samples themselves (sorted in place) and the law as a function. */
export function ksOfSamples(samples: Float64Array, cumulative: (x: number) => number): number {
  samples.sort();
  const n = samples.length;
  let distance = 0;
  for (let i = 0; i < n; i++) {
    const law = cumulative(samples[i]);
    distance = Math.max(distance, Math.abs(law - i / n), Math.abs(law - (i + 1) / n));
  }
  return distance * Math.sqrt(n);
}

/**
 * Standardised χ² of counts against expectations, bins joined until each expects 20 at least:
 * (χ² − ν)/√(2 ν), about normal for the many bins used here.
 */
export function chiSquareSigmas(counts: ArrayLike<number>, expected: ArrayLike<number>): number {
  let chiSquare = 0;
  let bins = 0;
  let [count, expectation] = [0, 0];
  for (let i = 0; i < counts.length; i++) {
    count += counts[i];
    expectation += expected[i];
    if (expectation < 20) continue;
    chiSquare += (count - expectation) ** 2 / expectation;
    bins++;
    [count, expectation] = [0, 0];
  }
  return (chiSquare - bins) / Math.sqrt(2 * bins);
}

/** Fails unless a figure lies within `SIGMAS` standard errors (plus `slack`, absolute) of its expectation. */
export function expectNear(
  what: string,
  { mean, stdError }: { mean: number; stdError: number },
  expected: number,
  { expectedError = 0, slack = 0 } = {},
): void {
  const tolerance = SIGMAS * Math.hypot(stdError, expectedError) + slack;
  expect(
    Math.abs(mean - expected),
    `${what}: got ${mean} ± ${stdError}, expected ${expected}, tolerance ${tolerance}`,
  ).toBeLessThanOrEqual(tolerance);
}

/** ∫ f from a to b by Gauss–Legendre of order 5 in `parts` equal parts. */
export function integrate(f: (x: number) => number, a: number, b: number, parts = 200): number {
  const nodes = [0, 0.5384693101056831, 0.906179845938664];
  const weights = [0.5688888888888889, 0.47862867049936647, 0.23692688505618908];
  const half = (b - a) / (2 * parts);
  let sum = 0;
  for (let part = 0; part < parts; part++) {
    const middle = a + (2 * part + 1) * half;
    sum += weights[0] * f(middle);
    for (let n = 1; n < 3; n++) {
      sum += weights[n] * (f(middle - half * nodes[n]) + f(middle + half * nodes[n]));
    }
  }
  return sum * half;
}
