/** Absolute and intrinsic efficiencies and their errors. */
import { expect, test } from 'vitest';
import { compile } from '../../engine/compile.js';
import { point, radius, solidSetup } from './solid-run.js';
import { ALL, figureOf, playSetup, slabSetup } from './slab-run.js';

test('a point source in front of an endless slab sends half of its photons onto it', () => {
  const setup = slabSetup(
    {
      stack: [['NaI', 1, 'detector']],
      energyKeV: [100, 511],
      physics: ALL,
      seed: 'half',
      shape: point(5),
    },
    10_000,
  );
  const weighted = {
    ...setup,
    source: {
      ...setup.source,
      emission: {
        ...setup.source.emission,
        lines: [
          { energyKeV: 100, perDecay: 0.3 },
          { energyKeV: 511, perDecay: 0.1 },
        ],
      },
    },
  };
  const run = playSetup(weighted, compile(weighted));
  const at = (quantity: string, lineKeV: number | null) => {
    const row = run.totals.find((r) => r.quantity === quantity && r.lineKeV === lineKeV);
    return [row?.mean ?? NaN, row?.stdError ?? NaN];
  };
  for (const [lineKeV, share] of [
    [100, 0.75],
    [511, 0.25],
  ]) {
    at('full_energy', lineKeV).forEach((value, i) => {
      expect(at('absolute_full_energy', lineKeV)[i]).toBeCloseTo(value / share, 12);
      expect(at('intrinsic_full_energy', lineKeV)[i]).toBeCloseTo(value / share / 0.5, 12);
    });
  }
  at('interacting', null).forEach((value, i) => {
    expect(at('intrinsic_interacting', null)[i]).toBeCloseTo(2 * value, 12);
  });
});

test('errors of intrinsic efficiencies are those that independent runs scatter by', () => {
  const runs = 60;
  const seen = Array.from({ length: runs }, (_, i) => {
    const setup = solidSetup(
      {
        // A source close to the edge: some photons strike the front, some the side, and many miss.
        stack: [['NaI', 2, null, 'detector']],
        extent: radius(2),
        energyKeV: 300,
        shape: point(1, 2.5),
        seed: `scatter ${i}`,
        physics: ALL,
      },
      2000,
    );
    const run = playSetup(setup, compile(setup));
    return {
      ...figureOf(run, 'intrinsic_interacting', 'l0'),
      ratio: figureOf(run, 'interacting', 'l0').mean / figureOf(run, 'incident').mean,
    };
  });
  seen.forEach(({ mean, ratio }) => expect(mean).toBeCloseTo(ratio, 12));
  const mean = seen.reduce((sum, run) => sum + run.mean, 0) / runs;
  const scatter = seen.reduce((sum, run) => sum + (run.mean - mean) ** 2, 0) / (runs - 1);
  const claimed = seen.reduce((sum, run) => sum + run.stdError ** 2, 0) / runs;
  // The variance of 60 runs has a relative standard error of sqrt(2/59) = 0.18; 4 of them: by chance once in 16,000.
  expect(Math.abs(scatter / claimed - 1)).toBeLessThan(4 * Math.sqrt(2 / (runs - 1)));
});
