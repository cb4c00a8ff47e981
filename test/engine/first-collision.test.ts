/**
 * What happens at one collision, read from the tallies: a made-up surface makes every photon collide once, and all
 * that comes of it flies out freely, through the history loop as it is used in earnest.
 */
import { describe, expect, it } from 'vitest';
import type { Problem } from '../../engine/problem.js';
import { chiSquareSigmas, expectNear, integrate, SIGMAS } from './goodness.js';
import { AT_ONCE_PER_CM, firstCollisionEnergyKeV, withCrossSections } from './made-up.js';
import { figureOf, PLAIN, playSlab, spectrumOf } from './slab-run.js';

const REST = 510.99895; // m c² in keV, CODATA 2018
const HISTORIES = 200_000;
const POWERS = [4, 7, 9, 10, 12];

/** Plain physics in the history loop itself, and by way of the function all other physics goes through. */
const ROUTES = [
  { route: 'the written-out plain physics', change: (problem: Problem) => problem },
  {
    route: 'the interaction of all physics',
    change: (problem: Problem) => ({ ...problem, plain: false }),
  },
];

/** Klein–Nishina per ρ = E′/E, up to a factor (Evans 1955, ch. 23). */
function perRatio(energyKeV: number, ratio: number): number {
  const cosine = 1 - (1 / ratio - 1) / (energyKeV / REST);
  return 1 / ratio + ratio - 1 + cosine * cosine;
}

describe.each(ROUTES)('a first collision by $route', ({ change }) => {
  const play = (power: number, angleDeg: number) => {
    const energyKeV = firstCollisionEnergyKeV(power);
    const played = playSlab(
      {
        stack: [['water', 1]],
        energyKeV,
        physics: PLAIN,
        seed: `first collision ${power}/${angleDeg}`,
        angleDeg,
        binKeV: energyKeV / 400,
      },
      HISTORIES,
      (problem) => change(withCrossSections(problem, { perCm: AT_ONCE_PER_CM, incoherent: 1 }, energyKeV)),
    );
    return { energyKeV, played };
  };

  it.each(POWERS)(
    'at 2^%d keV scatters every photon into the Klein–Nishina spectrum, none twice',
    (power) => {
      const { energyKeV, played } = play(power, 0);
      expect(figureOf(played, 'uncollided').mean).toBe(0);
      expect(figureOf(played, 'transmitted').mean + figureOf(played, 'reflected').mean).toBeCloseTo(1, 12);
      const [forward, backward] = [spectrumOf(played, 'transmitted'), spectrumOf(played, 'reflected')];
      const sideways = energyKeV / (1 + energyKeV / REST);
      const least = energyKeV / (1 + (2 * energyKeV) / REST);
      const law = (low: number, high: number) =>
        low >= high ? 0 : integrate((e) => perRatio(energyKeV, e / energyKeV), low, high, 4);
      const all = integrate((e) => perRatio(energyKeV, e / energyKeV), least, energyKeV, 400);
      const counts: number[] = [];
      const expected: number[] = [];
      forward.mean.forEach((share, bin) => {
        const [low, high] = [forward.energyLowKeV[bin], forward.energyHighKeV[bin]];
        counts.push(share * HISTORIES, backward.mean[bin] * HISTORIES);
        expected.push(
          (law(Math.max(low, sideways), Math.min(high, energyKeV)) * HISTORIES) / all,
          (law(Math.max(low, least), Math.min(high, sideways)) * HISTORIES) / all,
        );
      });
      // No photon where kinematics put none: forward below sideways, backward outside its range
      counts.forEach((count, i) => {
        if (expected[i] === 0) expect(count).toBe(0);
      });
      // Standardised χ²: a false alarm above 4 once in 3e4
      expect(chiSquareSigmas(counts, expected)).toBeLessThan(SIGMAS);
    },
  );

  it.each(POWERS)('at 2^%d keV leaves on the spot what the photon lost', (power) => {
    const { energyKeV, played } = play(power, 0);
    const least = energyKeV / (1 + (2 * energyKeV) / REST);
    const all = integrate((e) => perRatio(energyKeV, e / energyKeV), least, energyKeV, 400);
    const mean = integrate(
      (e) => (energyKeV - e) * perRatio(energyKeV, e / energyKeV),
      least,
      energyKeV,
      400,
    );
    expectNear('deposited', figureOf(played, 'deposited_energy', 'l0'), mean / all);
    const deposited = spectrumOf(played, 'deposited', 'l0');
    deposited.mean.forEach((value, bin) => {
      if (deposited.energyLowKeV[bin] > energyKeV - least) expect(value).toBe(0);
    });
  });

  it.each([20, 60, 85])('turns photons that come in at %d° to azimuths that are uniform', (angleDeg) => {
    const { energyKeV, played } = play(9, angleDeg);
    const w = Math.cos((angleDeg * Math.PI) / 180);
    // Share of azimuths that bring the photon back through the front face after a turn by θ
    const back = (cosine: number) => {
      const reach = Math.sqrt((1 - w * w) * (1 - cosine * cosine));
      return Math.acos(Math.max(-1, Math.min(1, (w * cosine) / reach))) / Math.PI;
    };
    const law = (cosine: number) => {
      const p = 1 / (1 + (energyKeV / REST) * (1 - cosine));
      return p * p * (p + 1 / p - 1 + cosine * cosine);
    };
    const all = integrate(law, -1, 1, 400);
    const expected = integrate((cosine) => law(cosine) * back(cosine), -1, 1, 4000) / all;
    expectNear('reflected', figureOf(played, 'reflected'), expected);
  });
});
