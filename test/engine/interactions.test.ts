/** One interaction at a time: the books of each, and what is set free by absorption and pair production. */
import { describe, expect, it } from 'vitest';
import { compile } from '../../engine/compile.js';
import { cellOf } from '../../engine/energy-grid.js';
import { COHERENT, INCOHERENT, interact, PAIR, PHOTOELECTRIC, Site } from '../../engine/physics/interact.js';
import { comptonEnergyRatio } from '../../engine/physics/klein-nishina.js';
import { seedStream } from '../../engine/random.js';
import type { Physics } from '../../engine/setup.js';
import {
  fluorescenceYield,
  materialCoefficients,
  relaxation,
  resolveMaterial,
  subshellShares,
} from '../../materials/index.js';
import { expectNear, KS_LIMIT, ksOfSamples, SIGMAS } from './goodness.js';
import { AT_ONCE_PER_CM, firstCollisionEnergyKeV, withCrossSections } from './made-up.js';
import { ALL, figureOf, PLAIN, playSlab, slabSetup, spectrumOf } from './slab-run.js';

const REST = 510.99895; // m c², keV (CODATA 2018)
const KINDS = [PHOTOELECTRIC, INCOHERENT, COHERENT, PAIR];

/** Plays interactions of photons of one energy in one material. */
function each(
  name: string,
  energyKeV: number,
  physics: Physics,
  count: number,
  take: (site: Site, kind: number) => void,
): void {
  const problem = compile(slabSetup({ stack: [[name, 1]], energyKeV, physics, seed: name }, 1));
  const site = new Site();
  seedStream(site.random, `${name} ${energyKeV}`, 0);
  site.localCutoffKeV = physics.cutoffKeV;
  const cell = cellOf(problem.grid, energyKeV);
  for (let i = 0; i < count; i++) {
    site.energyKeV = energyKeV;
    const kind = interact(problem, site, problem.slotOfLayer[0], cell);
    take(site, kind);
  }
}

function releasedKeV({ secondaries }: Site): number {
  let sum = 0;
  for (let i = 0; i < secondaries.count; i++) sum += secondaries.energyKeV[i];
  return sum;
}

const PLACES = ['hydrogen', 'water', 'NaI', 'lead', 'uranium'].flatMap((name) =>
  [1, 1.5, 8, 34, 89, 116, 700, 1023, 3000, 20_000].map((energyKeV) => ({ name, energyKeV })),
);

describe('an interaction', () => {
  it.each(PLACES)(
    'in $name at $energyKeV keV conserves energy, keeps to directions, and is of each kind by its share',
    ({ name, energyKeV }) => {
      const count = 8000;
      const counts = new Float64Array(4);
      let worst = 0;
      let least = Infinity;
      let directions = true;
      each(name, energyKeV, ALL, count, (site, kind) => {
        counts[kind]++;
        const { secondaries, v } = site;
        worst = Math.max(worst, Math.abs(site.energyKeV + site.depositedKeV + releasedKeV(site) - energyKeV));
        least = Math.min(least, site.depositedKeV);
        if (site.energyKeV > 0) directions &&= v >= 0 && v <= 1;
        for (let i = 0; i < secondaries.count; i++) {
          directions &&= Math.abs(secondaries.cosine[i]) <= 1 + 1e-12;
          directions &&= secondaries.energyKeV[i] >= 1;
        }
      });
      expect(worst).toBeLessThan(1e-11 * energyKeV);
      expect(least).toBeGreaterThanOrEqual(-1e-12 * energyKeV);
      expect(directions).toBe(true);
      const c = materialCoefficients(resolveMaterial(name), energyKeV);
      [c.photoelectric, c.incoherent, c.coherent, c.pair].forEach((part, kind) => {
        const p = part / c.total;
        // 10 counts for the few where the normal law is too narrow; 3·10⁻⁴ for the straight cells
        const few = Math.min(10, 100 * count * p);
        const tolerance = SIGMAS * Math.sqrt(count * p * (1 - p)) + few + 3e-4 * count * p;
        const off = Math.abs(counts[kind] - count * p);
        expect(off, `kind ${KINDS[kind]}: ${counts[kind]}`).toBeLessThanOrEqual(tolerance);
      });
    },
  );

  it('sets no photon free and broadens nothing with every further process off', () => {
    let others = 0;
    let scattered = 0;
    each('lead', 900, PLAIN, 5000, (site, kind) => {
      others += site.secondaries.count + (kind === COHERENT || kind === PAIR ? 1 : 0);
      if (kind !== INCOHERENT) return;
      scattered++;
      if (site.energyKeV !== 900 * comptonEnergyRatio(900, site.v)) others++;
    });
    expect(others).toBe(0);
    expect(scattered).toBeGreaterThan(1000);
  });

  it('is never coherent, nor a pair, where these are switched off', () => {
    for (const energyKeV of [30, 6000]) {
      const kinds = new Set<number>();
      each('lead', energyKeV, { ...ALL, coherent: false, pair: false }, 5000, (_, kind) => kinds.add(kind));
      expect([...kinds].sort()).toEqual([PHOTOELECTRIC, INCOHERENT]);
    }
  });
});

