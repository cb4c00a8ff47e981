/** Standard errors of deep transport are honest: independent runs spread as each says. */
import { describe, expect, it } from 'vitest';
import { figureIn, playDeep, type DeepCase } from '../engine/deep-run.js';

const RUNS = 40;

const CASES: readonly (Omit<DeepCase, 'seed'> & { what: string; histories: number; place: string | null })[] =
  [
    { what: 'behind lead', stack: [['lead', 10]], energyKeV: 1250, histories: 4000, place: null },
    {
      what: 'at a point behind concrete',
      stack: [['concrete', 60]],
      energyKeV: 662,
      shape: { kind: 'point', distanceCm: 100, offsetCm: 0 },
      points: [{ name: 'p', zCm: 90, offsetCm: 20 }],
      histories: 6000,
      place: 'p',
    },
  ];

describe('40 independent runs', () => {
  it.each(CASES)('$what spread as their standard errors say', ({ what, histories, place, ...given }) => {
    const runs = Array.from({ length: RUNS }, (_, n) =>
      figureIn(playDeep({ ...given, seed: `errors ${what} ${n}` }, histories), 'air_kerma', place),
    );
    const mean = runs.reduce((sum, run) => sum + run.mean, 0) / RUNS;
    const spread = runs.reduce((sum, run) => sum + (run.mean - mean) ** 2, 0);
    const stated = runs.reduce((sum, run) => sum + run.stdError ** 2, 0) / RUNS;
    // χ² with 39 degrees of freedom: outside 15 to 76 in 6e-4 of tries (Wilson and Hilferty 1931)
    const chiSquare = spread / stated;
    expect(chiSquare).toBeGreaterThan(15);
    expect(chiSquare).toBeLessThan(76);
  });
});
