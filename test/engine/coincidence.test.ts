/**
 * Detectors that count together. Limits on statistics are 4 standard errors of the difference: a comparison fails by
 * chance once in 16,000 times (normal law); seeds are fixed.
 */
import { describe, expect, test } from 'vitest';
import { compile } from '../../engine/compile.js';
import type { Setup } from '../../engine/setup.js';
import { beam, point, radius, solidSetup } from './solid-run.js';
import {
  ALL,
  figureOf,
  PLAIN,
  playSetup,
  slabSetup,
  spectrumOf,
  sumBetween,
  type Played,
  type SlabLayer,
} from './slab-run.js';

const SIGMAS = 4;

function together(setup: Setup, thresholdsKeV: readonly (number | null)[] = []): Played {
  const changed = {
    ...setup,
    stack: setup.stack.map((layer, l) => ({
      ...layer,
      detector: layer.detector && { ...layer.detector, thresholdKeV: thresholdsKeV[l] ?? null },
    })),
    tally: { ...setup.tally, coincidence: true },
  };
  return playSetup(changed, compile(changed));
}

const twoSlabs = (first: SlabLayer, second: SlabLayer, energyKeV: number, seed: string, histories: number) =>
  slabSetup({ stack: [first, second], energyKeV, physics: ALL, seed }, histories);

function expectNear(
  a: { mean: number; stdError: number },
  b: { mean: number; stdError: number },
  what: string,
): void {
  const allowed = SIGMAS * Math.hypot(a.stdError, b.stdError);
  expect(
    Math.abs(a.mean - b.mean),
    `${what}: ${a.mean} and ${b.mean}, ${SIGMAS} sigma = ${allowed}`,
  ).toBeLessThanOrEqual(allowed);
}

const phoswich = [
  ['layers without an edge', twoSlabs(['NaI', 1, 'detector'], ['CsI', 2, 'detector'], 661.7, 'two', 40_000)],
  [
    'discs seen from a point, with weights',
    solidSetup(
      {
        stack: [
          ['NaI', 1, null, 'detector'],
          ['CsI', 2, 2, 'detector'],
        ],
        extent: radius(1.5),
        energyKeV: 661.7,
        shape: point(4),
        seed: 'two discs',
        physics: ALL,
      },
      20_000,
    ),
  ],
] as const;

describe.each(phoswich)('two detectors, %s', (_, setup) => {
  const run = together(setup);
  const close = (a: number, b: number) => expect(Math.abs(a - b)).toBeLessThanOrEqual(1e-12 * Math.abs(b));

  test.each(['l0', 'l1'])('pulses of %s alone and with the other are all its pulses, bin by bin', (layer) => {
    const [alone, both, all] = (['anticoincidence', 'coincidence', 'pulse_height'] as const).map((tally) =>
      spectrumOf(run, tally, layer),
    );
    all.mean.forEach((value, bin) => close(alone.mean[bin] + both.mean[bin], value));
    close(
      figureOf(run, 'anticoincidence', layer).mean + figureOf(run, 'coincidence', layer).mean,
      sum(all.mean),
    );
    close(sum(alone.mean), figureOf(run, 'anticoincidence', layer).mean);
    expect(figureOf(run, 'interacting', layer).mean).toBeGreaterThan(0);
  });

  test('a pulse of one with the other is one of the pair', () => {
    const pair = figureOf(run, 'pair_coincidence', 'l0 + l1');
    expect(pair.mean).toBeGreaterThan(0);
    close(figureOf(run, 'coincidence', 'l0').mean, pair.mean);
    close(figureOf(run, 'coincidence', 'l1').mean, pair.mean);
    expect(figureOf(run, 'coincidence', 'l0').stdError).toBeCloseTo(pair.stdError, 12);
  });

  test('the sum spectrum holds every history with a pulse once', () => {
    const any = figureOf(run, 'sum_interacting');
    const parts = [
      figureOf(run, 'anticoincidence', 'l0').mean,
      figureOf(run, 'anticoincidence', 'l1').mean,
      figureOf(run, 'pair_coincidence', 'l0 + l1').mean,
    ];
    close(parts[0] + parts[1] + parts[2], any.mean);
    close(sum(spectrumOf(run, 'pulse_height_sum').mean), any.mean);
  });

  test('the whole energy in both together is seen more often than in either', () => {
    const whole = figureOf(run, 'sum_full_energy').mean;
    const single = figureOf(run, 'full_energy', 'l0').mean + figureOf(run, 'full_energy', 'l1').mean;
    expect(whole).toBeGreaterThan(single);
    close(figureOf(run, 'anticoincidence_full_energy', 'l0').mean, figureOf(run, 'full_energy', 'l0').mean);
  });
});

function sum(values: Float64Array): number {
  return values.reduce((total, value) => total + value, 0);
}

