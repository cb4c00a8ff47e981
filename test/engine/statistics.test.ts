import { describe, expect, it } from 'vitest';
import { compile } from '../../engine/compile.js';
import { estimate, partRatio } from '../../engine/statistics.js';
import { ALL, figureOf, playSetup, slabSetup } from './slab-run.js';

describe('a mean and its standard error', () => {
  it('are those of the textbook', () => {
    const values = [0, 3, 1, 0, 2.5, 7];
    const sum = values.reduce((a, b) => a + b, 0);
    const square = values.reduce((a, b) => a + b * b, 0);
    const { mean, stdError } = estimate(sum, square, values.length, 2);
    expect(mean).toBeCloseTo(2 * 2.25, 12);
    // Sample variance 6.975, divided by 6 values, times the weight
    expect(stdError).toBeCloseTo(2 * Math.sqrt(6.975 / 6), 12);
  });

  it('has no error where no history scored, for then it is not known', () => {
    expect(estimate(0, 0, 1000)).toEqual({ mean: 0, stdError: null });
    expect(estimate(5, 25, 1)).toEqual({ mean: 5, stdError: null });
  });

  it('has no error below 0 by rounding', () => {
    expect(estimate(3, 3, 3).stdError).toBe(0);
    expect(estimate(0.3, 0.1 * 0.3 * (1 - 1e-15), 3).stdError).toBeGreaterThanOrEqual(0);
  });
});

describe('the ratio of a part to its whole', () => {
  it('has the binomial error, for indicators', () => {
    const { mean, stdError } = partRatio(30, 30, 100, 100)!;
    expect(mean).toBe(0.3);
    expect(stdError).toBeCloseTo(Math.sqrt((0.3 * 0.7) / 100), 12);
  });

  it('is not known without a whole, and has no error without a part', () => {
    expect(partRatio(0, 0, 0, 0)).toBeNull();
    expect(partRatio(0, 0, 10, 10)).toEqual({ mean: 0, stdError: null });
  });
});

describe('the errors of a run', () => {
  it('are the spread of repeated runs', () => {
    const runs = 120;
    const stack = [['aluminium', 0.05], ['NaI', 2, 'detector'], ['lead', 0.3]] as const; // prettier-ignore
    const setup = slabSetup({ stack, energyKeV: 661.7, physics: ALL, seed: '' }, 1000);
    const problem = compile(setup);
    const played = Array.from({ length: runs }, (_, run) =>
      playSetup(setup, { ...problem, seed: `repeat ${run}` }),
    );
    const figures = [
      ['transmitted', null],
      ['transmitted_energy', null],
      ['reflected', null],
      ['deposited_energy', 'l1'],
      ['full_energy', 'l1'],
      ['peak_to_total', 'l1'],
    ] as const;
    for (const [quantity, layer] of figures) {
      const list = played.map((one) => figureOf(one, quantity, layer));
      const mean = list.reduce((sum, value) => sum + value.mean, 0) / runs;
      const spread = list.reduce((sum, value) => sum + (value.mean - mean) ** 2, 0) / (runs - 1);
      const stated = list.reduce((sum, value) => sum + value.stdError ** 2, 0) / runs;
      // χ² of 120 runs: relative error of a variance √(2/119) = 13 %, 4 of them: false alarm 6e-5 each
      expect(Math.abs(spread / stated - 1), quantity).toBeLessThan(4 * Math.sqrt(2 / (runs - 1)));
    }
  });
});
