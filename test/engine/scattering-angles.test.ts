import { describe, expect, it } from 'vitest';
import { compile } from '../../engine/compile.js';
import { sampleCoherent } from '../../engine/physics/coherent.js';
import { sampleIncoherent } from '../../engine/physics/incoherent.js';
import { nextUniform, seedStream } from '../../engine/random.js';
import { elementCoefficients, elementOf, resolveMaterial } from '../../materials/index.js';
import { integrate, KS_LIMIT, ksOfBins } from './goodness.js';
import {
  ANGLE_BINS,
  binOfAngle,
  boundElectrons,
  boundIncoherentLaw,
  coherentLaw,
  cumulativeOverAngle,
  freeElectron,
} from './scattering-laws.js';
import { ALL, PLAIN, slabSetup } from './slab-run.js';

const NAMES = ['carbon', 'aluminium', 'copper', 'iodine', 'lead', 'NaI', 'water'];
const ENERGIES = [5, 20, 60, 200, 1000];
const SAMPLES = 200_000;
const CASES = NAMES.flatMap((name) => ENERGIES.map((energyKeV) => ({ name, energyKeV })));

const stack = NAMES.map((name) => [resolveMaterial(name, 1), 1] as const);
const problem = compile(slabSetup({ stack, energyKeV: 1000, physics: ALL, seed: '' }, 1));
const slotOf = (name: string) => problem.slotOfLayer[NAMES.indexOf(name)];
const constituentsOf = (name: string) => resolveMaterial(name, 1).constituents;

function angleCounts(seed: string, sample: (random: Float64Array) => number): Float64Array {
  const random = new Float64Array(4);
  seedStream(random, seed, 0);
  const counts = new Float64Array(ANGLE_BINS);
  for (let i = 0; i < SAMPLES; i++) counts[binOfAngle(sample(random))]++;
  return counts;
}

// Hubbell et al., J. Phys. Chem. Ref. Data 4 (1975) 471: the laws of both processes with F(x, Z) and S(x, Z)
describe('coherent scattering', () => {
  it.each(CASES)(
    'in $name at $energyKeV keV has the angles of F² times Thomson’s law',
    ({ name, energyKeV }) => {
      const base = problem.coherentBase[slotOf(name)];
      const counts = angleCounts(`coherent ${name} ${energyKeV}`, (random) =>
        sampleCoherent(problem.coherent, base, energyKeV, random),
      );
      expect(ksOfBins(counts, coherentLaw(constituentsOf(name), energyKeV))).toBeLessThan(KS_LIMIT);
    },
  );

  it('stays within its range at both ends of the energies', () => {
    const random = new Float64Array(4);
    seedStream(random, 'ends', 0);
    for (const energyKeV of [1, 1000]) {
      for (let i = 0; i < 20_000; i++) {
        const v = sampleCoherent(problem.coherent, problem.coherentBase[slotOf('lead')], energyKeV, random);
        if (!(v >= 0 && v <= 1)) expect.fail(`v = ${v} at ${energyKeV} keV`);
      }
    }
    expect(problem.coherent.every((value) => Number.isFinite(value))).toBe(true);
  });
});

describe('bound incoherent scattering', () => {
  it.each(CASES)('in $name at $energyKeV keV has the angles of Klein–Nishina × S', ({ name, energyKeV }) => {
    const base = problem.incoherentBase[slotOf(name)];
    const counts = angleCounts(`incoherent ${name} ${energyKeV}`, (random) =>
      sampleIncoherent(problem.incoherent, base, energyKeV, nextUniform(random)),
    );
    const law = boundIncoherentLaw(constituentsOf(name), energyKeV);
    expect(ksOfBins(counts, law)).toBeLessThan(KS_LIMIT);
  });

  it('switched off has the angles of free electrons in every material', () => {
    const physics = { ...PLAIN, coherent: true };
    const free = compile(slabSetup({ stack, energyKeV: 1000, physics, seed: '' }, 1));
    const law = cumulativeOverAngle((v) => freeElectron(20, v));
    for (const name of NAMES) {
      const base = free.incoherentBase[free.slotOfLayer[NAMES.indexOf(name)]];
      const counts = angleCounts(`free ${name}`, (random) =>
        sampleIncoherent(free.incoherent, base, 20, nextUniform(random)),
      );
      expect(ksOfBins(counts, law), name).toBeLessThan(KS_LIMIT);
    }
    const base = problem.incoherentBase[slotOf('lead')];
    const bound = angleCounts('bound', (random) =>
      sampleIncoherent(problem.incoherent, base, 20, nextUniform(random)),
    );
    expect(ksOfBins(bound, law), 'bound electrons of lead').toBeGreaterThan(10 * KS_LIMIT);
  });

  // The total stays the tabulated one (XCOM), whose makers took S(x, Z) from the same source. Technetium and plutonium
  // have other atomic weights there (99 and 239), einsteinium and fermium miss the limit by some tenths of a per cent.
  it.each([1, 5, 20, 100, 500, 2000, 20_000])(
    'at %d keV has an integral within 1.5 %% of the total',
    (energyKeV) => {
      const radiusSquaredBarn = 0.07940788; // classical electron radius squared, CODATA 2018
      for (let z = 1; z <= 98; z++) {
        if (z === 43 || z === 94) continue;
        const law = (q: number) => boundElectrons(z, energyKeV, q ** 4) * 4 * q ** 3;
        const barn = 2 * Math.PI * radiusSquaredBarn * integrate(law, 0, 1, 200);
        const total =
          (elementCoefficients(z, energyKeV).incoherent * elementOf(z).atomicWeight) / 0.602214076;
        expect(Math.abs(barn / total - 1), `Z = ${z}: ${barn} b, tabulated ${total} b`).toBeLessThan(0.015);
      }
    },
  );
});
