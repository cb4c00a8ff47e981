/** The width of a detector's peaks against energy. */
import type { Resolution } from '../../engine/setup.js';

/** FWHM over standard deviation of a normal peak: 2 √(2 ln 2). */
export const FWHM_PER_SIGMA = 2 * Math.sqrt(2 * Math.LN2);

/**
 * FWHM in keV at an energy; never below 0.
 *
 * Between the rows of a table the square of the width is a straight line in energy, for independent spreads add by
 * their squares and that of the number of carriers goes with the energy. Below the first row its width stays (noise
 * of the electronics), above the last one it grows with the square root of the energy.
 */
export function fwhmKeV(resolution: Resolution, energyKeV: number): number {
  switch (resolution.kind) {
    case 'at_energy':
      return resolution.fwhmKeV * Math.sqrt(energyKeV / resolution.atKeV);
    case 'formula': {
      const { a, b, c } = resolution;
      return Math.max(0, a + b * Math.sqrt(energyKeV + c * energyKeV * energyKeV));
    }
    case 'table':
      return fromTable(resolution.energyKeV, resolution.fwhmKeV, energyKeV);
  }
}

function fromTable(energies: readonly number[], widths: readonly number[], energyKeV: number): number {
  const last = energies.length - 1;
  if (energyKeV <= energies[0]) return widths[0];
  if (energyKeV >= energies[last]) return widths[last] * Math.sqrt(energyKeV / energies[last]);
  const upper = energies.findIndex((energy) => energy > energyKeV);
  const part = (energyKeV - energies[upper - 1]) / (energies[upper] - energies[upper - 1]);
  return Math.sqrt(widths[upper - 1] ** 2 * (1 - part) + widths[upper] ** 2 * part);
}
