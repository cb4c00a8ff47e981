/**
 * Dose per fluence against photon energy: air kerma, ambient dose equivalent H*(10), effective dose for a parallel
 * beam from the front (AP).
 *
 * Between tabulated energies a four-point Lagrange polynomial runs in ln–ln, as ICRP 74 recommends, and never across
 * the argon K edge of air. Where ICRP tabulates nothing (below 10 keV; H*(10) above 10 MeV) values are bounds on the
 * safe side: H*(10) goes on along its outermost straight lines in ln–ln, though tissue absorbs ever faster below and
 * full transport of electrons lowers it above; effective dose below 10 keV stays in proportion to the energy, though
 * less penetrating photons harm ever fewer organs.
 */
import { dataTable } from './data-table.js';
import { MaterialError } from './errors.js';

export type DoseCoefficientQuantity = 'air_kerma' | 'ambient_dose' | 'effective_dose_ap';

/** keV g⁻¹ into pGy: elementary charge (CODATA 2018, exact) 1.602176634e-16 J/keV, 1000 g/kg, 1e12 pGy/Gy. */
const PGY_PER_KEV_PER_G = 0.1602176634;
const MIN_ENERGY_KEV = 1;
const MAX_ENERGY_KEV = 20_000;
/** Rounding that an energy at the end of the range may carry. */
const RANGE_SLACK = 1e-9;
/** Nodes closer than this would make of the rounding of their values a wave; the upper one is left out. */
const CLOSEST_NODES = 1.05;
const STENCIL = 4;

/** A piece of a curve without jumps. */
interface Piece {
  readonly logEnergy: readonly number[];
  readonly logValue: readonly number[];
}

/** Ascending; a piece begins at its first energy. */
type Curve = readonly Piece[];

const cache = new Map<string, Curve>();

/**
 * Dose per photon fluence in pGy cm² (air kerma) or pSv cm² (the others), for 1 keV to 20 MeV.
 * Sources: NISTIR 5632 for air, ICRP 74 and ICRU 57 for H*(10), ICRP 116 for effective dose; see data/README.md.
 * @throws MaterialError for an energy outside
 */
export function doseCoefficient(quantity: DoseCoefficientQuantity, energyKeV: number): number {
  requireEnergy(energyKeV);
  if (quantity === 'air_kerma') {
    return (
      (PGY_PER_KEV_PER_G * energyKeV * airEnergyAbsorptionCm2PerG(energyKeV)) /
      (1 - airRadiatedShare(energyKeV))
    );
  }
  const curve = curveOf(quantity);
  const first = Math.exp(curve[0].logEnergy[0]);
  if (quantity === 'effective_dose_ap' && energyKeV < first)
    return (valueAt(curve, first) * energyKeV) / first;
  return valueAt(curve, energyKeV);
}

/**
 * Mass energy-absorption coefficient of dry air in cm²/g, for 1 keV to 20 MeV.
 * Source: NISTIR 5632 (Hubbell & Seltzer 1995).
 * @throws MaterialError for an energy outside
 */
export function airEnergyAbsorptionCm2PerG(energyKeV: number): number {
  requireEnergy(energyKeV);
  return valueAt(curveOf('air_energy_absorption'), energyKeV);
}

/**
 * Share g of the energy transferred to electrons in air that they radiate away as bremsstrahlung. Energy transfer,
 * which kerma counts, is energy absorption divided by 1 − g.
 */
export function airRadiatedShare(energyKeV: number): number {
  requireEnergy(energyKeV);
  return valueAt(curveOf('air_radiated_share'), energyKeV);
}

function requireEnergy(energyKeV: number): void {
  const inRange =
    energyKeV >= MIN_ENERGY_KEV * (1 - RANGE_SLACK) && energyKeV <= MAX_ENERGY_KEV * (1 + RANGE_SLACK);
  if (inRange) return;
  throw new MaterialError({
    code: 'energy_out_of_range',
    value: `${energyKeV} keV`,
    rule: `must be an energy from ${MIN_ENERGY_KEV} keV to ${MAX_ENERGY_KEV / 1000} MeV`,
  });
}

function valueAt(curve: Curve, energyKeV: number): number {
  const x = Math.log(energyKeV);
  let piece = curve[0];
  for (const candidate of curve) if (candidate.logEnergy[0] <= x) piece = candidate;
  const { logEnergy, logValue } = piece;
  const last = logEnergy.length - 1;
  if (x < logEnergy[0]) return Math.exp(lagrange(logEnergy, logValue, 0, 2, x));
  if (x > logEnergy[last]) return Math.exp(lagrange(logEnergy, logValue, last - 1, 2, x));
  let below = 0;
  while (below < last - 1 && logEnergy[below + 1] <= x) below++;
  const count = Math.min(STENCIL, logEnergy.length);
  const from = Math.min(Math.max(0, below - 1), logEnergy.length - count);
  return Math.exp(lagrange(logEnergy, logValue, from, count, x));
}

/** Value at `at` of the polynomial through `count` points from `from` on (Lagrange's formula). */
function lagrange(
  x: readonly number[],
  y: readonly number[],
  from: number,
  count: number,
  at: number,
): number {
  let sum = 0;
  for (let i = from; i < from + count; i++) {
    let weight = 1;
    for (let k = from; k < from + count; k++) if (k !== i) weight *= (at - x[k]) / (x[i] - x[k]);
    sum += weight * y[i];
  }
  return sum;
}

function curveOf(quantity: string): Curve {
  let curve = cache.get(quantity);
  if (!curve) {
    curve = readCurve(quantity);
    cache.set(quantity, curve);
  }
  return curve;
}

/** Two rows at one energy are an edge: there a new piece begins. */
function readCurve(quantity: string): Curve {
  const pieces: { logEnergy: number[]; logValue: number[] }[] = [];
  let previous = NaN;
  for (const row of dataTable('dose-coefficients')) {
    if (row.quantity !== quantity) continue;
    const energy = row.energy_keV as number;
    const isEdge = energy === previous;
    if (pieces.length === 0 || isEdge) pieces.push({ logEnergy: [], logValue: [] });
    else if (energy < previous * CLOSEST_NODES) continue;
    previous = energy;
    pieces.at(-1)!.logEnergy.push(Math.log(energy));
    pieces.at(-1)!.logValue.push(Math.log(row.value as number));
  }
  return pieces;
}
