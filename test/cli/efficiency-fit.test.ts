/**
 * Polynomials fitted to efficiencies. Limits on statistics are 4 standard errors, which a right value exceeds by
 * chance once in 16,000 times (normal law); seeds are fixed.
 */
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import seedrandom from 'seedrandom';
import { describe, expect, test } from 'vitest';
import type { CurveRow } from '../../cli/efficiency/curve-rows.js';
import { decodeCurve, decodeFits, encodeCurve, encodeFits } from '../../cli/efficiency/curve-tables.js';
import { fitCurves } from '../../cli/efficiency/fit-curve.js';
import {
  efficiencyAt,
  fitDegree,
  fitLogPolynomial,
  type CurvePoint,
} from '../../cli/efficiency/log-polynomial.js';
import { efficiencyOf, writeCurve } from '../../cli/efficiency/pack-curve.js';
import { readResult } from '../../cli/result/stored-result.js';
import { parseSetup } from '../../cli/setup-reader.js';
import { simulateEfficiency } from '../../engine/index.js';
import { leastSquares } from '../../cli/response/least-squares.js';
import { resolveMaterial } from '../../materials/index.js';

const ENERGIES = Array.from({ length: 40 }, (_, i) => 30 * 100 ** (i / 39));
/** Of the size and shape of a 3-inch crystal's. */
const TRUE = [-6.4, -0.86, 0.07, 0.08];

function curve(coefficients: readonly number[], energyKeV: number): number {
  const x = Math.log(energyKeV / 1000);
  return Math.exp(coefficients.reduce((sum, a, k) => sum + a * x ** k, 0));
}

/** Two independent standard normal numbers for two uniform ones (Box & Muller 1958). */
function normal(random: () => number): number {
  return Math.sqrt(-2 * Math.log(1 - random())) * Math.cos(2 * Math.PI * random());
}

/** Points on the true curve, each moved by its own relative error. */
function points(seed: string, relative: number): CurvePoint[] {
  const random = seedrandom(seed);
  return ENERGIES.map((energyKeV) => {
    const mean = curve(TRUE, energyKeV) * Math.exp(relative * normal(random));
    return { energyKeV, mean, stdError: relative * mean };
  });
}

describe('least squares', () => {
  // Straight line through (0, 1), (1, 3), (2, 4) with errors 1, 2, 1. By the normal equations, weights 1, 1/4, 1:
  // S = 9/4, Sx = 9/4, Sxx = 17/4, Sy = 23/4, Sxy = 35/4; D = S Sxx − Sx² = 72/16.
  const fit = leastSquares(
    [
      [1, 0],
      [1, 1],
      [1, 2],
    ],
    [1, 3, 4],
    [1, 2, 1],
  );

  test('gives the solution of the normal equations', () => {
    const [s, sx, sxx, sy, sxy] = [9 / 4, 9 / 4, 17 / 4, 23 / 4, 35 / 4];
    const determinant = s * sxx - sx * sx;
    expect(fit.coefficients[0]).toBeCloseTo((sxx * sy - sx * sxy) / determinant, 12);
    expect(fit.coefficients[1]).toBeCloseTo((s * sxy - sx * sy) / determinant, 12);
  });

  test('gives their inverse as covariance', () => {
    const determinant = (9 / 4) * (17 / 4) - (9 / 4) ** 2;
    const expected = [
      [17 / 4, -9 / 4],
      [-9 / 4, 9 / 4],
    ];
    expected.forEach((row, k) =>
      row.forEach((value, l) => expect(fit.covariance[k][l]).toBeCloseTo(value / determinant, 12)),
    );
  });

  test('gives the sum of squared residuals over variances', () => {
    const [a, b] = fit.coefficients;
    expect(fit.chiSquare).toBeCloseTo((1 - a) ** 2 + ((3 - a - b) / 2) ** 2 + (4 - a - 2 * b) ** 2, 12);
  });
});

describe('a fitted polynomial', () => {
  test('through exact points has the coefficients they were made with', () => {
    const exact = ENERGIES.map((energyKeV) => {
      const mean = curve(TRUE, energyKeV);
      return { energyKeV, mean, stdError: 0.001 * mean };
    });
    const { coefficients, chiSquare } = fitLogPolynomial(exact)!;
    expect(coefficients).toHaveLength(4);
    coefficients.forEach((value, k) => expect(value).toBeCloseTo(TRUE[k], 9));
    expect(chiSquare).toBeLessThan(1e-9);
  });

  test('scatters over many trials as its covariance says, and about the true coefficients', () => {
    const trials = 400;
    const fits = Array.from({ length: trials }, (_, i) => fitDegree(points(`trial ${i}`, 0.01), 3));
    const reference = leastSquares(
      ENERGIES.map((energy) => TRUE.map((_, k) => Math.log(energy / 1000) ** k)),
      ENERGIES.map(() => 0),
      ENERGIES.map(() => 0.01),
    ).covariance;
    for (let k = 0; k < 4; k++) {
      const mean = fits.reduce((sum, { coefficients }) => sum + coefficients[k], 0) / trials;
      const error = Math.sqrt(reference[k][k] / trials);
      expect(Math.abs(mean - TRUE[k]), `mean of a${k}`).toBeLessThan(4 * error);
      for (let l = 0; l <= k; l++) {
        const scatter =
          fits.reduce((sum, { coefficients: a }) => sum + (a[k] - TRUE[k]) * (a[l] - TRUE[l]), 0) / trials;
        // Variance of a sample covariance of normal numbers: (σkk σll + σkl²) / n.
        const spread = Math.sqrt((reference[k][k] * reference[l][l] + reference[k][l] ** 2) / trials);
        expect(Math.abs(scatter - reference[k][l]), `covariance ${k}, ${l}`).toBeLessThan(4 * spread);
      }
    }
  });

  test('has the degree that its residuals ask for: more precise points show more of the curve', () => {
    const degrees = [1, 0.05, 0.001].map(
      (relative) => fitLogPolynomial(points('degree', relative))!.coefficients.length - 1,
    );
    expect(degrees[0]).toBeLessThan(degrees[1]);
    expect(degrees[2]).toBe(3);
  });

  test('enlarges its covariance where the points scatter by more than their errors', () => {
    const honest = points('excess', 0.01);
    const boasting = honest.map((point) => ({ ...point, stdError: point.stdError / 5 }));
    const [first, second] = [fitDegree(honest, 3), fitDegree(boasting, 3)];
    expect(second.chiSquare / first.chiSquare).toBeCloseTo(25, 9);
    // Both then say what the scatter says.
    const own = Math.max(1, first.chiSquare / first.degreesOfFreedom);
    const scatter = second.chiSquare / 25 / second.degreesOfFreedom;
    expect(second.covariance[0][0] / (first.covariance[0][0] / own)).toBeCloseTo(scatter, 9);
  });

  test('tells the efficiency between the points with an error that covers it', () => {
    let outside = 0;
    for (let i = 0; i < 100; i++) {
      const { mean, stdError } = efficiencyAt(fitDegree(points(`between ${i}`, 0.01), 3), 500);
      if (Math.abs(mean - curve(TRUE, 500)) > 2 * stdError) outside++;
    }
    // 4.6 of 100 are expected outside two standard errors; 14 or more happen by chance once in 7,000 times (binomial).
    expect(outside).toBeLessThan(14);
  });

  test.each([0, 1, 2])('needs 3 points, not %d', (count) => {
    expect(fitLogPolynomial(points('few', 0.01).slice(0, count))).toBeNull();
  });
});

