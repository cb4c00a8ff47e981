/** The pieces of deep transport by themselves: each must leave means unchanged, or equal a known integral. */
import { describe, expect, it } from 'vitest';
import { U, V, W, X, Y, Z } from '../../geometry/index.js';
import { BatchTally } from '../../engine/batch-tally.js';
import { compile } from '../../engine/compile.js';
import { attenuationPerCm, COSINE_BINS, type DeepGrid } from '../../engine/deep/grid.js';
import { collisionMatrices } from '../../engine/deep/collisions.js';
import { FaceScores } from '../../engine/deep/faces.js';
import { Flight } from '../../engine/deep/flight.js';
import { DEEP_LENGTH } from '../../engine/deep/photons.js';
import { DeepScores } from '../../engine/deep/scores.js';
import { emittedOf } from '../../engine/deep/start.js';
import { sweepBackward, sweepForward } from '../../engine/deep/sweep.js';
import { cellOf } from '../../engine/energy-grid.js';
import { exponentialIntegral } from '../../engine/exponential-integrals.js';
import { ENERGY, WEIGHT } from '../../engine/photon.js';
import {
  coherentDensity,
  coherentNorms,
  coherentRows,
  incoherentDensity,
} from '../../engine/physics/angular-density.js';
import { forward, forwardDensity } from '../../engine/physics/bremsstrahlung.js';
import { sampleCoherent } from '../../engine/physics/coherent.js';
import { sampleIncoherent } from '../../engine/physics/incoherent.js';
import { nextUniform, seedStream } from '../../engine/random.js';
import { isUnreliable } from '../../engine/reliability-verdict.js';
import { varianceOfVariance } from '../../engine/reliability.js';
import { FIGURE } from '../../engine/tally-layout.js';
import { deepSetup, type DeepCase } from './deep-run.js';
import { chiSquareSigmas, expectNear, integrate } from './goodness.js';

const LEAD: DeepCase = { stack: [['lead', 5]], energyKeV: 661.7, seed: 'deep-parts' };
const LAYERS: DeepCase = {
  stack: [
    ['water', 6],
    [null, 3],
    ['iron', 4],
  ],
  energyKeV: 1000,
  seed: 'deep-parts layers',
};

describe('exponential integrals', () => {
  // Abramowitz and Stegun, tables 5.1 and 5.4 (values from memory)
  it.each([
    [1, 0.5, 0.5597735948],
    [1, 1, 0.2193839344],
    [1, 2, 0.0489005107],
    [1, 10, 4.15696893e-6],
    [2, 1, 0.1484955068],
    [3, 1, 0.1096919672],
  ])('E%i(%f) is %f', (n, x, value) => {
    expect(Math.abs(exponentialIntegral(n, x) / value - 1)).toBeLessThan(1e-9);
  });

  it.each([1, 2, 3])(
    'of order %i equal their defining integral on both sides of the change of method',
    (n) => {
      for (const x of [0.05, 0.3, 0.999, 1.001, 3, 20]) {
        // t = 1/s: ∫₀¹ exp(−x/s) s^(n − 2) ds
        const integral = integrate((s) => Math.exp(-x / s) * s ** (n - 2), 0, 1, 4000);
        expect(Math.abs(exponentialIntegral(n, x) / integral - 1)).toBeLessThan(1e-7);
      }
    },
  );

  it('at 0 are 1/(n − 1)', () => {
    expect([1, 2, 3].map((n) => exponentialIntegral(n, 0))).toEqual([Infinity, 1, 0.5]);
  });
});

describe('sweeps over the coarse grid', () => {
  it.each([
    ['a thick layer', LEAD],
    ['layers with a gap', LAYERS],
    [
      'a source inside',
      { ...LAYERS, shape: { kind: 'embedded', layer: 'l2' }, seed: 'deep-parts inside' } as DeepCase,
    ],
  ])('give the same score forwards and backwards, for %s', (_, given) => {
    const problem = compile(deepSetup(given, 1));
    const { grid } = problem.deep!.plan;
    const slots = collisionMatrices(problem, grid);
    const matrices = Array.from(grid.layerOfSlice, (layer) => slots[problem.slotOfLayer[layer]]);
    const source = emittedOf(problem, grid);
    const collisions = Float64Array.from(source.collisions);
    const photons = Float64Array.from(source.photons);
    const forwards = sweepForward(grid, matrices, source);
    const response = {
      far: new Float64Array(grid.groups * COSINE_BINS).map((_, i) => 1 + (i % 7)),
      front: new Float64Array(grid.groups * COSINE_BINS).map((_, i) => 2 + (i % 3)),
      collision: new Float64Array(grid.slices * grid.groups).map((_, i) => 1 + (i % 5)),
    };
    const backwards = sweepBackward(grid, matrices, response);
    const dot = (a: Float64Array, b: Float64Array) => a.reduce((sum, value, i) => sum + value * b[i], 0);
    const scored =
      dot(forwards.far, response.far) +
      dot(forwards.front, response.front) +
      dot(forwards.collisions, response.collision);
    // The first flight from inside leaves too; that from outside is counted by its collisions alone.
    const direct = firstLeaving(given, photons, grid, response);
    const worth = dot(collisions, backwards.collision) + dot(photons, backwards.flight) + direct;
    // Both stop when a round adds less than 0.1 %.
    expect(Math.abs(worth / scored - 1)).toBeLessThan(5e-3);
  });
});

