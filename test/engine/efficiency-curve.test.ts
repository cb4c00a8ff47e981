/** Efficiency curves. The worker threads play the built engine. */
import { expect, test } from 'vitest';
import {
  curveSeed,
  curveSetup,
  simulate,
  simulateEfficiency,
  type CurvePoint,
  type Setup,
} from '../../engine/index.js';
import { point, radius, solidSetup } from './solid-run.js';
import { ALL } from './slab-run.js';

const ENERGIES = [60, 150, 661.7, 1332.5];

function gridSetup(histories: number): Setup {
  const setup = solidSetup(
    {
      stack: [['NaI', 3, null, 'detector']],
      extent: radius(2),
      energyKeV: 1332.5,
      shape: point(5),
      seed: 'curve',
      physics: ALL,
    },
    histories,
  );
  return { ...setup, energyGridKeV: ENERGIES };
}

/** Without times, and as text, so that not a bit may differ. */
const textOf = (points: readonly CurvePoint[]) => JSON.stringify(points);

test('every energy of a curve has the very figures of a run of its own, whatever the number of threads', async () => {
  const setup = gridSetup(20_000);
  const one = await simulateEfficiency(setup, { threads: 1 });
  const two = await simulateEfficiency(setup, { threads: 2 });
  expect(one.stopped).toBe('histories');
  expect(one.points.map(({ energyKeV }) => energyKeV)).toEqual(ENERGIES);
  expect(textOf(two.points)).toBe(textOf(one.points));
  for (const { energyKeV, totals, seed } of one.points) {
    const emission = { ...setup.source.emission, lines: [{ energyKeV, perDecay: 1 }] };
    const single = await simulate(
      {
        ...setup,
        seed: `curve at ${energyKeV} keV`,
        source: { ...setup.source, emission },
        energyGridKeV: null,
      },
      { threads: 1 },
    );
    expect(seed).toBe(single.setup.seed);
    expect(totals.map(({ mean, stdError }) => [mean, stdError])).toEqual(
      single.totals.map(({ mean, stdError }) => [mean, stdError]),
    );
    expect(totals.every(({ lineKeV }) => lineKeV === energyKeV)).toBe(true);
  }
});

test('energies have streams of their own', () => {
  expect(new Set(ENERGIES.map((energy) => curveSeed('curve', energy))).size).toBe(ENERGIES.length);
  expect(curveSetup(gridSetup(10), 60).seed).toBe('curve at 60 keV');
});

test('a time limit is shared out among the energies', () => {
  const setup = gridSetup(10);
  const limited = { ...setup, run: { ...setup.run, timeLimitS: 100 } };
  expect(curveSetup(limited, 60).run.timeLimitS).toBe(25);
});

test('an interrupted curve goes on to the very same points', async () => {
  const setup = gridSetup(10_000);
  const whole = await simulateEfficiency(setup, { threads: 1 });
  const stop = new AbortController();
  const part = await simulateEfficiency(setup, {
    threads: 1,
    signal: stop.signal,
    onPoint: (points) => points.length === 2 && stop.abort(),
  });
  expect(part.stopped).toBe('interrupted');
  expect(part.points.length).toBeGreaterThanOrEqual(2);
  expect(part.points.length).toBeLessThan(ENERGIES.length);
  let played = 0;
  const rest = await simulateEfficiency(setup, { threads: 1, from: part.points, onPoint: () => played++ });
  expect(played).toBe(ENERGIES.length - part.points.length);
  expect(textOf(rest.points)).toBe(textOf(whole.points));
});

test('progress counts the histories of all energies', async () => {
  const seen: number[] = [];
  await simulateEfficiency(gridSetup(10_000), {
    threads: 1,
    onProgress: ({ histories, historiesPlanned, remainingS }) => {
      expect(historiesPlanned).toBe(40_000);
      expect(remainingS).toBeGreaterThanOrEqual(0);
      seen.push(histories);
    },
  });
  expect(seen.at(-1)).toBe(40_000);
  expect(seen).toEqual([...seen].sort((a, b) => a - b));
});

test('a setup without a grid of energies has no curve', async () => {
  await expect(simulateEfficiency({ ...gridSetup(10), energyGridKeV: null })).rejects.toThrow(
    /no grid of energies/,
  );
});
