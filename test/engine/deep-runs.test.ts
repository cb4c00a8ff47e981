/** Whole runs of deep transport: which setups it takes, same bits however it is run, scaling, profiles. */
import { describe, expect, it } from 'vitest';
import { compile } from '../../engine/compile.js';
import { isDeep } from '../../engine/deep/choice.js';
import { simulate } from '../../engine/simulate.js';
import type { Setup, Transport } from '../../engine/setup.js';
import { attenuationPerCm } from '../../engine/deep/grid.js';
import { curveOf, equilibriumTenth, layerBetween, thicknessFor } from '../../engine/attenuation-curve.js';
import { deepSetup, figureIn, playDeep, type DeepCase } from './deep-run.js';
import { expectNear } from './goodness.js';
import { ALL } from './slab-run.js';

const WALL: DeepCase = {
  stack: [
    ['concrete', 30],
    ['lead', 1],
  ],
  energyKeV: [662, 1250],
  shape: { kind: 'point', distanceCm: 50, offsetCm: 0 },
  dose: ['ambient_dose', 'air_kerma'],
  points: [{ name: 'behind', zCm: 61, offsetCm: 10 }],
  depth: { layer: 'l0', bins: 6 },
  seed: 'deep-runs wall',
};

describe('transport', () => {
  const choose = (
    given: Partial<DeepCase>,
    transport: Transport,
    change: (setup: Setup) => Setup = (s) => s,
  ) =>
    isDeep(
      change(
        deepSetup({ stack: [['lead', 1]], energyKeV: 662, dose: [], seed: 'choice', ...given }, 1, transport),
      ),
    );
  const detector = (setup: Setup): Setup => ({
    ...setup,
    stack: [{ ...setup.stack[0], detector: { resolution: null, thresholdKeV: null, windows: [] } }],
  });
  const radius = (setup: Setup): Setup => ({ ...setup, extent: { kind: 'radius', radiusCm: 5 } });

  it('auto is deep where dose is asked for, or the stack is thick', () => {
    expect(choose({}, 'auto')).toBe(false);
    expect(choose({ dose: ['air_kerma'] }, 'auto')).toBe(true);
    expect(choose({ depth: { layer: 'l0', bins: 3 } }, 'auto')).toBe(true);
    expect(choose({ stack: [['lead', 12]] }, 'auto')).toBe(true);
    // 60 keV gets nowhere in 1 cm of lead, but the line at 1.25 MeV does.
    expect(choose({ energyKeV: 60 }, 'auto')).toBe(true);
    expect(choose({ energyKeV: [60, 1250] }, 'auto')).toBe(false);
  });

  it('auto is analog where pulse heights are asked for, or layers have an edge', () => {
    expect(choose({ dose: ['air_kerma'] }, 'auto', detector)).toBe(false);
    expect(choose({ dose: ['air_kerma'] }, 'auto', radius)).toBe(false);
  });

  it('deep refuses a detector layer with the way out', () => {
    expect(() => choose({}, 'deep', detector)).toThrow(
      'deep transport gives no pulse heights, but layer l0 is a detector: remove detector from it, or take transport: analog',
    );
  });

  it('deep refuses layers with an edge with the way out', () => {
    expect(() => choose({}, 'deep', radius)).toThrow(/layers without an edge: remove extent and radius/);
  });

  it('deep gives neither interacting nor spectra of what a history leaves', () => {
    const { totals, spectra } = playDeep(WALL, 1000);
    expect(totals.map(({ quantity }) => quantity)).not.toContain('interacting');
    expect(spectra.map(({ tally }) => tally)).toEqual(['transmitted', 'reflected']);
  });
});