/** What photons emitted in slices score by leaving without a collision. */
function firstLeaving(
  given: DeepCase,
  photons: Float64Array,
  grid: DeepGrid,
  response: { far: Float64Array; front: Float64Array },
): number {
  if (given.shape?.kind !== 'embedded') return 0;
  const nowhere = Array.from(grid.layerOfSlice, () => null);
  const emitted = { photons: Float64Array.from(photons), collisions: new Float64Array(photons.length) };
  const { far, front } = sweepForward(grid, nowhere, emitted);
  return [far, front].reduce(
    (sum, left, side) =>
      sum +
      left.reduce((part, value, i) => part + value * (side === 0 ? response.far : response.front)[i], 0),
    0,
  );
}

function photonAt(z: number, w: number, energyKeV: number): Float64Array {
  const photon = new Float64Array(DEEP_LENGTH);
  photon[X] = photon[Y] = 0;
  photon[Z] = z;
  photon[U] = Math.sqrt(1 - w * w);
  photon[V] = 0;
  photon[W] = w;
  photon[ENERGY] = energyKeV;
  photon[WEIGHT] = 1;
  return photon;
}

describe('a flight drawn by worth', () => {
  it.each([
    { from: 0, layer: 0, w: 1, energyKeV: 1000 },
    { from: 0, layer: 0, w: 0.3, energyKeV: 520 },
    { from: 3.3, layer: 0, w: 0.8, energyKeV: 200 },
    { from: 3.3, layer: 0, w: -0.6, energyKeV: 700 },
    { from: 10.5, layer: 2, w: -0.9, energyKeV: 900 },
    { from: 12.9, layer: 2, w: 0.05, energyKeV: 80 },
  ])('has its collisions where chance has them, weights counted: $energyKeV keV, w = $w', (given) => {
    const problem = compile(deepSetup(LAYERS, 1));
    const random = new Float64Array(4);
    seedStream(random, 'deep-parts flight', 0);
    const flight = new Flight(problem, random);
    const { grid } = problem.deep!.plan;
    const photon = photonAt(given.from, given.w, given.energyKeV);
    const cell = cellOf(problem.grid, given.energyKeV);
    const draws = 60_000;
    const sums = new Float64Array(grid.slices);
    const squares = new Float64Array(grid.slices);
    for (let n = 0; n < draws; n++) {
      const weight = flight.draw(photon, given.layer, cell);
      expect(flight.z).toBeGreaterThanOrEqual(grid.edgesCm[flight.slice]);
      expect(flight.z).toBeLessThanOrEqual(grid.edgesCm[flight.slice + 1]);
      sums[flight.slice] += weight;
      squares[flight.slice] += weight * weight;
    }
    for (let slice = 0; slice < grid.slices; slice++) {
      const expected = chanceIn(problem, grid.edgesCm, slice, given);
      const mean = sums[slice] / draws;
      const stdError = Math.sqrt(Math.max(0, squares[slice] / draws - mean * mean) / draws);
      // 4 standard errors (false alarm 6.3e-5 a slice); slices that ten draws at most can reach say nothing
      if (expected * draws > 10 || mean > 0)
        expectNear(`slice ${slice}`, { mean, stdError }, expected, { slack: 3e-4 });
    }
  });
});

/** Chance that a flight has its next collision in a slice, by its definition. */
function chanceIn(
  problem: ReturnType<typeof compile>,
  edgesCm: Float64Array,
  slice: number,
  { from, w, energyKeV }: { from: number; w: number; energyKeV: number },
): number {
  const pathTo = (z: number) => {
    let path = 0;
    for (let l = 0; l < problem.layers; l++) {
      const [low, high] = [problem.boundariesCm[l], problem.boundariesCm[l + 1]];
      const inside = Math.max(0, Math.min(high, Math.max(z, from)) - Math.max(low, Math.min(z, from)));
      path += inside * attenuationPerCm(problem, problem.slotOfLayer[l], energyKeV);
    }
    return path / Math.abs(w);
  };
  const [a, b] = w > 0 ? [edgesCm[slice], edgesCm[slice + 1]] : [edgesCm[slice + 1], edgesCm[slice]];
  const ahead = (z: number) => (w > 0 ? Math.max(z, from) : Math.min(z, from));
  return Math.exp(-pathTo(ahead(a))) - Math.exp(-pathTo(ahead(b)));
}

