import { describe, expect, it } from 'vitest';
import { compile } from '../../engine/compile.js';
import { lineEnergyKeV, makeEmissionTable, pickLine, topEnergyKeV } from '../../engine/emission.js';
import { seedStream } from '../../engine/random.js';
import type { Emission } from '../../engine/setup.js';
import { expectNear, KS_LIMIT, ksOfSamples } from './goodness.js';
import { ALL, figureOf, playSetup, playSlab, slabSetup, spectrumOf } from './slab-run.js';

function emissionOf(given: Partial<Emission>): Emission {
  return { lines: [], continuum: [], photonsPerDecay: null, nuclide: null, ...given };
}

function draws(table: ReturnType<typeof makeEmissionTable>, count: number) {
  const random = new Float64Array(4);
  seedStream(random, 'emission', 0);
  return Array.from({ length: count }, () => {
    const line = pickLine(table, random);
    return { line, energyKeV: lineEnergyKeV(table, line, random) };
  });
}

describe('a source', () => {
  it('emits its lines by their weights, and those of weight 0 never', () => {
    const weights = [0.85, 0, 0.1, 2.3, 0];
    const lines = weights.map((perDecay, i) => ({ energyKeV: 100 * (i + 1), perDecay }));
    const table = makeEmissionTable(emissionOf({ lines }));
    expect(topEnergyKeV(table)).toBe(500);
    const count = 200_000;
    const got = draws(table, count);
    const total = weights.reduce((sum, weight) => sum + weight, 0);
    weights.forEach((weight, line) => {
      const p = weight / total;
      const seen = got.filter((one) => one.line === line);
      expect(seen.every(({ energyKeV }) => energyKeV === lines[line].energyKeV)).toBe(true);
      expectNear(
        `line ${line}`,
        { mean: seen.length / count, stdError: Math.sqrt((p * (1 - p)) / count) },
        p,
      );
    });
  });

  it('emits a continuum evenly within its bins, and nothing between them', () => {
    const continuum = [
      { energyLowKeV: 10, energyHighKeV: 20, relativePhotons: 3 },
      { energyLowKeV: 20, energyHighKeV: 50, relativePhotons: 1 },
      { energyLowKeV: 80, energyHighKeV: 81, relativePhotons: 4 },
    ];
    const table = makeEmissionTable(emissionOf({ continuum }));
    const energies = Float64Array.from(draws(table, 200_000), ({ energyKeV }) => energyKeV);
    const cumulative = (energyKeV: number) =>
      continuum.reduce((sum, { energyLowKeV, energyHighKeV, relativePhotons }) => {
        const part = (energyKeV - energyLowKeV) / (energyHighKeV - energyLowKeV);
        return sum + (relativePhotons / 8) * Math.max(0, Math.min(1, part));
      }, 0);
    expect(ksOfSamples(energies, cumulative)).toBeLessThan(KS_LIMIT);
  });

  it('of several lines has its full-energy figures by line, and their sum', () => {
    const energyKeV = [60, 200, 662];
    const stack = [['NaI', 2, 'detector']] as const;
    const played = playSlab({ stack, energyKeV, physics: ALL, seed: 'by line' }, 60_000);
    const rows = played.totals.filter(({ quantity }) => quantity === 'full_energy');
    expect(rows.map(({ lineKeV }) => lineKeV)).toEqual([...energyKeV, null]);
    const sum = rows.slice(0, 3).reduce((all, row) => all + row.mean!, 0);
    expect(rows[3].mean).toBeCloseTo(sum, 12);
    energyKeV.forEach((line, i) => {
      const alone = figureOf(
        playSlab({ stack, energyKeV: line, physics: ALL, seed: 'alone' }, 20_000),
        'full_energy',
        'l0',
      );
      expectNear(`${line} keV`, { mean: 3 * rows[i].mean!, stdError: 3 * rows[i].stdError! }, alone.mean, {
        expectedError: alone.stdError,
      });
    });
  });
});

describe('spectra', () => {
  it('on uneven bins are the sums of those on even ones, photon by photon', () => {
    const stack = [['aluminium', 1], ['NaI', 1, 'detector']] as const; // prettier-ignore
    const setup = slabSetup({ stack, energyKeV: 662, physics: ALL, seed: 'bins' }, 20_000);
    const edges = [0, 1, 2, 5, 17, 18, 100, 184, 477, 478, 600, 661, 662, 663];
    const uneven = { ...setup, tally: { ...setup.tally, energyEdgesKeV: Float64Array.from(edges) } };
    const [fine, coarse] = [setup, uneven].map((given) => playSetup(given, compile(given)));
    for (const [tally, layer] of [
      ['transmitted', null],
      ['reflected', null],
      ['pulse_height', 'l1'],
    ] as const) {
      // prettier-ignore
      const [a, b] = [fine, coarse].map((played) => spectrumOf(played, tally, layer).mean);
      b.forEach((share, bin) => {
        const sum = a.subarray(edges[bin], edges[bin + 1]).reduce((all, value) => all + value, 0);
        expect(share, `${tally} from ${edges[bin]} keV`).toBeCloseTo(sum, 12);
      });
    }
  });
});
