import { describe, expect, it } from 'vitest';
import { compile } from '../../engine/compile.js';
import { kleinNishinaShape, kleinNishinaTotalCm2 } from '../../engine/physics/klein-nishina.js';
import type { SourceShape } from '../../engine/setup.js';
import { FIGURE } from '../../engine/tally-layout.js';
import { discSolidAngleSr } from '../../geometry/index.js';
import { materialCoefficients, resolveMaterial } from '../../materials/index.js';
import { offAxisEfficiency, onAxisEfficiency } from './cylinder-efficiency.js';
import { exponentialIntegral } from './exponential-integral.js';
import { expectNear, integrate, SIGMAS } from './goodness.js';
import { withCrossSections } from './made-up.js';
import { ALL, figureOf, playSetup, spectrumOf, type Played } from './slab-run.js';
import {
  beam,
  disc,
  embedded,
  playSolid,
  point,
  radius,
  solidSetup,
  THREE_INCH_CM,
  type SolidCase,
} from './solid-run.js';

const CRYSTAL = { radiusCm: THREE_INCH_CM / 2, heightCm: THREE_INCH_CM };

/** Plays a case in which every material is a pure absorber: one collision ends it all. */
function playAbsorber(given: SolidCase, perCm: number, histories: number): Played {
  const setup = solidSetup(given, histories);
  return playSetup(setup, withCrossSections(compile(setup), { perCm, photoelectric: 1 }));
}

/** Photons that came into the stack, by whatever surface. */
function cameIn({ sums, histories, setup }: Played): number {
  return sums.figureSum[FIGURE.sourceEnergy] / setup.source.emission.lines[0].energyKeV / histories;
}

describe('Photons that strike the front face', () => {
  const bare = (shape: SourceShape, transport: 'auto' | 'analog'): SolidCase => ({
    stack: [['NaI', THREE_INCH_CM]],
    extent: radius(CRYSTAL.radiusCm),
    energyKeV: 661.7,
    shape,
    seed: 'front face',
    transport,
  });
  const share = (distance: number, offset: number) =>
    discSolidAngleSr(CRYSTAL.radiusCm, distance, offset) / (4 * Math.PI);

  it.each([1, 25, 400])('of a point on the axis %d cm away are the solid angle, exactly', (distance) => {
    const { mean } = figureOf(playSolid(bare(point(distance), 'auto'), 2000), 'incident');
    // The cone is 2^-40 wider than the face.
    expect(Math.abs(mean / share(distance, 0) - 1)).toBeLessThan(1e-9);
  });

  it.each([
    [5, 2, 'auto'],
    [25, 10, 'auto'],
    [1, 8, 'auto'],
    [0.1, 3, 'auto'],
    [5, 2, 'analog'],
    [1, 8, 'analog'],
  ] as const)(
    'of a point %d cm away and %d cm off the axis are the solid angle (%s)',
    (distance, offset, transport) => {
      const played = playSolid(bare(point(distance, offset), transport), 60_000);
      expectNear('incident', figureOf(played, 'incident'), share(distance, offset));
    },
  );

  it.each(['auto', 'analog'] as const)('of a disc are the mean solid angle over it (%s)', (transport) => {
    const played = playSolid(bare(disc(3, 5), transport), 60_000);
    const mean = integrate((r) => (2 * r * share(3, r + 1e-9)) / 25, 0, 5);
    expectNear('incident', figureOf(played, 'incident'), mean);
  });

  it('are half of those of a point that lies on it, and none of one beside it', () => {
    expect(figureOf(playSolid(bare(point(0, 3), 'auto'), 2000), 'incident').mean).toBe(0.5);
    const beside = playSolid(bare(point(0, 5), 'auto'), 20_000);
    expect(figureOf(beside, 'incident').mean).toBe(0);
    expect(cameIn(beside)).toBeGreaterThan(0.1);
  });

  it('are fewer than those that come in, where the side is lit too', () => {
    const played = playSolid(bare(point(1, 8), 'auto'), 20_000);
    expect(cameIn(played)).toBeGreaterThan(1.5 * figureOf(played, 'incident').mean);
  });

  it('are all of a narrow beam and of an embedded source', () => {
    expect(figureOf(playSolid(bare(beam(2, 30), 'auto'), 1000), 'incident').mean).toBe(1);
    expect(figureOf(playSolid(bare(embedded('l0'), 'auto'), 1000), 'incident').mean).toBe(1);
    expect(
      figureOf(playSolid(bare({ kind: 'diffuse', law: 'isotropic' }, 'auto'), 1000), 'incident').mean,
    ).toBe(1);
  });

  it('are the share of a wide beam that falls on the face', () => {
    const played = playSolid(bare(beam(4 * CRYSTAL.radiusCm), 'auto'), 40_000);
    expectNear('incident', figureOf(played, 'incident'), 0.25);
  });
});