test('the sums of two halves of a crystal are the pulses of the whole crystal', () => {
  const halves = together(twoSlabs(['NaI', 1, 'detector'], ['NaI', 2, 'detector'], 1332.5, 'halves', 60_000));
  const whole = playCompiled(
    slabSetup({ stack: [['NaI', 3, 'detector']], energyKeV: 1332.5, physics: ALL, seed: 'whole' }, 60_000),
  );
  expectNear(figureOf(halves, 'sum_full_energy'), figureOf(whole, 'full_energy', 'l0'), 'full energy');
  expectNear(figureOf(halves, 'sum_interacting'), figureOf(whole, 'interacting', 'l0'), 'interacting');
  for (let low = 0; low < 1332; low += 111) {
    expectNear(
      sumBetween(spectrumOf(halves, 'pulse_height_sum'), low, low + 111),
      sumBetween(spectrumOf(whole, 'pulse_height', 'l0'), low, low + 111),
      `${low} to ${low + 111} keV`,
    );
  }
});

function playCompiled(setup: Setup): Played {
  return playSetup(setup, compile(setup));
}

test('photons that can only be absorbed where they first collide never give two pulses', () => {
  // Without fluorescence, and with thresholds above what a photon of 20 keV leaves when it scatters (1.5 keV).
  const setup = slabSetup(
    {
      stack: [
        ['NaI', 0.002, 'detector'],
        ['CsI', 0.01, 'detector'],
      ],
      energyKeV: 20,
      physics: PLAIN,
      seed: 'absorbed',
    },
    20_000,
  );
  const run = together(setup, [15, 15]);
  expect(figureOf(run, 'pair_coincidence', 'l0 + l1').mean).toBe(0);
  expect(figureOf(run, 'anticoincidence', 'l0').mean).toBe(figureOf(run, 'interacting', 'l0').mean);
  expect(figureOf(run, 'anticoincidence', 'l0').mean).toBeGreaterThan(0.1);
});

test('a veto sees pulses above its threshold only', () => {
  const setup = twoSlabs(['NaI', 1, 'detector'], ['CsI', 2, 'detector'], 661.7, 'threshold', 20_000);
  const shares = [null, 100, 400, 700].map((threshold) => {
    const run = together(setup, [null, threshold]);
    return figureOf(run, 'coincidence', 'l0').mean / figureOf(run, 'interacting', 'l0').mean;
  });
  expect(shares[0]).toBeGreaterThan(shares[1]);
  expect(shares[1]).toBeGreaterThan(shares[2]);
  expect(shares[2]).toBeGreaterThan(0);
  expect(shares[3]).toBe(0);
});

test('weights change no coincidence', () => {
  const setup = solidSetup(
    {
      stack: [
        ['NaI', 0.5, null, 'detector'],
        ['aluminium', 0.2],
        ['CsI', 1, null, 'detector'],
      ],
      extent: radius(2),
      energyKeV: 511,
      shape: beam(1),
      seed: 'weights',
      physics: ALL,
    },
    30_000,
  );
  const biased = together(setup);
  const analog = together({ ...setup, seed: 'no weights', run: { ...setup.run, transport: 'analog' } });
  for (const [quantity, layer] of [
    ['anticoincidence', 'l0'],
    ['coincidence', 'l0'],
    ['anticoincidence_full_energy', 'l2'],
    ['pair_coincidence', 'l0 + l2'],
    ['sum_full_energy', null],
  ] as const) {
    expectNear(figureOf(biased, quantity, layer), figureOf(analog, quantity, layer), quantity);
  }
});

test('three detectors have three pairs, and a pulse counts as one with any of them', () => {
  const setup = slabSetup(
    {
      stack: [
        ['NaI', 1, 'detector'],
        ['CsI', 1, 'detector'],
        ['NaI', 1, 'detector'],
      ],
      energyKeV: [511, 1332.5],
      physics: ALL,
      seed: 'three',
    },
    20_000,
  );
  const run = together(setup);
  const pairs = run.totals.filter(({ quantity }) => quantity === 'pair_coincidence');
  expect(pairs.map(({ layer }) => layer)).toEqual(['l0 + l1', 'l0 + l2', 'l1 + l2']);
  const [first, second, third] = pairs.map(({ mean }) => mean as number);
  const any = figureOf(run, 'coincidence', 'l0').mean;
  expect(any).toBeGreaterThan(Math.max(first, second));
  expect(any).toBeLessThan(first + second);
  expect(third).toBeGreaterThan(0);
  const byLine = run.totals.filter(({ quantity }) => quantity === 'sum_full_energy');
  expect(byLine.map(({ lineKeV }) => lineKeV)).toEqual([511, 1332.5, null]);
  expect(byLine[0].mean! + byLine[1].mean!).toBeCloseTo(byLine[2].mean!, 12);
});
