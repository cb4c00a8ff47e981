/** Slab transport with many histories: an independent program, deep penetration, honest errors, trapped photons. */
import { describe, expect, it } from 'vitest';
import { compile } from '../../engine/compile.js';
import { materialCoefficients, resolveMaterial } from '../../materials/index.js';
import { chiSquareSigmas, expectNear, SIGMAS } from '../engine/goodness.js';
import { withCrossSections, withoutLocalCutoffs } from '../engine/made-up.js';
import { ALL, figureOf, PLAIN, playSetup, playSlab, slabSetup, type SlabLayer } from '../engine/slab-run.js';
import { publishedRows } from '../published/csv.js';
import { effort } from './effort.js';

const STACKS: Record<string, SlabLayer[]> = {
  'NaI 7.62 cm': [['NaI', 7.62, 'detector']],
  'lead 3 cm': [['lead', 3, 'detector']],
  'concrete 30 cm': [['concrete', 30, 'detector']],
  'aluminium 0.05 cm + NaI 7.62 cm + lead 2 cm': [['aluminium', 0.05], ['NaI', 7.62, 'detector'], ['lead', 2]], // prettier-ignore
};

describe('the figures of an independent program', () => {
  // 5·10⁻⁴ of each for the other program's tables (log–log straight lines on 4096 points against splines)
  it.each(Object.entries(STACKS))('are met by %s with ten million histories', (name, stack) => {
    const rows = publishedRows('plain-physics-slabs').filter((row) => row.case === name);
    const energyKeV = Number(rows[0].energy_keV);
    const played = playSlab({ stack, energyKeV, physics: PLAIN, seed: `long ${name}` }, effort(10_000_000));
    const detector = `l${stack.findIndex(([, , kind]) => kind === 'detector')}`;
    for (const { quantity, mean, std_error } of rows) {
      const ofLayer = ['full_energy', 'interacting', 'deposited_energy'].includes(quantity);
      expectNear(quantity, figureOf(played, quantity, ofLayer ? detector : null), Number(mean), {
        expectedError: Number(std_error),
        slack: 5e-4 * Number(mean),
      });
    }
  });
});

describe('flights', () => {
  it('are exponential to 16 mean free paths in a hundred million', () => {
    const perLayer = 0.25;
    const stack = Array.from({ length: 64 }, (): SlabLayer => ['lead', perLayer]);
    const histories = effort(100_000_000);
    const played = playSlab(
      { stack, energyKeV: 100, physics: PLAIN, seed: 'a hundred million', binKeV: 50 },
      histories,
      (problem) => withCrossSections(problem, { perCm: 1, photoelectric: 1 }),
    );
    const counts = stack.map((_, l) => figureOf(played, 'interacting', `l${l}`).mean * histories);
    const expected = stack.map(
      (_, l) => histories * (Math.exp(-perLayer * l) - Math.exp(-perLayer * (l + 1))),
    );
    expect(chiSquareSigmas(counts, expected)).toBeLessThan(SIGMAS);
  });

  it('pass 9 mean free paths of lead with all physics on as often as they must', () => {
    const energyKeV = 500;
    const lead = resolveMaterial('lead');
    const perCm = materialCoefficients(lead, energyKeV).total * lead.densityGPerCm3;
    const played = playSlab(
      { stack: [['lead', 9 / perCm]], energyKeV, physics: ALL, seed: 'nine' },
      effort(10_000_000),
    );
    const expected = Math.exp(-9);
    const stdError = Math.sqrt(expected / played.histories);
    expectNear('uncollided', { mean: figureOf(played, 'uncollided').mean, stdError }, expected, {
      slack: 9 * 2e-4 * expected,
    });
  });
});

describe('standard errors', () => {
  it('are those of repeated runs, for every figure', () => {
    const runs = effort(2000);
    const given = {
      stack: STACKS['aluminium 0.05 cm + NaI 7.62 cm + lead 2 cm'],
      energyKeV: 1332.5,
      physics: ALL,
    };
    const setup = slabSetup({ ...given, seed: '' }, 2000);
    const problem = compile(setup);
    const values = new Map<string, { mean: number; stdError: number }[]>();
    for (let run = 0; run < runs; run++) {
      const { totals } = playSetup(setup, { ...problem, seed: `repeat ${run}` });
      for (const { quantity, layer, mean, stdError } of totals) {
        if (mean === null || stdError === null || stdError === 0) continue;
        const key = `${quantity} ${layer}`;
        if (!values.has(key)) values.set(key, []);
        values.get(key)!.push({ mean, stdError });
      }
    }
    let compared = 0;
    for (const [key, list] of values) {
      if (list.length < runs) continue;
      const mean = list.reduce((sum, value) => sum + value.mean, 0) / runs;
      const spread = list.reduce((sum, value) => sum + (value.mean - mean) ** 2, 0) / (runs - 1);
      const stated = list.reduce((sum, value) => sum + value.stdError ** 2, 0) / runs;
      // χ² of the runs: relative error √(2/ν); 5 of them, for the tails of energies are heavier than normal
      expect(Math.abs(spread / stated - 1), key).toBeLessThan(5 * Math.sqrt(2 / (runs - 1)));
      compared++;
    }
    expect(compared).toBeGreaterThanOrEqual(10);
  });
});

describe('photons that cannot leave their layer', () => {
  it.each([
    { title: 'lead of 5 mm at 300 keV', stack: [['lead', 0.5]] as SlabLayer[], energyKeV: 300 },
    { title: 'tungsten of 1 cm at 3 MeV', stack: [['tungsten', 1]] as SlabLayer[], energyKeV: 3000 },
    { title: 'water of 20 cm before lead of 1 mm at 100 keV', stack: [['water', 20], ['lead', 0.1]] as SlabLayer[], energyKeV: 100 }, // prettier-ignore
  ])('leave no trace in any figure: $title', ({ title, stack, energyKeV }) => {
    const setup = slabSetup({ stack, energyKeV, physics: ALL, seed: title }, effort(2_000_000));
    const problem = compile(setup);
    const quick = playSetup(setup, problem);
    const slow = playSetup(setup, { ...withoutLocalCutoffs(problem), seed: `${title}, followed` });
    quick.totals.forEach(({ quantity, layer, mean, stdError }, i) => {
      const expectedError = slow.totals[i].stdError ?? 0;
      expectNear(`${quantity} ${layer}`, { mean: mean!, stdError: stdError ?? 0 }, slow.totals[i].mean!, {
        expectedError,
      });
    });
  });
});
