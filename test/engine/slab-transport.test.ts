import { describe, expect, it } from 'vitest';
import type { Problem } from '../../engine/problem.js';
import { materialCoefficients, resolveMaterial, type Material } from '../../materials/index.js';
import { exponentialIntegral } from './exponential-integral.js';
import { chiSquareSigmas, expectNear, integrate } from './goodness.js';
import { withCrossSections } from './made-up.js';
import { ALL, figureOf, PLAIN, playSlab, spectrumOf, type Played, type SlabLayer } from './slab-run.js';

const AIR_GAP: SlabLayer = [null, 5];

function opticalDepth(stack: readonly SlabLayer[], energyKeV: number): number {
  return stack.reduce((sum, [given, thicknessCm]) => {
    if (given === null) return sum;
    const material = typeof given === 'string' ? resolveMaterial(given) : given;
    return sum + materialCoefficients(material, energyKeV).total * material.densityGPerCm3 * thicknessCm;
  }, 0);
}

describe('uncollided transmission', () => {
  const cases: { title: string; stack: SlabLayer[]; energyKeV: number; angleDeg: number }[] = [
    { title: 'lead', stack: [['lead', 2]], energyKeV: 1000, angleDeg: 0 },
    { title: 'a vacuum gap alone', stack: [AIR_GAP], energyKeV: 30, angleDeg: 70 },
    { title: 'water', stack: [['water', 20]], energyKeV: 60, angleDeg: 0 },
    { title: 'concrete, slanted', stack: [['concrete', 10]], energyKeV: 2614, angleDeg: 60 },
    { title: 'a detector in its can', stack: [['aluminium', 0.05], ['NaI', 2.54, 'detector'], ['lead', 0.2]], energyKeV: 661.7, angleDeg: 0 }, // prettier-ignore
    { title: 'foils and gaps', stack: [['kapton', 0.0025], AIR_GAP, ['beryllium', 0.0254], AIR_GAP, ['silicon', 0.002]], energyKeV: 5.9, angleDeg: 30 }, // prettier-ignore
    { title: 'very thin beside very thick', stack: [['gold', 1e-6], ['dry air', 1000], ['tin', 1e-3]], energyKeV: 29.3, angleDeg: 10 }, // prettier-ignore
    { title: 'iodine just above its K edge', stack: [['CsI', 0.02]], energyKeV: 33.17, angleDeg: 0 },
    { title: 'iodine just below its K edge', stack: [['CsI', 0.02]], energyKeV: 33.168, angleDeg: 0 },
    { title: 'uranium at the top of the range', stack: [['depleted uranium', 1]], energyKeV: 20_000, angleDeg: 45 }, // prettier-ignore
  ];

  // Lambert–Beer law
  it.each(cases)('of $title at $energyKeV keV and $angleDeg° is exp(−Σ μ t / cos θ)', (given) => {
    const played = playSlab({ ...given, physics: ALL, seed: given.title }, 50_000);
    const path = opticalDepth(given.stack, given.energyKeV) / Math.cos((given.angleDeg * Math.PI) / 180);
    // 2·10⁻⁴ of the path for the straight cells of the energy grid
    expectNear('uncollided', figureOf(played, 'uncollided'), Math.exp(-path), {
      slack: 2e-4 * path * Math.exp(-path),
    });
  });

  it('falls exponentially to 16 mean free paths: the logarithm of the flights has no weak spot', () => {
    const perLayer = 0.25;
    const stack = Array.from({ length: 64 }, (): SlabLayer => ['lead', perLayer]);
    const histories = 2_000_000;
    const played = playSlab(
      { stack, energyKeV: 100, physics: PLAIN, seed: 'sixteen', binKeV: 50 },
      histories,
      (problem) => withCrossSections(problem, { perCm: 1, photoelectric: 1 }),
    );
    const counts = stack.map((_, l) => figureOf(played, 'interacting', `l${l}`).mean * histories);
    const expected = stack.map(
      (_, l) => histories * (Math.exp(-perLayer * l) - Math.exp(-perLayer * (l + 1))),
    );
    // (χ² − ν)/√(2 ν): about normal, above 4 once in 3e4
    expect(chiSquareSigmas(counts, expected)).toBeLessThan(4);
    const deep = (values: number[]) => values.slice(28).reduce((sum, value) => sum + value, 0); // u < 1/1024
    expect(Math.abs(deep(counts) - deep(expected))).toBeLessThan(4 * Math.sqrt(deep(expected)));
  });
});

