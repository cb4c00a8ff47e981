/** Laws of the scattering angle built straight from the tables of F(x, Z) and S(x, Z), by quadrature. */
import {
  elementCoefficients,
  formFactorAt,
  incoherentFunctionAt,
  type Constituent,
} from '../../materials/index.js';
import { integrate } from './goodness.js';

const HC = 12.39841984; // h c, keV Å (CODATA 2018)
const REST = 510.99895; // m c², keV (CODATA 2018)
/** Standard atomic weights (IUPAC) of what is tested. */
const ATOMIC_WEIGHTS: Record<number, number> = { 1: 1.008, 6: 12.011, 8: 15.999, 11: 22.99, 13: 26.982, 29: 63.546, 53: 126.904, 82: 207.2 }; // prettier-ignore

/** Bins of v = (1 − cos θ)/2, crowded forward; bin i ends at ((i + 1)/BINS)⁴. */
export const ANGLE_BINS = 2000;

export function binOfAngle(v: number): number {
  return Math.min(ANGLE_BINS - 1, Math.floor(Math.sqrt(Math.sqrt(v)) * ANGLE_BINS));
}

/** Cumulative of a density in v at the ends of the bins. */
export function cumulativeOverAngle(density: (v: number) => number): Float64Array {
  const sums = new Float64Array(ANGLE_BINS);
  let sum = 0;
  for (let i = 0; i < ANGLE_BINS; i++) {
    sum += integrate((q) => density(q ** 4) * 4 * q ** 3, i / ANGLE_BINS, (i + 1) / ANGLE_BINS, 2);
    sums[i] = sum;
  }
  return sums.map((value) => value / sum);
}

/** F(x, Z)² (1 + cos² θ)/2 summed over atoms. */
export function coherentLaw(constituents: readonly Constituent[], energyKeV: number): Float64Array {
  return cumulativeOverAngle((v) => {
    const x = (energyKeV / HC) * Math.sqrt(v);
    const cosine = 1 - 2 * v;
    return constituents.reduce(
      (sum, { z, massFraction }) =>
        sum + ((massFraction / ATOMIC_WEIGHTS[z]) * formFactorAt(z, x) ** 2 * (1 + cosine * cosine)) / 2,
      0,
    );
  });
}

/** dσ/dΩ of Klein and Nishina, up to a factor. */
export function freeElectron(energyKeV: number, v: number): number {
  const p = 1 / (1 + (2 * energyKeV * v) / REST);
  return p * p * (p + 1 / p - 4 * v * (1 - v));
}

/** Klein–Nishina × S(x, Z), elements in the shares of their tabulated totals. */
export function boundIncoherentLaw(constituents: readonly Constituent[], energyKeV: number): Float64Array {
  const mixed = new Float64Array(ANGLE_BINS);
  for (const { z, massFraction } of constituents) {
    const share = massFraction * elementCoefficients(z, energyKeV).incoherent;
    const own = cumulativeOverAngle((v) => boundElectrons(z, energyKeV, v));
    own.forEach((value, i) => (mixed[i] += share * value));
  }
  return mixed.map((value) => value / mixed[ANGLE_BINS - 1]);
}

/** Klein–Nishina × S(x, Z) of one element, up to a factor. */
export function boundElectrons(z: number, energyKeV: number, v: number): number {
  return freeElectron(energyKeV, v) * incoherentFunctionAt(z, (energyKeV / HC) * Math.sqrt(v));
}
