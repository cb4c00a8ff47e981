/**
 * The samplers of angles and energies against their laws with ten million samples each: what is left of the error of
 * their tables. Distances of cumulatives may exceed the noise of the samples by 5·10⁻⁴, the accuracy aimed at.
 */
import { describe, expect, it } from 'vitest';
import { compile } from '../../engine/compile.js';
import { sampleCoherent } from '../../engine/physics/coherent.js';
import { sampleDoppler } from '../../engine/physics/doppler.js';
import { sampleIncoherent } from '../../engine/physics/incoherent.js';
import { nextUniform, seedStream } from '../../engine/random.js';
import { elementOf, resolveMaterial } from '../../materials/index.js';
import { fullWidth, scatteredSpectrum } from '../engine/doppler-law.js';
import { KS_LIMIT, ksOfBins } from '../engine/goodness.js';
import {
  ANGLE_BINS,
  binOfAngle,
  boundIncoherentLaw,
  coherentLaw,
  cumulativeOverAngle,
  freeElectron,
} from '../engine/scattering-laws.js';
import { ALL, PLAIN, slabSetup } from '../engine/slab-run.js';
import { effort } from './effort.js';

const SAMPLES = effort(10_000_000);
const TABLE_ERROR = 5e-4;
/** Distances times √n that pass. */
const LIMIT = KS_LIMIT + TABLE_ERROR * Math.sqrt(SAMPLES);

const NAMES = ['carbon', 'aluminium', 'copper', 'iodine', 'lead', 'NaI', 'water'];
const stack = NAMES.map((name) => [resolveMaterial(name, 1), 1] as const);
const problem = compile(slabSetup({ stack, energyKeV: 20_000, physics: ALL, seed: '' }, 1));
const free = compile(slabSetup({ stack, energyKeV: 20_000, physics: PLAIN, seed: '' }, 1));
const constituentsOf = (name: string) => resolveMaterial(name, 1).constituents;

function counts(seed: string, bins: number, bin: (random: Float64Array) => number): Float64Array {
  const random = new Float64Array(4);
  seedStream(random, seed, 1);
  const result = new Float64Array(bins);
  for (let i = 0; i < SAMPLES; i++) result[bin(random)]++;
  return result;
}

const ENERGIES = [1.5, 7, 45, 300, 3000, 19_000];
const CASES = NAMES.flatMap((name) => ENERGIES.map((energyKeV) => ({ name, energyKeV })));

describe('with ten million samples', () => {
  it.each(ENERGIES)('free electrons at %d keV scatter by Klein and Nishina', (energyKeV) => {
    const got = counts('free', ANGLE_BINS, (random) =>
      binOfAngle(sampleIncoherent(free.incoherent, 0, energyKeV, nextUniform(random))),
    );
    expect(
      ksOfBins(
        got,
        cumulativeOverAngle((v) => freeElectron(energyKeV, v)),
      ),
    ).toBeLessThan(LIMIT);
  });

  it.each(CASES)(
    'bound electrons of $name at $energyKeV keV scatter by Klein–Nishina × S',
    ({ name, energyKeV }) => {
      const base = problem.incoherentBase[problem.slotOfLayer[NAMES.indexOf(name)]];
      const got = counts(`bound ${name}`, ANGLE_BINS, (random) =>
        binOfAngle(sampleIncoherent(problem.incoherent, base, energyKeV, nextUniform(random))),
      );
      expect(ksOfBins(got, boundIncoherentLaw(constituentsOf(name), energyKeV))).toBeLessThan(LIMIT);
    },
  );

  it.each(CASES.filter(({ energyKeV }) => energyKeV < 1000))(
    'atoms of $name at $energyKeV keV scatter coherently by F²',
    ({ name, energyKeV }) => {
      const base = problem.coherentBase[problem.slotOfLayer[NAMES.indexOf(name)]];
      const got = counts(`coherent ${name}`, ANGLE_BINS, (random) =>
        binOfAngle(sampleCoherent(problem.coherent, base, energyKeV, random)),
      );
      expect(ksOfBins(got, coherentLaw(constituentsOf(name), energyKeV))).toBeLessThan(LIMIT);
    },
  );

  it.each([
    { z: 14, energyKeV: 60 },
    { z: 14, energyKeV: 122 },
    { z: 32, energyKeV: 60 },
    { z: 32, energyKeV: 122 },
  ])(
    'moving electrons of Z = $z at $energyKeV keV spread the energy at 90° as the profiles have it',
    (given) => {
      const { z, energyKeV } = given;
      const material = resolveMaterial(elementOf(z).symbol, 1);
      const moving = compile(slabSetup({ stack: [[material, 1]], energyKeV, physics: ALL, seed: '' }, 1));
      const [first, shells] = [moving.dopplerBase[0], moving.dopplerCount[0]];
      const bins = Math.round(energyKeV / 0.02);
      const got = counts(`doppler ${z}`, bins, (random) => {
        const e = sampleDoppler(moving.doppler, first, shells, energyKeV, 0.5, random);
        return Math.min(bins - 1, Math.floor((e / energyKeV) * bins));
      });
      const range = { lowKeV: 0, highKeV: energyKeV, bins };
      let sum = 0;
      const profile = scatteredSpectrum('profile', z, energyKeV, 0, range).map((share) => (sum += share));
      expect(ksOfBins(got, profile)).toBeLessThan(LIMIT);
      const expected = fullWidth(scatteredSpectrum('full', z, energyKeV, 0, range), 0.02);
      const width = fullWidth(got, 0.02);
      // Noise of the crossings of half the height: 0.4 % with ten million samples
      const allowed = 0.015 * Math.max(1, Math.sqrt(2_000_000 / SAMPLES) * 2);
      console.log(
        `Z = ${z}, ${energyKeV} keV: FWHM ${width.toFixed(4)} keV, quadrature ${expected.toFixed(4)} keV`,
      );
      expect(Math.abs(width / expected - 1)).toBeLessThan(allowed);
    },
  );
});