describe('diffuse light through a pure absorber', () => {
  const absorber = (problem: Problem) => withCrossSections(problem, { perCm: 1, photoelectric: 1 });
  const depths = [0.01, 0.3, 1, 3, 6];

  it.each([1e-3, 0.1, 1, 1.49, 1.51, 5, 20])('has its E₁ to E₃ of %d by quadrature too', (x) => {
    for (const n of [1, 2, 3]) {
      // t = 1/s: E_n = ∫₀¹ exp(−x/s) s^(n−2) ds, with s = q² to tame the end
      const byQuadrature = integrate(
        (q) => Math.exp(-x / (q * q)) * (q * q) ** (n - 2) * 2 * q,
        1e-6,
        1,
        4000,
      );
      expect(exponentialIntegral(n, x) / byQuadrature).toBeCloseTo(1, 8);
    }
  });

  const play = (tau: number, law: 'isotropic' | 'uniform_solid_angle' | 'point') =>
    playSlab(
      {
        stack: [['lead', tau]],
        energyKeV: 100,
        physics: PLAIN,
        seed: `diffuse ${tau}`,
        shape: law === 'point' ? { kind: 'point', distanceCm: 10, offsetCm: 0 } : { kind: 'diffuse', law },
      },
      200_000,
      absorber,
    );
  const absorbedToo = (played: Played, incident: number) => {
    const sum = figureOf(played, 'transmitted').mean + figureOf(played, 'interacting', 'l0').mean;
    expect(sum).toBeCloseTo(incident, 12);
    expect(figureOf(played, 'reflected').mean).toBe(0);
  };

  it.each(depths)('of constant radiance is transmitted by 2 E₃(τ), τ = %d', (tau) => {
    const played = play(tau, 'isotropic');
    expectNear('transmitted', figureOf(played, 'transmitted'), 2 * exponentialIntegral(3, tau));
    absorbedToo(played, 1);
  });

  it.each(depths)('uniform in solid angle is transmitted by E₂(τ), τ = %d', (tau) => {
    const played = play(tau, 'uniform_solid_angle');
    expectNear('transmitted', figureOf(played, 'transmitted'), exponentialIntegral(2, tau));
    absorbedToo(played, 1);
  });

  it.each(depths)('of a point source is transmitted by E₂(τ)/2 of all it emits, τ = %d', (tau) => {
    const played = play(tau, 'point');
    expectNear('transmitted', figureOf(played, 'transmitted'), exponentialIntegral(2, tau) / 2);
    absorbedToo(played, 0.5);
  });

  it('holds for lead at 20 keV as it is: the uncollided part is 2 E₃(τ)', () => {
    const [thicknessCm, energyKeV] = [0.0005, 20];
    const tau = opticalDepth([['lead', thicknessCm]], energyKeV);
    const played = playSlab(
      {
        stack: [['lead', thicknessCm]],
        energyKeV,
        physics: ALL,
        seed: 'lead at 20 keV',
        shape: { kind: 'diffuse', law: 'isotropic' },
      },
      100_000,
    );
    const expected = 2 * exponentialIntegral(3, tau);
    expectNear('uncollided', figureOf(played, 'uncollided'), expected, { slack: 2e-4 * tau * expected });
  });

  it('from within a layer escapes by (1 − 2 E₃(τ))/(4 τ) on each side', () => {
    // Mean of E₂/2 over the depth: ∫₀^τ E₂(x) dx / (2 τ) = (1/2 − E₃(τ))/(2 τ)
    const tau = 1.7;
    const played = playSlab(
      {
        stack: [['lead', tau]],
        energyKeV: 100,
        physics: PLAIN,
        seed: 'within',
        shape: { kind: 'embedded', layer: 'l0' },
      },
      200_000,
      absorber,
    );
    const expected = (0.5 - exponentialIntegral(3, tau)) / (2 * tau);
    expectNear('front', figureOf(played, 'reflected'), expected);
    expectNear('back', figureOf(played, 'transmitted'), expected);
  });
});

