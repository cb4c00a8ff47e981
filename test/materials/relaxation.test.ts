import { describe, expect, it } from 'vitest';
import { absorptionEdges } from '../../materials/cross-sections.js';
import { fluorescenceYield, relaxation } from '../../materials/relaxation.js';
import { publishedRows } from '../published/csv.js';

const ALL_Z = Array.from({ length: 100 }, (_, i) => i + 1);
const shell = (z: number, index: number) => relaxation(z).shells[index];

/** Photon energy nearest to the given one among the transitions into K, and the energies seen. */
function nearestLine(z: number, index: number, energyKeV: number): number {
  const lines = shell(z, index).transitions.map(({ photonKeV }) => photonKeV);
  return lines.reduce((best, line) =>
    Math.abs(line - energyKeV) < Math.abs(best - energyKeV) ? line : best,
  );
}

describe('relaxation', () => {
  it.each(ALL_Z)('of Z = %i gives every shell transitions that add up to 1 and conserve energy', (z) => {
    const { shells } = relaxation(z);
    expect(shells[0].name).toBe('K');
    for (const { name, bindingKeV, transitions } of shells) {
      expect(
        transitions.reduce((sum, { probability }) => sum + probability, 0),
        name,
      ).toBeCloseTo(1, 12);
      for (const { probability, photonKeV, vacancyA, vacancyB } of transitions) {
        const held = [vacancyA, vacancyB].reduce(
          (sum, v) => sum + (v < 0 ? 0 : shells[v].bindingKeV),
          photonKeV,
        );
        expect(probability).toBeGreaterThan(0);
        expect(held, name).toBeLessThanOrEqual(bindingKeV * (1 + 1e-12));
        // A radiative transition to a followed shell shares out the binding energy exactly.
        if (photonKeV > 0 && vacancyA >= 0) expect(held).toBeCloseTo(bindingKeV, 9);
        if (photonKeV > 0) expect(vacancyB).toBe(-1);
      }
    }
  });

  it.each(ALL_Z)('of Z = %i binds K and L electrons exactly at the absorption edges', (z) => {
    const edges = absorptionEdges(z).filter(({ shell: name }) => ['K', 'L1', 'L2', 'L3'].includes(name));
    const bound = relaxation(z).shells.filter(({ bindingKeV }) => bindingKeV >= 1);
    expect(edges.length).toBe(bound.length);
    for (const { name, bindingKeV } of bound) {
      const edge = edges.find(({ shell: edgeShell }) => edgeShell === name)!;
      expect(Math.abs(edge.energyKeV / bindingKeV - 1), name).toBeLessThan(1e-9);
    }
  });

  it.each(publishedRows('k-shell').map((row) => [row.element, Number(row.Z), row] as const))(
    'of %s (Z = %i) agrees with the published K edge, lines, line shares and yield',
    (_, z, row) => {
      const { bindingKeV, transitions } = shell(z, 0);
      expect(Math.abs(bindingKeV - Number(row.K_edge_keV))).toBeLessThan(0.004);
      expect(Math.abs(nearestLine(z, 0, Number(row.Kalpha1_keV)) - Number(row.Kalpha1_keV))).toBeLessThan(
        0.005,
      );
      expect(Math.abs(nearestLine(z, 0, Number(row.Kalpha2_keV)) - Number(row.Kalpha2_keV))).toBeLessThan(
        0.005,
      );
      const radiative = transitions.filter(({ photonKeV }) => photonKeV > 0);
      const total = radiative.reduce((sum, { probability }) => sum + probability, 0);
      const alpha = radiative.filter(({ vacancyA }) => vacancyA > 0);
      const alphaShare = alpha.reduce((sum, { probability }) => sum + probability, 0) / total;
      expect(Math.abs(alphaShare - Number(row.Kalpha_fraction))).toBeLessThan(0.002);
      // EADL97 against Krause: below 1.5 % from germanium on, 6 % at silicon.
      expect(Math.abs(fluorescenceYield(z, 'K') / Number(row.fluorescence_yield_K) - 1)).toBeLessThan(
        z < 20 ? 0.06 : 0.015,
      );
    },
  );

  it.each(publishedRows('x-ray-lines').map((row) => [row.element, row.line, row] as const))(
    'of %s puts %s where it is measured',
    (_, line, row) => {
      const index = line.startsWith('K') ? 0 : Number(line[1]);
      const measured = Number(row.energy_keV);
      expect(Math.abs(nearestLine(Number(row.z), index, measured) - measured)).toBeLessThan(
        Number(row.tolerance_keV),
      );
    },
  );

  it.each(publishedRows('l-yields').map((row) => [row.element, row.quantity, row] as const))(
    'of %s has %s near the published one',
    (_, quantity, row) => {
      const z = Number(row.z);
      const published = Number(row.value);
      if (quantity.startsWith('omega')) {
        const found = fluorescenceYield(z, quantity.slice(6) as 'L1');
        expect(Math.abs(found / published - 1)).toBeLessThan(Number(row.relative_tolerance));
      } else {
        const [from, to] = [Number(quantity[1]), Number(quantity[2])];
        const found = shell(z, from).transitions.reduce(
          (sum, { probability, vacancyA, vacancyB }) =>
            vacancyA === to || vacancyB === to ? sum + probability : sum,
          0,
        );
        expect(Math.abs(found / published - 1)).toBeLessThan(Number(row.relative_tolerance));
      }
    },
  );

  it('is refused for an element that does not exist', () => {
    expect(() => relaxation(0)).toThrow(/atomic number/);
  });
});
