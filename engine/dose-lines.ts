/** Dose per fluence on the energy grid of a problem. */
import { doseCoefficient } from '../materials/index.js';
import { fillLines } from './compile-slots.js';
import type { EnergyGrid } from './energy-grid.js';
import { DOSE_LINE, sharedDoubles } from './problem.js';
import { MAX_ENERGY_KEV, type DoseQuantity } from './setup.js';

/** Dose per fluence (pGy cm² or pSv cm²) by quantity and cell, straight lines over each cell. */
export function makeDoseLines(grid: EnergyGrid, quantities: readonly DoseQuantity[]): Float64Array {
  const { nodesKeV } = grid;
  const cells = nodesKeV.length - 1;
  const lines = sharedDoubles(quantities.length * cells * DOSE_LINE);
  quantities.forEach((quantity, d) => {
    const values = nodesKeV.map((energy) => doseCoefficient(quantity, Math.min(energy, MAX_ENERGY_KEV)));
    fillLines(nodesKeV, values, lines, d * cells * DOSE_LINE, DOSE_LINE);
  });
  return lines;
}