describe('The total efficiency of a bare 3 inch NaI cylinder', () => {
  const nai = resolveMaterial('NaI');
  const perCmAt = (energyKeV: number) => {
    const { photoelectric, incoherent } = materialCoefficients(nai, energyKeV);
    return {
      perCm: nai.densityGPerCm3 * (photoelectric + incoherent),
      share: incoherent / (photoelectric + incoherent),
    };
  };
  /** Share of free-electron scatterings that leave 1 keV at most: they do not count as interacting by themselves. */
  const silentShare = (energyKeV: number) => {
    const k = energyKeV / 510.998_95;
    // The photon keeps 1/(1 + 2 k v) of its energy.
    const last = Math.min(1, 1 / (2 * k * (energyKeV - 1)));
    const shape = (v: number) => kleinNishinaShape(energyKeV, v);
    return integrate(shape, 0, last, 50) / integrate(shape, 0, 1, 2000);
  };

  it.each([59.5, 122.1, 356, 661.7, 1332.5, 2614.5])(
    'at %d keV from 25 cm is the integral over its chords, for a pure absorber',
    (energyKeV) => {
      const { perCm } = perCmAt(energyKeV);
      const expected = onAxisEfficiency(CRYSTAL, 25, perCm);
      const given = { stack: [['NaI', THREE_INCH_CM, null, 'detector']], extent: radius(CRYSTAL.radiusCm), energyKeV, shape: point(25), seed: `chords ${energyKeV}` } as const; // prettier-ignore
      const biased = playAbsorber(given, perCm, 30_000);
      expectNear('interacting', figureOf(biased, 'interacting', 'l0'), expected);
      const analog = playAbsorber({ ...given, transport: 'analog' }, perCm, 100_000);
      expectNear('interacting, analog', figureOf(analog, 'interacting', 'l0'), expected);
    },
  );

  it.each([59.5, 122.1, 356, 661.7, 1332.5, 2614.5])(
    'at %d keV from 25 cm is the integral over its chords, less scatterings below 1 keV',
    (energyKeV) => {
      const { perCm, share } = perCmAt(energyKeV);
      const expected = onAxisEfficiency(CRYSTAL, 25, perCm);
      const played = playSolid(
        { stack: [['NaI', THREE_INCH_CM, null, 'detector']], extent: radius(CRYSTAL.radiusCm), energyKeV, shape: point(25), seed: `total ${energyKeV}` }, // prettier-ignore
        30_000,
      );
      const { mean, stdError } = figureOf(played, 'interacting', 'l0');
      // 2e-4 for the straight cells of the energy grid.
      const tolerance = SIGMAS * stdError + 2e-4 * expected;
      expect(mean).toBeLessThan(expected + tolerance);
      expect(mean).toBeGreaterThan(expected * (1 - share * silentShare(energyKeV)) - tolerance);
    },
  );

  it.each([
    [5, 2],
    [25, 12],
    [1, 10],
    [0.5, 3.81],
  ])('for a point %d cm away and %d cm off the axis is the integral over its chords', (distance, offset) => {
    const perCm = 0.3;
    const expected = offAxisEfficiency(CRYSTAL, distance, offset, perCm);
    const given = { stack: [['NaI', THREE_INCH_CM, null, 'detector']], extent: radius(CRYSTAL.radiusCm), energyKeV: 661.7, shape: point(distance, offset), seed: `off axis ${offset}` } as const; // prettier-ignore
    const played = playAbsorber(given, perCm, 60_000);
    // The quadrature jumps at the rim: good to 3e-4.
    expectNear('interacting', figureOf(played, 'interacting', 'l0'), expected, { slack: 3e-4 * expected });
  });

  it('has the cross sections in its integral that Klein and Nishina’s total stands for', () => {
    // ∫ shape dv · π r² · 2 is the closed form (Evans 1955): the two functions the band above rests on agree.
    const k = integrate((v) => kleinNishinaShape(661.7, v), 0, 1, 2000);
    expect(
      Math.abs((2 * Math.PI * 2.8179403262e-13 ** 2 * k) / kleinNishinaTotalCm2(661.7) - 1),
    ).toBeLessThan(1e-9);
  });
});