describe('a deep run', () => {
  it('gives the same bits with 1, 2 and 3 threads', async () => {
    const setup = deepSetup(WALL, 40_000);
    const results = [];
    for (const threads of [1, 2, 3]) results.push(await simulate(setup, { threads }));
    const [one, ...others] = results.map(({ totals, spectra, depth, balance }) => ({
      totals,
      spectra: spectra.map(({ mean, stdError }) => [...mean, ...stdError]),
      depth,
      balance,
    }));
    for (const other of others) expect(other).toEqual(one);
  });

  it.each([-3, 5])('scaled by 2^%i in length and density gives the same bits', (power) => {
    // Bremsstrahlung depends on the density by itself.
    const physics = { ...ALL, bremsstrahlung: false };
    const given: DeepCase = { ...WALL, physics, shape: undefined, points: [], seed: 'deep-runs scale' };
    const scale = 2 ** power;
    const scaled = playDeep(given, 3000, 'deep', (setup) => ({
      ...setup,
      stack: setup.stack.map((layer) => ({
        ...layer,
        thicknessCm: layer.thicknessCm * scale,
        material: layer.material && {
          ...layer.material,
          densityGPerCm3: layer.material.densityGPerCm3 / scale,
        },
      })),
    }));
    const plain = playDeep(given, 3000);
    const inLengths = (name: string) => name.includes('value_layer');
    const rows = ({ totals }: typeof plain) => totals.filter(({ quantity }) => !inLengths(quantity));
    expect(rows(scaled)).toEqual(rows(plain));
    expect(scaled.spectra.map(({ mean }) => [...mean])).toEqual(plain.spectra.map(({ mean }) => [...mean]));
    for (const { quantity, mean } of plain.totals.filter((row) => inLengths(row.quantity))) {
      const other = scaled.totals.find((row) => row.quantity === quantity)!.mean;
      expect(other === null ? null : other / scale).toBe(mean);
    }
  });

  it('says how many histories a figure stands on, and that few do not suffice', () => {
    const few = playDeep({ stack: [['concrete', 200]], energyKeV: 300, seed: 'deep-runs few' }, 100);
    const row = few.totals.find(({ quantity }) => quantity === 'air_kerma')!;
    expect(row.reliability!.contributing).toBeLessThan(100);
    const many = playDeep({ stack: [['lead', 5]], energyKeV: 1250, seed: 'deep-runs many' }, 10_000);
    const good = many.totals.find(({ quantity }) => quantity === 'air_kerma')!.reliability!;
    expect(good.contributing).toBeGreaterThan(1000);
    expect(good.vov).toBeLessThan(0.01);
  });

  it('takes lines that get nowhere and lines that get through in one run', () => {
    const both = playDeep({ stack: [['lead', 8]], energyKeV: [80, 1250], seed: 'deep-runs lines' }, 40_000);
    const hard = playDeep({ stack: [['lead', 8]], energyKeV: 1250, seed: 'deep-runs line' }, 20_000);
    const [a, b] = [both, hard].map((played) => figureIn(played, 'air_kerma'));
    expectNear('half of the photons', { mean: 2 * a.mean, stdError: 2 * a.stdError }, b.mean, {
      expectedError: b.stdError,
    });
  });

  it('of a continuum agrees with its analog twin', () => {
    const given: DeepCase = { stack: [['water', 10]], energyKeV: 200, seed: 'deep-runs continuum' };
    const continuum = [
      { energyLowKeV: 20, energyHighKeV: 60, relativePhotons: 3 },
      { energyLowKeV: 60, energyHighKeV: 200, relativePhotons: 1 },
    ];
    const change = (setup: Setup): Setup => ({
      ...setup,
      source: { ...setup.source, emission: { ...setup.source.emission, lines: [], continuum } },
    });
    const deep = playDeep(given, 12_000, 'deep', change);
    const analog = playDeep(given, 40_000, 'analog', change);
    for (const quantity of [
      'uncollided',
      'transmitted',
      'transmitted_energy',
      'reflected_energy',
      'air_kerma',
    ]) {
      const { mean, stdError } = figureIn(analog, quantity);
      expectNear(quantity, figureIn(deep, quantity), mean, { expectedError: stdError });
    }
    const [a, b] = [deep, analog].map(({ spectra }) => spectra.find(({ tally }) => tally === 'transmitted')!);
    a.mean.forEach((mean, bin) => {
      if (b.mean[bin] * 40_000 < 40) return;
      expectNear(`bin ${bin}`, { mean, stdError: a.stdError[bin] }, b.mean[bin], {
        expectedError: b.stdError[bin],
      });
    });
  });
});