describe('the expected score at a face', () => {
  it.each([
    { axis: 0.9, cosine: 0.95, depth: 0.01 },
    { axis: 0.2, cosine: 0.5, depth: 0.001 },
    { axis: -0.3, cosine: 0.2, depth: 0.1 },
    { axis: -0.7, cosine: -0.9, depth: 0.3 },
    { axis: 0.5, cosine: -0.3, depth: 0.02 },
    { axis: 0.6, cosine: 0.6, depth: 2 },
  ])(
    'is the mean over azimuths of number, energy and dose: axis $axis, angle $cosine, depth $depth',
    (given) => {
      const { axis, cosine, depth } = given;
      const problem = compile(deepSetup(LEAD, 1));
      const random = new Float64Array(4);
      seedStream(random, 'deep-parts faces', 0);
      const tally = new BatchTally(problem.tally);
      const scores = new DeepScores(tally);
      const face = new FaceScores(problem, random, scores, true);
      const energyKeV = 400;
      const cell = cellOf(problem.grid, energyKeV);
      const dosePer = problem.doseLines[2 * cell] + problem.doseLines[2 * cell + 1] * energyKeV;
      const draws = 40_000;
      const spread = Math.sqrt((1 - axis * axis) * (1 - cosine * cosine));
      for (let n = 0; n < draws; n++) {
        const w = axis * cosine + spread * Math.cos(2 * Math.PI * nextUniform(random));
        face.score(1, energyKeV, cell, depth, axis, cosine, w);
        scores.close(energyKeV, 0);
      }
      const overAzimuths = (f: (w: number) => number) =>
        integrate((phi) => f(axis * cosine + spread * Math.cos(phi)), 0, Math.PI, 20_000) / Math.PI;
      const leaves = (w: number) => (w > 0 ? Math.exp(-depth / w) : 0);
      const estimate = (figure: number) => {
        const mean = tally.figureSum[figure] / draws;
        return { mean, stdError: Math.sqrt((tally.figureSquare[figure] / draws - mean * mean) / draws) };
      };
      expectNear('number', estimate(FIGURE.transmitted), overAzimuths(leaves));
      expectNear('energy', estimate(FIGURE.transmittedEnergy), energyKeV * overAzimuths(leaves));
      const dose = dosePer * overAzimuths((w) => (w > 0 ? leaves(w) / w : 0));
      expectNear('dose', estimate(problem.tally.dose.farFigure), dose);
    },
  );

  it('of a photon of any direction is half of E₂ in number and half of E₁ in fluence', () => {
    const problem = compile(deepSetup(LEAD, 1));
    const random = new Float64Array(4);
    seedStream(random, 'deep-parts isotropic', 0);
    const tally = new BatchTally(problem.tally);
    const scores = new DeepScores(tally);
    const face = new FaceScores(problem, random, scores, false);
    const cell = cellOf(problem.grid, 511);
    const dosePer = problem.doseLines[2 * cell] + problem.doseLines[2 * cell + 1] * 511;
    const draws = 40_000;
    for (let n = 0; n < draws; n++) {
      face.scoreIsotropic(1, 511, cell, 0.05, 2 * nextUniform(random) - 1);
      scores.close(511, 0);
    }
    const estimate = (figure: number) => {
      const mean = tally.figureSum[figure] / draws;
      return { mean, stdError: Math.sqrt((tally.figureSquare[figure] / draws - mean * mean) / draws) };
    };
    expectNear('number', estimate(FIGURE.reflected), exponentialIntegral(2, 0.05) / 2);
    expectNear(
      'dose',
      estimate(problem.tally.dose.frontFigure),
      (dosePer * exponentialIntegral(1, 0.05)) / 2,
    );
  });
});

