import { expect, test } from 'vitest';
import { BoundedCache } from '../../engine/bounded-cache.js';
import { compile } from '../../engine/compile.js';
import { playBatch } from '../../engine/batch-worker.js';
import { ALL, slabSetup, type SlabLayer } from './slab-run.js';

const problem = (stack: readonly SlabLayer[], energyKeV = 500) =>
  compile(slabSetup({ stack, energyKeV, physics: ALL, seed: 'tables' }, 1000));

test('problems that differ in thickness alone share their tables', () => {
  const [thin, thick] = [problem([['lead', 1]]), problem([['lead', 2]])];
  expect(thick.cells).toBe(thin.cells);
  expect(thick.incoherent).toBe(thin.incoherent);
  expect(thick.bremsstrahlung[0]).toBe(thin.bremsstrahlung[0]);
});

test('energies within half an octave share their tables', () => {
  expect(problem([['lead', 1]], 400).coherent).toBe(problem([['lead', 1]], 500).coherent);
  expect(problem([['lead', 1]], 380).coherent).not.toBe(problem([['lead', 1]], 500).coherent);
});

test.each([1, 1.5, 3, 47, 96, 100, 511, 1536, 12_288, 19_000, 20_000])(
  'tables reach the source energy of %f keV',
  (energyKeV) => {
    const { grid, cellCount } = problem([['water', 1]], energyKeV);
    expect(grid.nodesKeV[cellCount]).toBeGreaterThan(energyKeV);
    expect(() => playBatch(problem([['water', 1]], energyKeV), 0, 200)).not.toThrow();
  },
);

test('a problem is the same whatever was compiled before it', () => {
  const first = playBatch(problem([['tin', 0.3]], 250), 0, 2000);
  problem([['tin', 0.1]], 190);
  problem([['lead', 0.1]], 250);
  expect(playBatch(problem([['tin', 0.3]], 250), 0, 2000).figureSum).toEqual(first.figureSum);
});

test('a cache over its limit forgets what was used longest ago, never the last', () => {
  const cache = new BoundedCache<Float64Array>(100);
  const made: string[] = [];
  const get = (key: string, length: number) =>
    cache.get(key, () => {
      made.push(key);
      return new Float64Array(length);
    });
  get('a', 5);
  get('b', 5);
  get('a', 5);
  get('c', 5);
  get('a', 5);
  get('b', 5);
  expect(made).toEqual(['a', 'b', 'c', 'b']);
  get('large', 1000);
  expect(cache.size).toBe(1);
});
