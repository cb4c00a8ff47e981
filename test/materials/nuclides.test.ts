import { describe, expect, it } from 'vitest';
import {
  findNuclide,
  nearestNuclideName,
  nuclideLines,
  nuclides,
  type Nuclide,
} from '../../materials/nuclides.js';
import { publishedRows } from '../published/csv.js';

const DAY_S = 86_400;
const YEAR_S = 365.2422 * DAY_S;
const sum = (nuclide: Nuclide) => nuclide.lines.reduce((total, { perDecay }) => total + perDecay, 0);

describe('nuclides', () => {
  it.each(publishedRows('nuclide-lines').map((row) => [row.nuclide, Number(row.energy_keV), row] as const))(
    '%s emits %f keV as often as its evaluation says',
    (name, energyKeV, row) => {
      const line = findNuclide(name)!.lines.find((candidate) => candidate.energyKeV === energyKeV)!;
      expect(line.perDecay).toBeCloseTo(Number(row.photons_per_100_decays) / 100, 10);
      expect(line.source).toBe(row.source);
    },
  );

  it.each(
    publishedRows('nuclide-lines-quoted').map((row) => [row.nuclide, Number(row.energy_keV), row] as const),
  )('%s emits %f keV as often as it is widely quoted to', (name, energyKeV, row) => {
    const near = findNuclide(name)!.lines.filter((line) => Math.abs(line.energyKeV - energyKeV) < 0.1);
    expect(near).toHaveLength(1);
    const found = 100 * near[0].perDecay;
    expect(Math.abs(found / Number(row.photons_per_100_decays) - 1)).toBeLessThan(
      Number(row.relative_tolerance),
    );
  });

  it.each([
    ['Cs-137', 30.05 * YEAR_S], // DDEP, value from memory
    ['Co-60', 5.271 * YEAR_S], // DDEP, value from memory
    ['Ir-192', 73.83 * DAY_S], // DDEP, value from memory
    ['I-131', 8.02 * DAY_S], // DDEP, value from memory
    ['Tc-99m', 6.007 * 3600], // DDEP, value from memory
    ['F-18', 109.77 * 60], // DDEP, value from memory
    ['Th-232+', 1.402e10 * YEAR_S], // DDEP, value from memory
    ['U-238', 4.468e9 * YEAR_S], // DDEP, value from memory
  ])('%s has the published half-life within 0.3 %%', (name, seconds) => {
    expect(Math.abs(findNuclide(name)!.halfLifeS / seconds - 1)).toBeLessThan(3e-3);
  });

  it.each([
    [
      'Th-232+',
      {
        'Th-232': 1,
        'Ra-228': 1,
        'Ac-228': 1,
        'Th-228': 1,
        'Ra-224': 1,
        'Rn-220': 1,
        'Pb-212': 1,
        'Bi-212': 1,
        'Tl-208': 0.3593,
      },
    ],
    ['U-238+', { 'U-238': 1, 'Th-234': 1, 'Pa-234m': 1, 'Ra-226+': 1 }],
    ['Ba-140+', { 'Ba-140': 1, 'La-140': 1.1516 }],
    ['U-nat', { 'U-238': 1, 'Th-234': 1, 'Pa-234m': 1, 'U-235': 0.04606, 'Th-231': 0.04606 }],
  ] as const)('%s emits the photons of its members, each as often as it decays', (name, members) => {
    const chain = findNuclide(name)!;
    const expected = Object.entries(members).reduce(
      (total, [member, perDecay]) => total + perDecay * sum(findNuclide(member)!),
      0,
    );
    // Transient factors and abundance ratios are given to four digits here.
    expect(sum(chain) / expected).toBeCloseTo(1, 4);
    expect(chain.evaluations).toHaveLength(Object.keys(members).length);
    expect(chain.note).not.toBeNull();
  });

  it('in the chain of radium emit what lead-214 and bismuth-214 emit', () => {
    const chain = findNuclide('Ra-226+')!;
    for (const [member, energyKeV] of [
      ['Pb-214', 351.932],
      ['Bi-214', 609.312],
      ['Bi-214', 1764.494],
    ] as const) {
      const alone = findNuclide(member)!.lines.find((line) => Math.abs(line.energyKeV - energyKeV) < 0.01)!;
      const inChain = chain.lines.find((line) => Math.abs(line.energyKeV - energyKeV) < 0.01)!;
      expect(Math.abs(inChain.perDecay / alone.perDecay - 1)).toBeLessThan(0.005);
    }
  });

  it('are all sound: positive half-lives, lines in order, a source for each', () => {
    expect(nuclides().length).toBeGreaterThanOrEqual(96);
    for (const { name, halfLifeS, lines, evaluations } of nuclides()) {
      expect(halfLifeS, name).toBeGreaterThan(0);
      expect(evaluations.length, name).toBeGreaterThan(0);
      lines.forEach((line, i) => {
        expect(line.perDecay, name).toBeGreaterThan(0);
        expect(line.energyKeV, name).toBeGreaterThan(5);
        expect(line.source, name).toMatch(/^DDEP evaluation, .* - \d{4}$/);
        if (i > 0) expect(line.energyKeV, name).toBeGreaterThanOrEqual(lines[i - 1].energyKeV);
        if (line.kind === 'annihilation') expect(line.energyKeV).toBe(511);
      });
    }
  });

  it.each(
    (
      'Am-241 Ba-133 Cd-109 Ce-139 Co-57 Co-60 Cs-134 Cs-137 Eu-152 Eu-154 F-18 I-123 I-125 I-131 In-111 Ir-192 K-40 ' +
      'Lu-177 Mn-54 Mo-99/Tc-99m Na-22 Na-24 Ra-226+ Se-75 Sr-85 Th-232+ Tl-201 U-238+ Xe-133 Y-88 Zn-65 Zr-95'
    ).split(' '),
  )('%s is known', (name) => {
    expect(findNuclide(name)!.lines.length).toBeGreaterThan(0);
  });
});