describe('a depth profile', () => {
  it('tells the dose behind thinner layers that runs of their own give', () => {
    const profile: DeepCase = {
      stack: [
        ['aluminium', 2],
        ['water', 40],
      ],
      energyKeV: 500,
      depth: { layer: 'l1', bins: 40 },
      seed: 'deep-runs profile',
    };
    const { depth } = playDeep(profile, 30_000);
    const behind = depth.filter(({ quantity }) => quantity === 'air_kerma_behind');
    for (const [bin, thicknessCm] of [
      [9, 9.5],
      [24, 24.5],
      [34, 34.5],
    ]) {
      const thin = playDeep(
        {
          stack: [
            ['aluminium', 2],
            ['water', thicknessCm],
          ],
          energyKeV: 500,
          seed: `deep-runs thin ${thicknessCm}`,
        },
        20_000,
      );
      const { mean, stdError } = figureIn(thin, 'air_kerma');
      const slice = behind[bin];
      // The mean over a slice of 1 cm is above its middle by (k d)²/24, 0.03 % here.
      expectNear(`behind ${thicknessCm} cm`, { mean: slice.mean!, stdError: slice.stdError! }, mean, {
        expectedError: stdError,
        slack: 1e-3 * mean,
      });
    }
  });

  it('adds up to the energy deposited in its layer', () => {
    const { depth, totals } = playDeep(WALL, 5000);
    const sum = depth
      .filter(({ quantity }) => quantity === 'deposited_energy')
      .reduce((total, { mean }) => total + mean!, 0);
    expect(Math.abs(sum / figureIn({ totals }, 'deposited_energy', 'l0').mean - 1)).toBeLessThan(1e-9);
  });

  it('holds more dose inside than a layer that ends there lets through', () => {
    const { depth } = playDeep(WALL, 5000);
    const of = (name: string) => depth.filter(({ quantity }) => quantity === name).map(({ mean }) => mean!);
    const [inside, behind] = [of('air_kerma'), of('air_kerma_behind')];
    expect(inside).toHaveLength(6);
    inside.forEach((dose, bin) => expect(dose).toBeGreaterThan(behind[bin]));
  });
});

describe('curves of dose against thickness', () => {
  const perCm = 0.7;
  const slices = (count: number, width: number) =>
    Array.from({ length: count }, (_, i) => ({
      mean: (Math.exp(-perCm * i * width) - Math.exp(-perCm * (i + 1) * width)) / (perCm * width),
      stdError: 0.01 * Math.exp(-perCm * (i + 0.5) * width),
    }));
  const curve = curveOf(0.25, slices(60, 0.25), 1);

  it('give an exponential its half- and tenth-value layers from means over slices', () => {
    expect(thicknessFor(curve, 0.5)!.mean).toBeCloseTo(Math.LN2 / perCm, 6);
    expect(layerBetween(curve, 0.1, 0.01)!.mean).toBeCloseTo(Math.LN10 / perCm, 9);
    expect(equilibriumTenth(curve)!.mean).toBeCloseTo(Math.LN10 / perCm, 9);
  });

  it('give errors by the slope', () => {
    expect(thicknessFor(curve, 0.01)!.stdError).toBeCloseTo(0.01 / perCm, 3);
    expect(layerBetween(curve, 0.1, 0.01)!.stdError).toBeCloseTo((0.01 * Math.SQRT2) / perCm, 3);
  });

  it('know nothing of doses they do not reach', () => {
    expect(thicknessFor(curve, 1e-9)).toBeNull();
    expect(thicknessFor(curve, 2)).toBeNull();
    expect(equilibriumTenth(curve.slice(0, 3))).toBeNull();
  });
});

describe('the coarse grid', () => {
  it('is finest at the faces and reaches over every layer', () => {
    const problem = compile(deepSetup({ ...WALL, seed: 'deep-runs grid' }, 1));
    const { grid } = problem.deep!.plan;
    expect([...grid.firstSlice].at(-1)).toBe(grid.slices);
    expect(grid.edgesCm[grid.firstSlice[1]]).toBe(problem.boundariesCm[1]);
    expect(grid.edgesCm[grid.slices]).toBe(problem.boundariesCm[2]);
    const width = (i: number) => grid.edgesCm[i + 1] - grid.edgesCm[i];
    for (let i = 0; i < grid.slices; i++) expect(width(i)).toBeGreaterThan(0);
    const [first, middle] = [0, Math.floor(grid.firstSlice[1] / 2)];
    expect(width(first) * attenuationPerCm(problem, problem.slotOfLayer[0], 15)).toBeLessThan(1);
    expect(width(middle)).toBeGreaterThan(2 * width(first));
  });
});