describe('symmetries of a stack', () => {
  const stack: SlabLayer[] = [
    ['aluminium', 0.4],
    [null, 3],
    ['NaI', 1.5, 'detector'],
    ['lead', 0.3],
  ];
  const all = (played: Played, quantity: string) =>
    played.totals.filter((row) => row.quantity === quantity).map(({ mean }) => mean);

  // The density effect in bremsstrahlung depends on density itself, so that process is left out here
  it.each([1, -3, 8])('scaled by 2^%d in length and density gives the same bits', (power) => {
    const factor = 2 ** power;
    const scaled = stack.map(([material, thicknessCm, detector]): SlabLayer => {
      if (material === null) return [null, thicknessCm * factor];
      const known = resolveMaterial(material as string);
      const thinner: Material = { ...known, densityGPerCm3: known.densityGPerCm3 / factor };
      return detector ? [thinner, thicknessCm * factor, detector] : [thinner, thicknessCm * factor];
    });
    const physics = { ...ALL, bremsstrahlung: false };
    const shape = { kind: 'diffuse', law: 'isotropic' } as const;
    const play = (given: SlabLayer[]) =>
      playSlab({ stack: given, energyKeV: [300, 1332.5, 2614], physics, seed: 'scaled', shape }, 20_000);
    const [plain, other] = [play(stack), play(scaled)];
    for (const name of ['cellSum', 'cellSquare', 'figureSum', 'figureSquare'] as const) {
      expect(Buffer.compare(Buffer.from(other.sums[name].buffer), Buffer.from(plain.sums[name].buffer))).toBe(
        0,
      );
    }
  });

  it('does not care whether a layer is one or two halves of it', () => {
    const whole: SlabLayer[] = [
      ['iron', 1],
      ['NaI', 2],
    ];
    const halves: SlabLayer[] = [
      ['iron', 0.5],
      ['iron', 0.5],
      ['NaI', 1],
      ['NaI', 1],
    ];
    const play = (given: SlabLayer[]) =>
      playSlab(
        { stack: given, energyKeV: 1332.5, physics: ALL, seed: `split ${given.length}`, angleDeg: 30 },
        150_000,
      );
    const [one, two] = [play(whole), play(halves)];
    for (const quantity of [
      'transmitted',
      'transmitted_energy',
      'uncollided',
      'reflected',
      'reflected_energy',
    ]) {
      const other = figureOf(two, quantity);
      expectNear(quantity, figureOf(one, quantity), other.mean, { expectedError: other.stdError });
    }
    const ironOf = (played: Played) => all(played, 'deposited_energy');
    const parts = ironOf(two) as number[];
    const error = figureOf(one, 'deposited_energy', 'l0').stdError;
    expectNear('iron', figureOf(one, 'deposited_energy', 'l0'), parts[0] + parts[1], {
      expectedError: error,
    });
    const nai = figureOf(one, 'deposited_energy', 'l1');
    expectNear('NaI', nai, parts[2] + parts[3], { expectedError: nai.stdError });
  });

  it('transmits as much from either side where photons keep their energy (reciprocity)', () => {
    // One energy, elastic scattering, constant radiance: the current transmitted is the same both ways, the reflected
    // is not (Chandrasekhar, Radiative Transfer (1950), § 13; Case and Zweifel 1967, ch. 2).
    const uneven: SlabLayer[] = [
      ['carbon', 0.7],
      ['lead', 0.5],
      ['iron', 0.2],
    ];
    const elastic = (problem: Problem): Problem => {
      // Absorption and elastic scattering in shares that differ from material to material
      const cells = withCrossSections(problem, { perCm: 1.5, photoelectric: 0.1, coherent: 0.9 }).cells;
      const perSlot = cells.length / 3;
      const slotOfLead = problem.slotOfLayer[uneven.findIndex(([name]) => name === 'lead')];
      for (let i = slotOfLead * perSlot; i < (slotOfLead + 1) * perSlot; i += 8) {
        cells[i + 2] = 0.6;
        cells[i + 4] = 0.6;
      }
      return { ...problem, cells };
    };
    const play = (given: SlabLayer[]) =>
      playSlab(
        {
          stack: given,
          energyKeV: 8,
          physics: { ...PLAIN, coherent: true },
          seed: `reciprocal ${String(given[0][0])}`,
          shape: { kind: 'diffuse', law: 'isotropic' },
        },
        300_000,
        elastic,
      );
    const [ahead, back] = [play(uneven), play([...uneven].reverse())];
    const other = figureOf(back, 'transmitted');
    expectNear('transmitted', figureOf(ahead, 'transmitted'), other.mean, { expectedError: other.stdError });
    const difference = figureOf(ahead, 'reflected').mean - figureOf(back, 'reflected').mean;
    expect(Math.abs(difference)).toBeGreaterThan(20 * figureOf(ahead, 'reflected').stdError);
  });

  it('lets as many pass uncollided from either side, whatever the physics', () => {
    const shape = { kind: 'diffuse', law: 'isotropic' } as const;
    const play = (given: SlabLayer[]) =>
      playSlab(
        { stack: given, energyKeV: 661.7, physics: ALL, seed: `mirror ${String(given[0][0])}`, shape },
        100_000,
      );
    const other = figureOf(play([...stack].reverse()), 'uncollided');
    expectNear('uncollided', figureOf(play(stack), 'uncollided'), other.mean, {
      expectedError: other.stdError,
    });
  });

  it('gives the plain physics the same histories by either route through the loop', () => {
    const play = (change: (problem: Problem) => Problem) =>
      playSlab({ stack, energyKeV: 661.7, physics: PLAIN, seed: 'routes' }, 50_000, change);
    const written = play((problem) => problem);
    const called = play((problem) => ({ ...problem, plain: false }));
    for (const { quantity, layer, mean } of written.totals) {
      const other = called.totals.find((row) => row.quantity === quantity && row.layer === layer)!;
      expect(Math.abs(mean! - other.mean!), `${quantity} ${layer}`).toBeLessThanOrEqual(
        1e-9 * Math.abs(mean!),
      );
    }
    const [a, b] = [written, called].map((played) => spectrumOf(played, 'pulse_height', 'l2').mean);
    // A deposit at the very border of a bin may fall to the other side by rounding
    const moved = a.reduce((sum, value, bin) => sum + Math.abs(value - b[bin]), 0) * 50_000;
    expect(moved).toBeLessThanOrEqual(2);
  });
});