describe('a process switched off', () => {
  it('leaves scattered photons the energy of free electrons at rest (doppler)', () => {
    let shifted = 0;
    let scattered = 0;
    each('lead', 300, { ...ALL, doppler: false, bremsstrahlung: false }, 5000, (site, kind) => {
      if (kind !== INCOHERENT) return;
      scattered++;
      if (site.energyKeV !== 300 * comptonEnergyRatio(300, site.v)) shifted++;
    });
    expect(scattered).toBeGreaterThan(500);
    expect(shifted).toBe(0);
  });

  it('leaves no photons but fluorescence and annihilation (bremsstrahlung)', () => {
    const lines = new Set([
      REST,
      ...relaxation(82).shells.flatMap((s) => s.transitions.map((t) => t.photonKeV)),
    ]);
    let others = 0;
    let all = 0;
    each('lead', 3000, { ...ALL, bremsstrahlung: false }, 20_000, ({ secondaries }) => {
      for (let i = 0; i < secondaries.count; i++) {
        all++;
        if (!lines.has(secondaries.energyKeV[i])) others++;
      }
    });
    expect(all).toBeGreaterThan(5000);
    expect(others).toBe(0);
  });

  it('leaves no fluorescence (fluorescence)', () => {
    let set = 0;
    each('lead', 100, { ...ALL, fluorescence: false, bremsstrahlung: false }, 5000, ({ secondaries }) => {
      set += secondaries.count;
    });
    expect(set).toBe(0);
  });

  it('changes no bit where the process cannot happen (pair, below 1022 keV)', () => {
    const play = (pair: boolean) =>
      playSlab(
        { stack: [['lead', 1]], energyKeV: 1021, physics: { ...ALL, pair }, seed: 'no pairs' },
        10_000,
      );
    const [on, off] = [play(true), play(false)];
    expect(Buffer.compare(Buffer.from(on.sums.cellSum.buffer), Buffer.from(off.sums.cellSum.buffer))).toBe(0);
    expect(on.totals).toEqual(off.totals);
  });
});

