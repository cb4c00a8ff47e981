import seedrandom from 'seedrandom';
import { describe, expect, it } from 'vitest';
import { AZIMUTH_COSINE, AZIMUTH_STEPS } from '../../engine/lookup-tables.js';
import { ALEA_CARRY, nextOpenUniform, nextUniform, seedStream } from '../../engine/random.js';
import { expectNear } from './goodness.js';

function stream(seed: string, batch: number): Float64Array {
  const state = new Float64Array(4);
  seedStream(state, seed, batch);
  return state;
}

describe('the random stream of a batch', () => {
  it.each([
    { seed: 'default', batch: 0 },
    { seed: 'window-1', batch: 7 },
    { seed: '', batch: 123456 },
    { seed: 'Füße/∑', batch: 3 },
  ])('is seedrandom’s alea of "$seed/$batch", number by number', ({ seed, batch }) => {
    const state = stream(seed, batch);
    const library = seedrandom.alea(`${seed}/${batch}`);
    for (let i = 0; i < 100_000; i++) {
      if (nextUniform(state) !== library()) expect.fail(`number ${i} differs`);
    }
    expect(nextUniform(state)).toBe(library());
  });

  it('differs from batch to batch and from seed to seed', () => {
    const starts = new Set<number>();
    for (let batch = 0; batch < 1000; batch++) {
      for (const seed of ['a', 'b', 'a/1']) starts.add(nextUniform(stream(seed, batch)));
    }
    // 3000 draws of 2³² meet by chance with 0.1 %; the seeds are fixed
    expect(starts.size).toBe(3000);
  });

  it('has streams of neighbouring batches that are not correlated', () => {
    const [a, b] = [stream('neighbours', 4), stream('neighbours', 5)];
    const n = 200_000;
    let sum = 0;
    for (let i = 0; i < n; i++) sum += (nextUniform(a) - 0.5) * (nextUniform(b) - 0.5);
    // variance of a product of two uniforms about their means: 1/144
    expectNear('covariance', { mean: sum / n, stdError: 1 / 12 / Math.sqrt(n) }, 0);
  });

  it('never gives 0 or 1 where an open uniform is asked for', () => {
    // The state that makes the next number 0
    expect(nextOpenUniform(new Float64Array([0, 0.5, 0.5, 0]))).toBe(0.5 * ALEA_CARRY);
    const largest = 1 - ALEA_CARRY;
    expect(largest + 0.5 * ALEA_CARRY).toBeLessThan(1);
  });

  it('has uniform numbers by their first four moments and in pairs', () => {
    const state = stream('moments', 0);
    const n = 1_000_000;
    const sums = new Float64Array(5);
    let pairs = 0;
    let before = 0.5;
    for (let i = 0; i < n; i++) {
      const u = nextUniform(state);
      for (let power = 1, value = u; power <= 4; power++, value *= u) sums[power] += value;
      pairs += (u - 0.5) * (before - 0.5);
      before = u;
    }
    for (let power = 1; power <= 4; power++) {
      const variance = 1 / (2 * power + 1) - 1 / (power + 1) ** 2;
      const estimate = { mean: sums[power] / n, stdError: Math.sqrt(variance / n) };
      expectNear(`moment ${power}`, estimate, 1 / (power + 1));
    }
    expectNear('pairs', { mean: pairs / n, stdError: 1 / 12 / Math.sqrt(n) }, 0);
  });
});

describe('the table of the azimuth', () => {
  /** cos of a uniform azimuth as the history loops take it, straight between the table’s steps. */
  const cosine = (u: number) => {
    const at = u * AZIMUTH_STEPS;
    const step = Math.floor(at);
    return AZIMUTH_COSINE[step] + (at - step) * (AZIMUTH_COSINE[step + 1] - AZIMUTH_COSINE[step]);
  };

  it('has the moments of the cosine of a uniform angle within 10⁻⁵', () => {
    const parts = 64 * AZIMUTH_STEPS;
    const moments = new Float64Array(7);
    for (let i = 0; i < parts; i++) {
      const value = cosine((i + 0.5) / parts);
      for (let power = 1, p = value; power <= 6; power++, p *= value) moments[power] += p / parts;
    }
    // Mean of cosⁿ: 0 for odd n, (n − 1)!!/n!! for even n (Wallis)
    [0, 0, 1 / 2, 0, 3 / 8, 0, 5 / 16].forEach((expected, power) => {
      expect(Math.abs(moments[power] - expected), `moment ${power}`).toBeLessThan(1e-5);
    });
  });

  it('ends at 1 and −1, never beyond, and is odd about the middle', () => {
    expect(cosine(0)).toBe(1);
    expect(cosine(1 - 2 ** -32)).toBeGreaterThanOrEqual(-1);
    for (let i = 0; i <= AZIMUTH_STEPS; i++) {
      expect(AZIMUTH_COSINE[i] + AZIMUTH_COSINE[AZIMUTH_STEPS - i]).toBeCloseTo(0, 14);
    }
  });
});