const stack = [
  {
    name: 'window',
    material: resolveMaterial('aluminium'),
    thicknessCm: 0.1,
    radiusCm: null,
    detector: null,
  },
  {
    name: 'crystal',
    material: resolveMaterial('NaI'),
    thicknessCm: 5,
    radiusCm: null,
    detector: { resolution: null, thresholdKeV: null, windows: [] },
  },
  { name: 'shield', material: resolveMaterial('lead'), thicknessCm: 5, radiusCm: null, detector: null },
];

function row(energyKeV: number, mean: number | null, stdError: number | null): CurveRow {
  const value = { mean, stdError };
  return {
    energyKeV,
    layer: 'crystal',
    histories: 10_000,
    full_energy: value,
    interacting: { mean: 1, stdError: 0 },
    intrinsic_full_energy: value,
    intrinsic_interacting: value,
    peak_to_total: { mean: null, stdError: null },
    incident: { mean: 0.5, stdError: 0.01 },
  };
}

const rows = [20, 24, 28, 32, 40, 60, 100, 200, 500, 1000].map((energy) =>
  row(energy, curve(TRUE, energy), 1e-5),
);

describe('the fits of a curve', () => {
  test('are cut at the K edge of the crystal, 33.17 keV, and not at that of lead behind it', () => {
    const fits = fitCurves({ stack }, rows).filter(({ quantity }) => quantity === 'full_energy');
    expect(
      fits.map(({ energyLowKeV, energyHighKeV, points: n }) => [energyLowKeV, energyHighKeV, n]),
    ).toEqual([
      [20, 32, 4],
      [40, 1000, 6],
    ]);
  });

  test('take an efficiency that every history shares as known to one in all of them', () => {
    const fit = fitCurves({ stack }, rows).find(({ quantity }) => quantity === 'interacting')!;
    expect(fit.coefficients).toHaveLength(1);
    expect(fit.coefficients[0]).toBeCloseTo(0, 12);
    // Four points of relative error 1e-4.
    expect(Math.sqrt(fit.covariance[0][0])).toBeCloseTo(1e-4 / 2, 9);
  });

  test('leave out energies at which nothing was seen', () => {
    const some = [row(15, 0, null), row(16, null, null), ...rows];
    expect(fitCurves({ stack }, some)[0]).toMatchObject({ points: 4, energyLowKeV: 20 });
  });

  test('survive their Arrow table to the bit', () => {
    const fits = fitCurves({ stack }, rows);
    expect(decodeFits(encodeFits(fits))).toEqual(fits);
    expect(decodeFits(encodeFits([]))).toEqual([]);
  });
});

test('a program gets rows and fits of a curve, and writes what it reads back', async () => {
  const setup = parseSetup(
    'source: {kind: beam, energies: {from: 100 keV, to: 1 MeV, count: 4}}\n' +
      'stack: [{name: crystal, material: NaI, thickness: 2 cm, detector: {}}]\n' +
      'run: {histories: 2000}\n',
  ).setup;
  const curve = await simulateEfficiency(setup, { threads: 1 });
  const { rows: made, fits } = efficiencyOf(curve);
  expect(made.map(({ energyKeV }) => energyKeV)).toEqual(setup.energyGridKeV);
  expect(fits.map(({ quantity }) => quantity)).toEqual(['full_energy', 'interacting']);
  const folder = mkdtempSync(join(tmpdir(), 'thickset-curve-'));
  writeCurve(folder, curve);
  expect(readResult(folder).efficiency).toEqual({ rows: made, fits });
  expect(readResult(folder).manifest.energies).toHaveLength(4);
  rmSync(folder, { recursive: true });
});

test('the rows of a curve survive their Arrow table to the bit, unknown values as such', () => {
  const all = [row(10, null, null), ...rows];
  expect(decodeCurve(encodeCurve(all))).toEqual(all);
  expect(decodeCurve(encodeCurve([]))).toEqual([]);
});