describe('densities of the scattering angles', () => {
  const problem = compile(deepSetup({ ...LEAD, energyKeV: 2000 }, 1));
  const random = new Float64Array(4);
  const BINS = 60;

  it.each([15, 90, 661.7, 1900])('are those of the incoherent sampler at %f keV', (energyKeV) => {
    seedStream(random, 'deep-parts incoherent', energyKeV);
    const counts = new Float64Array(BINS);
    const draws = 200_000;
    for (let n = 0; n < draws; n++) {
      const v = sampleIncoherent(
        problem.incoherent,
        problem.incoherentBase[0],
        energyKeV,
        nextUniform(random),
      );
      counts[Math.min(BINS - 1, Math.floor(Math.sqrt(v) * BINS))]++;
    }
    const perSr = (v: number) =>
      incoherentDensity(problem.incoherent, problem.incoherentBase[0], energyKeV, v);
    const expected = counts.map(
      (_, i) => draws * 4 * Math.PI * integrate(perSr, (i / BINS) ** 2, ((i + 1) / BINS) ** 2, 300),
    );
    expect(Math.abs(expected.reduce((sum, value) => sum + value, 0) / draws - 1)).toBeLessThan(2e-3);
    // About normal: a false alarm in 3e-5 at 4 sigmas
    expect(chiSquareSigmas(counts, expected)).toBeLessThan(4);
  });

  it.each([15, 90, 661.7, 1900])('are those of the coherent sampler at %f keV', (energyKeV) => {
    seedStream(random, 'deep-parts coherent', energyKeV);
    const base = problem.coherentBase[0];
    const norms = coherentNorms(problem.coherent, base, coherentRows(2000) + 1);
    const counts = new Float64Array(BINS);
    const draws = 200_000;
    const scale = Math.min(1, 15 / energyKeV);
    for (let n = 0; n < draws; n++) {
      const v = sampleCoherent(problem.coherent, base, energyKeV, random);
      counts[Math.min(BINS - 1, Math.floor((Math.sqrt(v) / scale) * BINS))]++;
    }
    const perSr = (v: number) => coherentDensity(problem.coherent, base, norms, 0, energyKeV, v);
    const edge = (i: number) => ((i / BINS) * scale) ** 2;
    const over = (low: number, high: number) => integrate(perSr, low, high, 600);
    // The last bin reaches to backscatter, over decades of v.
    const tail = integrate(
      (logV) => perSr(Math.exp(logV)) * Math.exp(logV),
      Math.log(edge(BINS - 1)),
      0,
      4000,
    );
    const expected = counts.map(
      (_, i) => draws * 4 * Math.PI * (i < BINS - 1 ? over(edge(i), edge(i + 1)) : tail),
    );
    expect(Math.abs(expected.reduce((sum, value) => sum + value, 0) / draws - 1)).toBeLessThan(2e-3);
    expect(chiSquareSigmas(counts, expected)).toBeLessThan(4);
  });

  it.each([0, 0.3, 0.95])(
    'of a radiating electron of speed %f hold one photon and have its mean cosine',
    (beta) => {
      const moment = (power: number) =>
        2 * Math.PI * integrate((cosine) => cosine ** power * forwardDensity(cosine, beta), -1, 1, 4000);
      const drawn = integrate((atRest) => forward(atRest, beta) / 2, -1, 1, 4000);
      expect(Math.abs(moment(0) - 1)).toBeLessThan(1e-9);
      expect(Math.abs(moment(1) - drawn)).toBeLessThan(1e-9);
    },
  );
});

describe('the relative variance of the variance', () => {
  const momentsOf = (values: readonly number[]) => ({
    first: values.reduce((sum, x) => sum + x, 0),
    second: values.reduce((sum, x) => sum + x ** 2, 0),
    third: values.reduce((sum, x) => sum + x ** 3, 0),
    fourth: values.reduce((sum, x) => sum + x ** 4, 0),
  });

  it('is Σ(x − x̄)⁴/(Σ(x − x̄)²)² − 1/n', () => {
    const values = [0, 0, 1, 3, 0.5, 0, 7, 0.1];
    const mean = values.reduce((sum, x) => sum + x, 0) / values.length;
    const power = (n: number) => values.reduce((sum, x) => sum + (x - mean) ** n, 0);
    const expected = power(4) / power(2) ** 2 - 1 / values.length;
    expect(varianceOfVariance(values.length, momentsOf(values))).toBeCloseTo(expected, 12);
  });

  it('is unknown where nothing varies', () => {
    expect(varianceOfVariance(5, momentsOf([0, 0, 0, 0, 0]))).toBeNull();
  });

  it('marks a figure that a single history carries', () => {
    const values = Array.from({ length: 1000 }, (_, i) => (i === 0 ? 1000 : 0.001));
    const vov = varianceOfVariance(1000, momentsOf(values));
    expect(isUnreliable({ contributing: 1000, vov })).toBe(true);
    expect(isUnreliable({ contributing: 49, vov: 0.001 })).toBe(true);
    expect(isUnreliable({ contributing: 1000, vov: 0.001 })).toBe(false);
  });
});
