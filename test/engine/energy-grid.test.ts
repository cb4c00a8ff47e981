import { describe, expect, it } from 'vitest';
import seedrandom from 'seedrandom';
import { gridOf, makeCells, slotsOf } from '../../engine/compile-slots.js';
import { bucketOf, bucketStartKeV, cellOf, makeEnergyGrid } from '../../engine/energy-grid.js';
import { CELL_LENGTH } from '../../engine/problem.js';
import { absorptionEdges, materialCoefficients, resolveMaterial } from '../../materials/index.js';
import { ALL, PLAIN, slabSetup } from './slab-run.js';

const MATERIALS = ['NaI', 'lead', 'concrete', 'germanium', 'water', 'BGO', 'gadolinium', 'uranium'];
const TOP_KEV = 20_000;

describe('the energy grid', () => {
  const edges = [1, 1.5, 2, 3.3, 3.3, 3.301, 13.0352, 1024, 5000];
  const grid = makeEnergyGrid(6000, edges);
  const linearSearch = (energyKeV: number) => {
    let cell = -1;
    grid.nodesKeV.forEach((node, i) => {
      if (node <= energyKeV && i + 1 < grid.nodesKeV.length) cell = i;
    });
    return cell;
  };

  it('finds the cell that a search from end to end finds', () => {
    const random = seedrandom.alea('cells');
    const probes = Array.from({ length: 2000 }, () => 6000 ** random());
    for (const energyKeV of [...probes, 1, 6000, ...edges]) {
      expect(cellOf(grid, energyKeV), `${energyKeV} keV`).toBe(linearSearch(energyKeV));
    }
  });

  it.each(edges.filter((e) => e > 1))('parts at the edge of %d keV to the last bit', (edge) => {
    const bit = 2 ** (Math.floor(Math.log2(edge)) - 52);
    const below = cellOf(grid, edge - bit);
    const above = cellOf(grid, edge);
    expect(grid.nodesKeV[below + 1]).toBeLessThanOrEqual(edge);
    expect(grid.nodesKeV[above]).toBe(edge);
    expect(above).toBeGreaterThan(below);
    expect(cellOf(grid, edge + bit)).toBe(above);
  });

  it('has cells so narrow that a power law E⁻³ is straight within 10⁻⁴', () => {
    for (let i = 0; i + 1 < grid.nodesKeV.length; i++) {
      const [a, b] = [grid.nodesKeV[i], grid.nodesKeV[i + 1]];
      const middle = (a + b) / 2;
      expect(((a ** -3 + b ** -3) / 2) * middle ** 3 - 1).toBeLessThan(1e-4);
    }
  });

  it('has buckets that start where their energies do', () => {
    for (let bucket = 0; bucket < 1800; bucket++) {
      const start = bucketStartKeV(bucket);
      expect(bucketOf(start)).toBe(bucket);
      expect(bucketOf(start * (1 - 2 ** -53))).toBe(bucket - 1);
    }
  });
});

describe.each(MATERIALS)('the cells of %s', (name) => {
  const material = resolveMaterial(name);
  const { stack } = slabSetup({ stack: [[material, 1]], energyKeV: 100, physics: ALL, seed: '' }, 1);
  const { slots } = slotsOf(stack);
  const grid = gridOf(slots, TOP_KEV);
  const cells = makeCells(slots, grid, ALL);
  const line = (cell: number, offset: number, energyKeV: number) =>
    cells[cell * CELL_LENGTH + offset] + cells[cell * CELL_LENGTH + offset + 1] * energyKeV;

  // Between the M5 and M4 edges of the rare earths and beyond, 1 to 2.7 keV, XCOM's curves run as steep as E²⁵
  const steep = material.constituents.flatMap(({ z }) => {
    const edge = (shell: string) => absorptionEdges(z).find((e) => e.shell === shell)?.energyKeV ?? Infinity;
    return edge('M5') < 3 ? [{ from: edge('M5'), to: edge('M4') }] : [];
  });
  const toleranceAt = (energyKeV: number) =>
    steep.some(({ from, to }) => energyKeV > from && energyKeV < to) ? 1e-2 : 3e-4;

  it('give the coefficients of the material within 3·10⁻⁴ at 500 energies', () => {
    const random = seedrandom.alea(`cells of ${name}`);
    for (let i = 0; i < 500; i++) {
      const energyKeV = TOP_KEV ** random();
      const cell = cellOf(grid, energyKeV);
      const c = materialCoefficients(material, energyKeV);
      const attenuation = line(cell, 0, energyKeV) / material.densityGPerCm3;
      const tolerance = toleranceAt(energyKeV);
      expect(Math.abs(attenuation / c.total - 1), `${energyKeV} keV`).toBeLessThan(tolerance);
      const shares = [2, 4, 6].map((offset) => line(cell, offset, energyKeV));
      const incoherent = c.photoelectric + c.incoherent;
      [c.photoelectric, incoherent, incoherent + c.coherent].forEach((sum, n) => {
        expect(Math.abs(shares[n] - sum / c.total), `${energyKeV} keV, share ${n}`).toBeLessThan(tolerance);
      });
    }
  });

  it('jump at every edge as the coefficients do', () => {
    const edges = material.constituents
      .flatMap(({ z }) => absorptionEdges(z).map(({ energyKeV }) => energyKeV))
      .filter((energyKeV) => energyKeV > 1);
    expect(edges.length).toBeGreaterThanOrEqual(name === 'water' ? 0 : 1);
    for (const edge of edges) {
      for (const energyKeV of [edge * (1 - 1e-9), edge * (1 + 1e-9)]) {
        const c = materialCoefficients(material, energyKeV);
        const attenuation = line(cellOf(grid, energyKeV), 0, energyKeV) / material.densityGPerCm3;
        expect(Math.abs(attenuation / c.total - 1), `${energyKeV} keV`).toBeLessThan(1e-6);
      }
    }
  });

  it('hold absorption and scattering alone when all else is switched off', () => {
    const plain = makeCells(slots, grid, PLAIN);
    for (const energyKeV of [1.234, 12.3, 123, 1234, 12_340]) {
      const at = cellOf(grid, energyKeV) * CELL_LENGTH;
      const c = materialCoefficients(material, energyKeV);
      const attenuation = (plain[at] + plain[at + 1] * energyKeV) / material.densityGPerCm3;
      expect(Math.abs(attenuation / (c.photoelectric + c.incoherent) - 1)).toBeLessThan(2e-4);
      expect(plain[at + 4] + plain[at + 5] * energyKeV).toBeCloseTo(1, 12);
    }
  });
});