describe('names of nuclides', () => {
  it.each([
    ['cs137', 'Cs-137'],
    ['137Cs', 'Cs-137'],
    ['CS 137', 'Cs-137'],
    ['137-cs', 'Cs-137'],
    ['caesium-137', 'Cs-137'],
    ['Cobalt 60', 'Co-60'],
    ['99mTc', 'Tc-99m'],
    ['tc99m', 'Tc-99m'],
    ['99m-Tc', 'Tc-99m'],
    ['54mn', 'Mn-54'],
    ['110mag', 'Ag-110m'],
    ['ra226+', 'Ra-226+'],
    ['Ra-226+progeny', 'Ra-226+'],
    ['232Th+', 'Th-232+'],
    ['Mo-99/Tc-99m', 'Mo-99'],
    ['natural uranium', 'U-nat'],
  ])('%s means %s', (written, name) => {
    expect(findNuclide(written)?.name).toBe(name);
  });

  it('of every nuclide and alias lead back to it', () => {
    for (const nuclide of nuclides()) {
      for (const name of [nuclide.name, ...nuclide.aliases]) expect(findNuclide(name)).toBe(nuclide);
    }
  });

  it.each([
    ['Cs-139', 'Cs-137'],
    ['Co-61', 'Co-60'],
    ['Cs-173', 'Cs-137'],
    ['Xb-137', undefined],
    ['lead', undefined],
  ])('%s is unknown and brings %s to mind', (written, name) => {
    expect(findNuclide(written)).toBeUndefined();
    if (name !== undefined) expect(nearestNuclideName(written)).toBe(name);
  });
});

describe('lines of a nuclide', () => {
  it('can be trimmed by yield and by energy', () => {
    const eu152 = findNuclide('Eu-152')!;
    const trimmed = nuclideLines(eu152, { minimumYield: 0.1, minimumEnergyKeV: 100 });
    expect(trimmed.map(({ energyKeV }) => Math.round(energyKeV))).toEqual(
      [122, 344, 779, 964, 1112, 1086, 1408].sort((a, b) => a - b),
    );
    expect(nuclideLines(eu152)).toHaveLength(eu152.lines.length);
  });
});