describe('photoelectric absorption', () => {
  // XCOM total, EPDL97 subshell shares, EADL97 and Krause yields: expected K quanta = share × yield
  it.each([
    { name: 'iodine', z: 53, energyKeV: 40 },
    { name: 'iodine', z: 53, energyKeV: 33.2 },
    { name: 'lead', z: 82, energyKeV: 90 },
    { name: 'lead', z: 82, energyKeV: 600 },
    { name: 'germanium', z: 32, energyKeV: 20 },
  ])(
    'in $name at $energyKeV keV is followed by K quanta in the share of K times its yield',
    ({ name, z, energyKeV }) => {
      const lowest = 0.8 * 10.2e-3 * (z - 1) ** 2; // Moseley's law, well above every L line
      let absorbed = 0;
      let quanta = 0;
      each(name, energyKeV, { ...ALL, bremsstrahlung: false }, 60_000, (site, kind) => {
        if (kind !== PHOTOELECTRIC) return;
        absorbed++;
        for (let i = 0; i < site.secondaries.count; i++) if (site.secondaries.energyKeV[i] > lowest) quanta++;
      });
      const expected = subshellShares(z, energyKeV)[0] * fluorescenceYield(z, 'K');
      const share = quanta / absorbed;
      expectNear(
        'K quanta',
        { mean: share, stdError: Math.sqrt((share * (1 - share)) / absorbed) },
        expected,
        {
          slack: 1e-3,
        },
      );
    },
  );

  it('leaves no K quanta below the edge', () => {
    let highest = 0;
    each('lead', 88, { ...ALL, bremsstrahlung: false }, 20_000, ({ secondaries }) => {
      for (let i = 0; i < secondaries.count; i++) highest = Math.max(highest, secondaries.energyKeV[i]);
    });
    expect(highest).toBeGreaterThan(10); // L quanta
    expect(highest).toBeLessThan(16);
    expect(subshellShares(82, 88)[0]).toBe(0);
  });
});

describe('pair production', () => {
  it('sets two quanta of 511 keV free, exactly back to back and isotropic', () => {
    const cosines: number[] = [];
    let wrong = 0;
    each('lead', 6000, { ...ALL, bremsstrahlung: false }, 60_000, (site, kind) => {
      if (kind !== PAIR) return;
      const { count, energyKeV, cosine, opposite } = site.secondaries;
      const right =
        count === 2 &&
        energyKeV[0] === REST &&
        energyKeV[1] === REST &&
        cosine[1] === -cosine[0] &&
        opposite[0] === 0 &&
        opposite[1] === 1 &&
        site.energyKeV === 0 &&
        site.depositedKeV === 6000 - 2 * REST;
      if (!right) wrong++;
      cosines.push(cosine[0]);
    });
    expect(wrong).toBe(0);
    expect(cosines.length).toBeGreaterThan(10_000);
    expect(ksOfSamples(Float64Array.from(cosines), (cosine) => (1 + cosine) / 2)).toBeLessThan(KS_LIMIT);
  });

  it('keeps the quanta where they lie below the cutoff', () => {
    let pairs = 0;
    let least = Infinity;
    each('lead', 6000, { ...ALL, cutoffKeV: 600 }, 3000, (site, kind) => {
      if (kind === PAIR) pairs++;
      for (let i = 0; i < site.secondaries.count; i++) least = Math.min(least, site.secondaries.energyKeV[i]);
    });
    expect(pairs).toBeGreaterThan(500);
    expect(least).toBeGreaterThanOrEqual(600);
  });

  it('sends through the history loop one quantum forward and one back, each time', () => {
    // All photons turn into pairs at the surface, and 511 keV quanta fly freely
    const energyKeV = firstCollisionEnergyKeV(12);
    const physics = { ...ALL, bremsstrahlung: false };
    const histories = 20_000;
    const played = playSlab(
      { stack: [['lead', 1]], energyKeV, physics, seed: 'pairs', angleDeg: 40 },
      histories,
      (problem) => withCrossSections(problem, { perCm: AT_ONCE_PER_CM, pair: 1 }, energyKeV),
    );
    for (const side of ['transmitted', 'reflected'] as const) {
      const figure = figureOf(played, side);
      expect(figure.mean).toBe(1);
      expect(figure.stdError).toBe(0);
      const spectrum = spectrumOf(played, side);
      expect(spectrum.mean[510]).toBeCloseTo(1, 12);
    }
    const deposited = figureOf(played, 'deposited_energy', 'l0').mean;
    expect(Math.abs(deposited / (energyKeV - 2 * REST) - 1)).toBeLessThan(1e-9);
  });
});