describe('A source spread through a wide pure absorber', () => {
  it.each([0.1, 1, 5, 30])(
    'of %d mean free paths gets out by each face with the share (1/2 − E₃(τ))/(2 τ)',
    (tau) => {
      // (1/2τ) ∫₀^τ E₂(x) dx and dE₃/dx = −E₂ (Abramowitz and Stegun 5.1.26). The edge is 10⁴ mean free paths away.
      const expected = (0.5 - exponentialIntegral(3, tau)) / (2 * tau);
      for (const transport of ['auto', 'analog'] as const) {
        const given = { stack: [['water', tau]], extent: radius(1e4), energyKeV: 100, shape: embedded('l0'), seed: `self ${tau}`, transport } as const; // prettier-ignore
        const played = playAbsorber(given, 1, 60_000);
        expectNear(`uncollided, ${transport}`, figureOf(played, 'uncollided'), expected);
        expectNear(`reflected, ${transport}`, figureOf(played, 'reflected'), expected);
        expectNear('absorbed', figureOf(played, 'interacting', 'l0'), 1 - 2 * expected);
      }
    },
  );

  it('of any shape gets out with the share S/(4 μ V) when it is thick', () => {
    // Reciprocity: P = (1 − ⟨exp(−μ l)⟩)/(μ ⟨l⟩) over chords of mean ⟨l⟩ = 4 V/S (Dirac 1943). From a corner or a
    // curved side come short chords: a share of about 1/(μ a)².
    const [thick, wide, high] = [3, 4, 5];
    const perCm = 60;
    const surface = 2 * (thick * wide + thick * high + wide * high);
    const expected = surface / (4 * perCm * thick * wide * high);
    const played = playAbsorber(
      { stack: [['water', thick]], extent: { kind: 'rectangle', widthCm: wide, heightCm: high }, energyKeV: 100, shape: embedded('l0'), seed: 'box' }, // prettier-ignore
      perCm,
      200_000,
    );
    const out = figureOf(played, 'interacting', 'l0');
    expectNear('share out', { mean: 1 - out.mean, stdError: out.stdError }, expected, {
      slack: 0.01 * expected,
    });
  });
});

describe('A stack whose edge is 10⁴ mean free paths away', () => {
  const cases: { title: string; given: SolidCase; perCm: number }[] = [
    { title: 'NaI, a point', given: { stack: [['NaI', 2, null, 'detector']], energyKeV: 661.7, shape: point(1), seed: 'wide-1', physics: ALL }, perCm: 0.28 }, // prettier-ignore
    { title: 'water, a slanting beam', given: { stack: [['water', 10]], energyKeV: 1000, shape: beam(0, 40), seed: 'wide-2', physics: ALL }, perCm: 0.07 }, // prettier-ignore
    { title: 'three layers, a diffuse field', given: { stack: [['aluminium', 1], [null, 3], ['lead', 0.3, null, 'detector']], energyKeV: 150, shape: { kind: 'diffuse', law: 'isotropic' }, seed: 'wide-3', physics: ALL }, perCm: 0.37 }, // prettier-ignore
    { title: 'lead, an embedded source, pairs', given: { stack: [['lead', 1, null, 'detector'], ['iron', 1]], energyKeV: 4000, shape: embedded('l0'), seed: 'wide-4', physics: ALL }, perCm: 0.3 }, // prettier-ignore
  ];
  const groups = (energyKeV: number) =>
    [0, 0.1, 0.3, 0.5, 0.7, 0.9, 0.999, 1.05].map((part) => part * energyKeV);

  it.each(cases)('gives the figures and spectra of an endless one: $title', ({ given, perCm }) => {
    const edgesKeV = groups(given.energyKeV);
    const endless = playSolid({ ...given, edgesKeV, transport: 'analog' }, 60_000);
    expect(compile(endless.setup).kernel).toBe('slab');
    for (const transport of ['auto', 'analog'] as const) {
      const wide = playSolid({ ...given, edgesKeV, transport, extent: radius(1e4 / perCm) }, 60_000);
      expect(compile(wide.setup).kernel).toBe('solid');
      for (const { quantity, layer, mean, stdError } of endless.totals) {
        if (mean === null) continue;
        // What leaves within 10^-4 of level flight may come to the edge.
        const slack = 2e-4 * mean;
        expectNear(`${quantity} of ${layer}, ${transport}`, figureOf(wide, quantity, layer), mean, { expectedError: stdError ?? 0, slack }); // prettier-ignore
      }
      for (const spectrum of endless.spectra) {
        const other = spectrumOf(wide, spectrum.tally, spectrum.layer);
        spectrum.mean.forEach((mean, bin) => {
          // Bins with fewer than 100 counts have no normal law.
          if (!(mean > 10 * spectrum.stdError[bin])) return;
          expectNear(`${spectrum.tally} of ${spectrum.layer} from ${spectrum.energyLowKeV[bin]} keV, ${transport}`, { mean: other.mean[bin], stdError: other.stdError[bin] }, mean, { expectedError: spectrum.stdError[bin], slack: 2e-4 * mean }); // prettier-ignore
        });
      }
    }
  });
});
