/** Deep transport gives what analog transport gives: the same means, whatever steers it. */
import { describe, expect, it } from 'vitest';
import { playDeep, type DeepCase, type DeepPlayed } from './deep-run.js';
import { ALL, PLAIN } from './slab-run.js';
import type { Spectrum } from '../../engine/result.js';

const ANALOG_HISTORIES = 80_000;
const DEEP_HISTORIES = 30_000;
/**
 * Combined standard errors allowed between two figures: a false alarm in 6.3e-5 of comparisons (normal law), 4 % in the
 * 600 or so made here, once for these seeds.
 */
const SIGMAS = 4;
/** Analog photons a group of the spectrum must hold for its error to be normal. */
const LEAST_COUNT = 40;

type NamedCase = Omit<DeepCase, 'seed'> & { readonly what: string };

const NAMED: readonly NamedCase[] = [
  { what: 'lead, a beam of 1.25 MeV', stack: [['lead', 2]], energyKeV: 1250 },
  { what: 'lead, 100 keV above its K edge', stack: [['lead', 0.05]], energyKeV: 100 },
  { what: 'lead, 6 MeV with pairs', stack: [['lead', 2.5]], energyKeV: 6000 },
  { what: 'tungsten, 10 MeV with much bremsstrahlung', stack: [['tungsten', 0.8]], energyKeV: 10_000 },
  { what: 'iodide of sodium just above the K edge of iodine', stack: [['NaI', 0.08]], energyKeV: 40 },
  {
    what: 'water, isotropic light on its face',
    stack: [['water', 15]],
    energyKeV: 661.7,
    shape: { kind: 'diffuse', law: 'isotropic' },
  },
  {
    what: 'water, photons even in solid angle',
    stack: [['water', 8]],
    energyKeV: 80,
    shape: { kind: 'diffuse', law: 'uniform_solid_angle' },
  },
  {
    what: 'aluminium, a point source',
    stack: [['aluminium', 1.5]],
    energyKeV: 60,
    shape: { kind: 'point', distanceCm: 10, offsetCm: 3 },
  },
  {
    what: 'concrete, a disc source of two lines',
    stack: [['concrete', 12]],
    energyKeV: [200, 1332],
    shape: { kind: 'disc', distanceCm: 50, radiusCm: 20 },
  },
  {
    what: 'a slanted beam on water',
    stack: [['water', 6]],
    energyKeV: [100, 1000],
    shape: { kind: 'beam', angleDeg: 50, diameterCm: 2 },
  },
  {
    what: 'layers with a gap',
    stack: [
      ['concrete', 8],
      [null, 5],
      ['lead', 1],
    ],
    energyKeV: 2500,
  },
  {
    what: 'a source inside, between aluminium',
    stack: [
      ['aluminium', 1],
      ['water', 10],
      ['aluminium', 1],
    ],
    energyKeV: 300,
    shape: { kind: 'embedded', layer: 'l1' },
  },
  { what: 'free electrons alone in iron', stack: [['iron', 3]], energyKeV: 500, physics: PLAIN },
  {
    what: 'binding and coherent scattering without broadening in copper',
    stack: [['copper', 0.3]],
    energyKeV: 60,
    physics: { ...ALL, doppler: false, fluorescence: false, bremsstrahlung: false },
    bins: 40,
  },
  {
    what: 'tin with a cutoff of 10 keV and no coherent scattering',
    stack: [['tin', 0.1]],
    energyKeV: 80,
    physics: { ...ALL, coherent: false, cutoffKeV: 10 },
  },
];
const CASES = NAMED.map((given) => ({ ...given, seed: `deep-analog ${given.what}` }));

/** Fails where two estimates of one number lie too far apart. */
function expectSame(
  what: string,
  a: { mean: number; stdError: number },
  b: { mean: number; stdError: number },
): void {
  const tolerance = SIGMAS * Math.hypot(a.stdError, b.stdError) + 1e-12 * Math.abs(b.mean);
  expect(
    Math.abs(a.mean - b.mean),
    `${what}: deep ${a.mean} ± ${a.stdError}, analog ${b.mean} ± ${b.stdError}`,
  ).toBeLessThanOrEqual(tolerance);
}

function compareTotals(deep: DeepPlayed, analog: DeepPlayed): number {
  let compared = 0;
  for (const row of analog.totals) {
    const other = deep.totals.find((r) => r.quantity === row.quantity && r.layer === row.layer);
    if (!other || row.mean === null || row.stdError === null || other.mean === null) continue;
    const { mean, stdError } = other;
    expectSame(
      `${row.quantity} ${row.layer}`,
      { mean, stdError: stdError ?? 0 },
      { mean: row.mean, stdError: row.stdError },
    );
    compared++;
  }
  return compared;
}

function compareSpectrum(deep: Spectrum, analog: Spectrum, perCount: number): number {
  let compared = 0;
  analog.mean.forEach((mean, bin) => {
    if (mean < LEAST_COUNT * perCount) return;
    expectSame(
      `${analog.tally} from ${analog.energyLowKeV[bin]} keV`,
      { mean: deep.mean[bin], stdError: deep.stdError[bin] },
      { mean, stdError: analog.stdError[bin] },
    );
    compared++;
  });
  return compared;
}

describe('deep and analog transport agree on every figure and every group of the spectra', () => {
  it.each(CASES)('for $what', (given) => {
    const analog = playDeep(given, ANALOG_HISTORIES, 'analog');
    const deep = playDeep(given, DEEP_HISTORIES);
    // Photons, energies, deposits, doses at both faces, their uncollided parts and ratios
    expect(compareTotals(deep, analog)).toBeGreaterThanOrEqual(10);
    const perCount = analog.problem.historyWeight / ANALOG_HISTORIES;
    const groups = ['transmitted', 'reflected'].map((tally) => {
      const [a, b] = [deep, analog].map(({ spectra }) => spectra.find((s) => s.tally === tally)!);
      return compareSpectrum(a, b, perCount);
    });
    expect(groups[0] + groups[1]).toBeGreaterThanOrEqual(5);
  });

  it.each(CASES)('and the energy of weighted histories is conserved on the mean, for $what', (given) => {
    const { sums, problem, histories } = playDeep({ ...given, seed: `${given.seed}/books` }, 10_000);
    const { gapFigure } = problem.tally.dose;
    const mean = sums.figureSum[gapFigure] / histories;
    const error = Math.sqrt((sums.figureSquare[gapFigure] / histories - mean ** 2) / (histories - 1));
    expect(Math.abs(mean), `${mean} ± ${error} keV`).toBeLessThanOrEqual(SIGMAS * error);
  });
});
