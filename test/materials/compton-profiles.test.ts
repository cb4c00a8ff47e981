import { describe, expect, it } from 'vitest';
import { comptonProfiles } from '../../materials/compton-profiles.js';
import { publishedRows } from '../published/csv.js';

const ALL_Z = Array.from({ length: 100 }, (_, i) => i + 1);

describe('Compton profiles', () => {
  it.each(ALL_Z)(
    'of Z = %i integrate to 1 in every shell and hold Z electrons bound ever more loosely',
    (z) => {
      const { pz, shells } = comptonProfiles(z);
      expect(shells.reduce((sum, { electrons }) => sum + electrons, 0)).toBeCloseTo(z, 10);
      for (const { name, j, bindingKeV } of shells) {
        let area = 0;
        for (let i = 1; i < pz.length; i++) area += (j[i] + j[i - 1]) * (pz[i] - pz[i - 1]);
        expect(Math.abs(area - 1), name).toBeLessThan(2e-3);
        expect(bindingKeV, name).toBeGreaterThan(0);
        expect(bindingKeV, name).toBeLessThanOrEqual(shells[0].bindingKeV);
        // Shoulders of s shells are flat; the printed tables have two to three digits.
        for (let i = 1; i < pz.length; i++) expect(j[i], `${name} at ${pz[i]}`).toBeLessThan(j[i - 1] * 1.03);
      }
    },
  );

  it('of hydrogen is that of the exact 1s electron within 0.5 % of its peak', () => {
    const { pz, shells } = comptonProfiles(1);
    pz.forEach((p, i) => {
      const exact = (8 / (3 * Math.PI)) * (1 + p * p) ** -3; // closed form of the hydrogen atom
      expect(Math.abs(shells[0].j[i] - exact)).toBeLessThan(0.005 * 0.849);
    });
  });

  it.each(
    publishedRows('compton-profiles').map(
      (row) => [Number(row.z), Number(row.pz_atomic_units), row] as const,
    ),
  )('of Z = %i add up at pz = %f to the published profile of the atom', (z, p, row) => {
    const { pz, shells } = comptonProfiles(z);
    const at = pz.findIndex((value) => Math.abs(value - p) < 1e-9);
    const total = shells.reduce((sum, { electrons, j }) => sum + electrons * j[at], 0);
    // Printed with two digits at pz = 10, with three before.
    expect(Math.abs(total / Number(row.total_profile) - 1)).toBeLessThan(p < 10 ? 0.01 : 0.03);
  });

  it('of europium L2 is free of the packaged misprint at pz = 30', () => {
    const { pz, shells } = comptonProfiles(63);
    const { j } = shells.find(({ name }) => name === 'L2')!;
    expect(j[pz.indexOf(30)]).toBeLessThan(j[pz.indexOf(20)]);
  });

  it('are refused for an element that does not exist', () => {
    expect(() => comptonProfiles(101)).toThrow(/atomic number/);
  });
});
