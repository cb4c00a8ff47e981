/**
 * What happens at one collision, read from the tallies: a made-up surface makes every photon collide once, and all
 * that comes of it flies out freely, through the history loop as it is used in earnest.
 */
import { describe, expect, it } from 'vitest';
import { compile } from '../../engine/compile.js';
import { cellOf } from '../../engine/energy-grid.js';
import { sampleCoherent } from '../../engine/physics/coherent.js';
import { interact, Site } from '../../engine/physics/interact.js';
import type { Problem } from '../../engine/problem.js';
import { nextOpenUniform, nextUniform, seedStream } from '../../engine/random.js';
import type { Physics } from '../../engine/setup.js';
import { chiSquareSigmas, expectNear, integrate, SIGMAS } from './goodness.js';
import { AT_ONCE_PER_CM, firstCollisionEnergyKeV, withCrossSections, withOneCollision } from './made-up.js';
import { ALL, figureOf, PLAIN, playSlab, slabSetup, spectrumOf } from './slab-run.js';

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

/**
 * Photons that leave one interaction each, by bins of energy, those that go on first and those that come back second, and
 * the sums of the squares of their numbers.
 */
function leavingPhotons(material: string, energyKeV: number, physics: Physics, bins: number) {
  const setup = slabSetup({ stack: [[material, 1]], energyKeV, physics, seed: '' }, 1);
  const problem = compile(setup);
  const site = new Site();
  seedStream(site.random, `one by one ${material}`, 0);
  site.localCutoffKeV = physics.cutoffKeV;
  const cell = cellOf(problem.grid, energyKeV);
  const sums = new Float64Array(2 * bins);
  const squares = new Float64Array(2 * bins);
  const own = new Map<number, number>();
  const count = (keV: number, cosine: number) => {
    const bin = Math.min(bins - 1, Math.floor((keV / energyKeV) * bins)) + (cosine > 0 ? 0 : bins);
    own.set(bin, (own.get(bin) ?? 0) + 1);
  };
  for (let i = 0; i < HISTORIES; i++) {
    own.clear();
    site.energyKeV = energyKeV;
    interact(problem, site, problem.slotOfLayer[0], cell);
    if (site.energyKeV > 0) count(site.energyKeV, 1 - 2 * site.v);
    const { count: emitted, energyKeV: energies, cosine } = site.secondaries;
    for (let n = 0; n < emitted; n++) count(energies[n], cosine[n]);
    for (const [bin, photons] of own) {
      sums[bin] += photons;
      squares[bin] += photons * photons;
    }
  }
  return { sums, squares };
}

describe('the short cuts of the history loop', () => {
  // The loop has scattering and Doppler broadening written out, and settles most electrons that radiate nothing by itself
  it.each([
    { material: 'hydrogen', power: 3 },
    { material: 'germanium', power: 6 },
    { material: 'NaI', power: 9 },
    { material: 'lead', power: 7 },
    { material: 'lead', power: 10 },
    { material: 'lead', power: 12 },
    { material: 'water', power: 14 },
  ])('give $material at 2^$power keV the photons its interactions have', ({ material, power }) => {
    const energyKeV = firstCollisionEnergyKeV(power);
    const physics = { ...ALL, coherent: false };
    const bins = 256;
    const played = playSlab(
      {
        stack: [[material, 1]],
        energyKeV,
        physics,
        seed: `short cuts ${material} ${power}`,
        binKeV: energyKeV / bins,
      },
      HISTORIES,
      (problem) => withOneCollision(problem, energyKeV),
    );
    expect(figureOf(played, 'uncollided').mean).toBe(0);
    const [forward, backward] = [spectrumOf(played, 'transmitted'), spectrumOf(played, 'reflected')];
    const { sums, squares } = leavingPhotons(material, energyKeV, physics, bins);
    let chiSquare = 0;
    let compared = 0;
    sums.forEach((expected, bin) => {
      if (expected < 30) return;
      const got = (bin < bins ? forward.mean[bin] : backward.mean[bin - bins]) * HISTORIES;
      // Both runs have this variance: the sum of squares less that of the mean
      const variance = squares[bin] - (expected * expected) / HISTORIES;
      chiSquare += (got - expected) ** 2 / (2 * variance);
      compared++;
    });
    expect(compared).toBeGreaterThan(10);
    // Standardised χ²: a false alarm above 4 once in 3e4
    expect((chiSquare - compared) / Math.sqrt(2 * compared)).toBeLessThan(SIGMAS);
  });
});

/** Share of photons that come back from a layer one mean free path thick in which they scatter coherently and do nothing else. */
function comingBack(problem: Problem, energyKeV: number, angleDeg: number): number {
  const { random } = new Site();
  seedStream(random, `coherent ${energyKeV}/${angleDeg}`, 0);
  const base = problem.coherentBase[problem.slotOfLayer[0]];
  let back = 0;
  for (let i = 0; i < HISTORIES; i++) {
    let w = Math.cos((angleDeg * Math.PI) / 180);
    let z = -w * Math.log(nextOpenUniform(random));
    while (z > 0 && z < 1) {
      const cosine = 1 - 2 * sampleCoherent(problem.coherent, base, energyKeV, random);
      const across = Math.sqrt(Math.max(0, (1 - cosine * cosine) * (1 - w * w)));
      w = w * cosine + across * Math.cos(Math.PI * nextUniform(random));
      z -= w * Math.log(nextOpenUniform(random));
    }
    if (z <= 0) back++;
  }
  return back / HISTORIES;
}

describe('coherent scattering in the history loop', () => {
  it.each([
    { material: 'hydrogen', energyKeV: 8, angleDeg: 0 },
    { material: 'carbon', energyKeV: 6, angleDeg: 0 },
    { material: 'carbon', energyKeV: 6, angleDeg: 70 },
    { material: 'germanium', energyKeV: 20, angleDeg: 0 },
    { material: 'lead', energyKeV: 15, angleDeg: 0 },
    { material: 'lead', energyKeV: 15, angleDeg: 70 },
    { material: 'lead', energyKeV: 150, angleDeg: 80 },
  ])('turns photons of $energyKeV keV in $material, at $angleDeg°, as coherent.ts does', (given) => {
    const { material, energyKeV, angleDeg } = given;
    const seed = `coherent ${material}`;
    let expected = 0;
    const played = playSlab(
      { stack: [[material, 1]], energyKeV, physics: ALL, seed, angleDeg },
      HISTORIES,
      (problem) => {
        expected = comingBack(problem, energyKeV, angleDeg);
        return withCrossSections(problem, { perCm: 1, coherent: 1 });
      },
    );
    const { mean, stdError } = figureOf(played, 'reflected');
    expect(figureOf(played, 'transmitted').mean + mean).toBeCloseTo(1, 12);
    // Both have this error
    expect(Math.abs(mean - expected)).toBeLessThan(SIGMAS * Math.SQRT2 * stdError);
  });
});
