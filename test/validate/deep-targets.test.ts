/**
 * What deep transport promises in time on two idle cores, and how far it is ahead of analog transport: each figure of
 * merit, 1/(relative error² · time inside workers), is measured, none extrapolated.
 */
import { describe, expect, it } from 'vitest';
import { simulate } from '../../engine/simulate.js';
import { sizeLayer } from '../../engine/sizing.js';
import type { RunResult } from '../../engine/result.js';
import type { Setup } from '../../engine/setup.js';
import { deepSetup, figureIn, type DeepCase } from '../engine/deep-run.js';

const THREADS = 2;

/** A run that stops when the figure is known to a relative error. */
function until(setup: Setup, quantity: string, layer: string | null, relativeError: number): Setup {
  return { ...setup, run: { ...setup.run, histories: 1e9, until: { quantity, layer, relativeError } } };
}

function errorOf(result: RunResult, quantity: string, layer: string | null = null): number {
  const { mean, stdError } = figureIn(result, quantity, layer);
  return stdError / mean;
}

const LEAD: DeepCase = { stack: [['lead', 20]], energyKeV: 1250, seed: 'target lead' };

describe('on two idle cores', () => {
  it('air kerma behind 20 cm of lead at 1.25 MeV is known to 1 per cent within 10 s', async () => {
    const result = await simulate(until(deepSetup(LEAD, 1), 'air_kerma', null, 0.01), { threads: THREADS });
    console.log(
      `lead 20 cm: ${result.timings.wallS.toFixed(2)} s, ${result.timings.workerS.toFixed(2)} s in workers`,
    );
    expect(errorOf(result, 'air_kerma')).toBeLessThanOrEqual(0.01);
    expect(result.timings.wallS).toBeLessThan(10);
  });

  it('a dose point behind 1.5 m of concrete, Co-60 at 1 m, is known to 2 per cent within 60 s', async () => {
    const given: DeepCase = {
      stack: [['concrete', 150]],
      energyKeV: [1173.228, 1332.492],
      shape: { kind: 'point', distanceCm: 100, offsetCm: 0 },
      dose: ['ambient_dose'],
      points: [{ name: 'p', zCm: 180, offsetCm: 0 }],
      seed: 'target concrete',
    };
    const setup = until(deepSetup(given, 1), 'ambient_dose', 'p', 0.02);
    const result = await simulate(setup, { threads: THREADS });
    console.log(
      `concrete 1.5 m: ${result.timings.wallS.toFixed(2)} s, ${result.timings.workerS.toFixed(2)} s in workers`,
    );
    expect(errorOf(result, 'ambient_dose', 'p')).toBeLessThanOrEqual(0.02);
    expect(result.timings.wallS).toBeLessThan(60);
  });

  it('20 mean free paths of water at 1 MeV are known to 2 per cent within 30 s', async () => {
    // μ/ρ = 0.07072 cm²/g (NISTIR 5632)
    const given: DeepCase = { stack: [['water', 20 / 0.07072]], energyKeV: 1000, seed: 'target water' };
    const result = await simulate(until(deepSetup(given, 1), 'air_kerma', null, 0.02), { threads: THREADS });
    console.log(
      `water 20 paths: ${result.timings.wallS.toFixed(2)} s, ${result.timings.workerS.toFixed(2)} s in workers`,
    );
    expect(errorOf(result, 'air_kerma')).toBeLessThanOrEqual(0.02);
    expect(result.timings.wallS).toBeLessThan(30);
  });

  it('lead for a factor 1000 against Cs-137 is sized to 2 per cent within 30 s', async () => {
    const start = performance.now();
    const setup = deepSetup({ stack: [['lead', 5]], energyKeV: 661.657, seed: 'target size' }, 1);
    const goal = { quantity: 'air_kerma', kind: 'transmission', place: null, limit: 1e-3 } as const;
    const answer = await sizeLayer(setup, { layer: 'l0', goals: [goal], stepCm: 0.1 }, (given) =>
      simulate(given, { threads: THREADS }),
    );
    const seconds = (performance.now() - start) / 1000;
    const [low, high] = answer.intervalCm!;
    console.log(`size: ${seconds.toFixed(1)} s, ${low.toFixed(3)} to ${high.toFixed(3)} cm`);
    expect((high - low) / low).toBeLessThanOrEqual(0.02);
    expect(answer.confirmations.at(-1)!.isMet).toBe(true);
    expect(seconds).toBeLessThan(30);
  });
});

describe('against analog transport', () => {
  it('the figure of merit of 20 cm of lead is 1000 times higher', async () => {
    const merit = ({ timings }: RunResult, error: number) => 1 / (error * error * timings.workerS);
    const deep = await simulate(deepSetup(LEAD, 2e6), { threads: THREADS });
    const analog = await simulate(deepSetup(LEAD, 4e7, 'analog'), { threads: THREADS });
    const ratio = merit(deep, errorOf(deep, 'air_kerma')) / merit(analog, errorOf(analog, 'air_kerma'));
    const of = (result: RunResult) => figureIn(result, 'air_kerma');
    console.log(
      `merit ratio ${ratio.toFixed(0)}; deep ${of(deep).mean} ± ${of(deep).stdError}, analog ${of(analog).mean} ± ${of(analog).stdError}`,
    );
    expect(ratio).toBeGreaterThan(1000);
    // Both agree (4 combined standard errors: false alarm 6e-5)
    expect(Math.abs(of(deep).mean - of(analog).mean)).toBeLessThan(
      4 * Math.hypot(of(deep).stdError, of(analog).stdError),
    );
  });
});
