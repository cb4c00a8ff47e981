/** Sizing a layer: the thickness, its interval, its confirmation, and where there is none. */
import { describe, expect, it } from 'vitest';
import { simulate } from '../../engine/simulate.js';
import { sizeLayer, tradeOff } from '../../engine/sizing.js';
import type { PlaySetup } from '../../engine/sizing-search.js';
import type { SizeGoal } from '../../engine/sizing-goal.js';
import { deepSetup, figureIn, playDeep, type DeepCase } from './deep-run.js';
import { expectNear } from './goodness.js';

describe('sizing', () => {
  const play: PlaySetup = (setup) => simulate(setup, { threads: 2 });
  const transmission = (limit: number): SizeGoal => ({
    quantity: 'air_kerma',
    kind: 'transmission',
    place: null,
    limit,
  });
  const lead = deepSetup({ stack: [['lead', 1]], energyKeV: 661.7, seed: 'sizing lead' }, 1);

  it('finds the thickness whose own run meets the limit, rounds it up and confirms it', async () => {
    const request = { layer: 'l0', goals: [transmission(0.01)], stepCm: 0.1 };
    const { found, intervalCm, roundedCm, confirmations } = await sizeLayer(lead, request, play);
    expect(found.verdict).toBe('found');
    if (found.verdict !== 'found') return;
    const [low, high] = intervalCm!;
    expect((high - low) / found.thicknessCm).toBeLessThan(0.02);
    expect(roundedCm! * 10).toBeCloseTo(Math.ceil(found.thicknessCm * 10), 9);
    const last = confirmations.at(-1)!;
    expect(last.isMet).toBe(true);
    expect(last.states[0].upper95).toBeLessThanOrEqual(0.01);
    expect(last.seed).toBe('sizing lead/deep/confirm/0');

    // A run of its own, at the thickness itself: transmission is the limit within errors
    const own = playDeep(
      { stack: [['lead', found.thicknessCm]], energyKeV: 661.7, seed: 'sizing check' },
      40_000,
    );
    const { mean, stdError } = figureIn(own, 'dose_transmission');
    const expectedError = 0.01 * found.stdErrorCm * found.perCm;
    expectNear('transmission', { mean, stdError }, 0.01, { expectedError });
  });

  it('says that none is needed where the limit is met without', async () => {
    const point: DeepCase = {
      stack: [
        ['concrete', 20],
        ['lead', 1],
      ],
      energyKeV: 661.7,
      shape: { kind: 'point', distanceCm: 100, offsetCm: 0 },
      points: [{ name: 'p', zCm: 51, offsetCm: 0 }],
      seed: 'sizing none',
    };
    const goal: SizeGoal = { quantity: 'air_kerma', kind: 'transmission', place: 'p', limit: 0.5 };
    const request = { layer: 'l1', goals: [goal], stepCm: 0.1 };
    const { found, roundedCm } = await sizeLayer(deepSetup(point, 1), request, play);
    expect(found.verdict).toBe('none_needed');
    expect(roundedCm).toBeNull();
  });

  it('says that none will do where the dose does not pass the layer', async () => {
    const before: DeepCase = {
      stack: [['lead', 1]],
      energyKeV: 661.7,
      shape: { kind: 'point', distanceCm: 100, offsetCm: 0 },
      points: [{ name: 'in front', zCm: -50, offsetCm: 20 }],
      seed: 'sizing impossible',
    };
    const goal: SizeGoal = { quantity: 'air_kerma', kind: 'transmission', place: 'in front', limit: 0.5 };
    const request = { layer: 'l0', goals: [goal], stepCm: 0.1 };
    const { found } = await sizeLayer(deepSetup(before, 1), request, play);
    expect(found.verdict).toBe('impossible');
  });

  it('trades one layer against another: more of one needs less of the other', async () => {
    const two = deepSetup(
      {
        stack: [
          ['iron', 2],
          ['lead', 1],
        ],
        energyKeV: 661.7,
        seed: 'sizing trade-off',
      },
      1,
    );
    const request = { layer: 'l1', goals: [transmission(0.02)], stepCm: 0.1 };
    const pairs = await tradeOff(two, request, 'l0', [0, 4], play);
    const [without, withIron] = pairs.map(({ found }) => (found.verdict === 'found' ? found : null));
    expect(without!.thicknessCm - withIron!.thicknessCm).toBeGreaterThan(
      4 * Math.hypot(without!.stdErrorCm, withIron!.stdErrorCm),
    );
  });

  it.each([
    [
      'a vacuum',
      deepSetup({ stack: [[null, 1]], energyKeV: 661.7, seed: 'sizing vacuum' }, 1),
      /is vacuum: no thickness of it stops anything/,
    ],
    [
      'the layer that holds the source',
      deepSetup(
        {
          stack: [['water', 1]],
          energyKeV: 661.7,
          shape: { kind: 'embedded', layer: 'l0' },
          seed: 'sizing source',
        },
        1,
      ),
      /holds the source/,
    ],
  ])('refuses %s', async (_, setup, words) => {
    const request = { layer: 'l0', goals: [transmission(0.1)], stepCm: 0.1 };
    await expect(sizeLayer(setup, request, play)).rejects.toThrow(words);
  });
});
