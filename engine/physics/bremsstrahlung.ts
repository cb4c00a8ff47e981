/**
 * Thick-target bremsstrahlung: the photons an electron (or positron: same yields) sets free while it comes to rest
 * where it was born. Every photon takes its energy from what the electron has left, so that no more than the
 * electron's energy is ever emitted; what is not emitted stays on the spot.
 *
 * Direction: the electron turns by multiple scattering, so that on the way from T to T′ the mean cosine to its first
 * direction falls to exp(−∫ G₁ ds) (see electron-scattering.ts). The distribution about it is R. A. Fisher's
 * (Proc. R. Soc. A 217 (1953) 295), which random walks on a sphere follow closely (P. H. Roberts and H. D. Ursell,
 * Phil. Trans. R. Soc. A 252 (1960) 317). The photon is isotropic in a frame moving with the electron: the leading
 * factor 1 / (1 − β cos θ)² of the emission (Koch and Motz, Rev. Mod. Phys. 31 (1959) 920).
 */
import { ELECTRON_REST_KEV } from '../constants.js';
import { bucketOf } from '../energy-grid.js';
import type { BremsstrahlungTables } from './bremsstrahlung-tables.js';

/**
 * Photons one electron may set free. Their number is below a Poisson variable of mean N, which is 37 at most (Z = 100,
 * 20 MeV, photons from 1 keV): more than 96 happen less than once in 10¹⁵ such electrons.
 */
export const MAX_ELECTRON_PHOTONS = 96;

/** Relative rounding allowed above the highest energy of the tables. */
const SLACK = 1 + 1e-9;

/**
 * Draws the photons of one electron.
 *
 * @param electronKeV kinetic energy; at most `tables.topKeV`
 * @param next a uniform number in (0, 1)
 * @param out takes the photon energies (keV) in its first half and, at the same places of its second half, the
 *   cosines of their directions to that in which the electron started; its length is twice the number of photons
 *   there is room for, best 2 × MAX_ELECTRON_PHOTONS
 * @param frames takes, at the same places as the energies and cosines in `out`, what the directions are made of: the
 *   speed β of the electron as it radiates, and the cosine of its direction then to that in which it started
 * @returns how many photons there are
 * @throws RangeError for an energy above the tables, or when `out` has no room for a photon
 */
export function sampleBremsstrahlung(
  tables: BremsstrahlungTables,
  electronKeV: number,
  next: () => number,
  out: Float64Array,
  frames: Float64Array | null = null,
): number {
  if (electronKeV <= tables.cutoffKeV) return 0;
  if (!(electronKeV <= tables.topKeV * SLACK)) {
    throw new RangeError(
      `an electron of ${electronKeV} keV is above the tables, which end at ${tables.topKeV} keV`,
    );
  }
  const u = next();
  if (u < tables.silent[bucketOf(electronKeV)]) return 0;
  return emitBremsstrahlung(tables, electronKeV, u, next, out, frames);
}

/** The same from a first draw `firstUniform` that was not silent. */
export function emitBremsstrahlung(
  tables: BremsstrahlungTables,
  electronKeV: number,
  firstUniform: number,
  next: () => number,
  out: Float64Array,
  frames: Float64Array | null,
): number {
  const { cutoffKeV, step, photons, silent, turning } = tables;
  const room = out.length >> 1;
  let count = 0;
  let u = firstUniform;
  let kineticKeV = electronKeV;
  let turned = 0;
  while (kineticKeV > cutoffKeV) {
    // ln u is minus the number of emissions to be expected on the way to the next one
    const from = Math.log(kineticKeV / cutoffKeV) / step;
    const left = valueAt(photons, from) + Math.log(u);
    if (!(left > 0)) break;
    if (count >= room)
      throw new RangeError(`more than ${room} photons of one electron of ${electronKeV} keV`);
    const to = Math.min(from, inverseOf(photons, left));
    const emittingKeV = Math.min(kineticKeV, cutoffKeV * Math.exp(to * step));
    turned += valueAt(turning, from) - valueAt(turning, to);
    const photonKeV = Math.min(
      emittingKeV,
      cutoffKeV * Math.exp(drawShare(tables, to * step, next) * to * step),
    );
    out[count] = photonKeV;
    const beta = speedOf(emittingKeV);
    const atRest = 2 * next() - 1;
    const turnedCosine = fisherCosine(Math.exp(-turned), next());
    out[room + count] = composeCosines(turnedCosine, forward(atRest, beta), next());
    if (frames !== null) {
      frames[count] = beta;
      frames[room + count] = turnedCosine;
    }
    count++;
    kineticKeV = emittingKeV - photonKeV;
    if (kineticKeV <= cutoffKeV) break;
    u = next();
    if (u < silent[bucketOf(kineticKeV)]) break;
  }
  return count;
}

/** Straight line between the values of a grid of unit steps. */
function valueAt(values: Float64Array, at: number): number {
  const i = Math.min(Math.floor(at), values.length - 2);
  return values[i] + (at - i) * (values[i + 1] - values[i]);
}

/** Where on the grid rising values reach `value`. */
function inverseOf(values: Float64Array, value: number): number {
  let low = 0;
  let high = values.length - 1;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (values[middle] > value) high = middle;
    else low = middle;
  }
  return low + (value - values[low]) / (values[high] - values[low]);
}

/** x = ln(k / cutoff) / ln(T / cutoff) of a photon: a row of the table at random by nearness, then its inverse. */
function drawShare(tables: BremsstrahlungTables, logRatio: number, next: () => number): number {
  const { rowStep, rows, nodes, density, cumulative } = tables;
  const at = Math.min(logRatio / rowStep, rows - 1);
  const below = Math.floor(at);
  const row = next() < at - below ? below + 1 : below;
  const first = row * nodes.length;
  const u = next();
  let low = 0;
  let high = nodes.length - 1;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (cumulative[first + middle] > u) high = middle;
    else low = middle;
  }
  const area = u - cumulative[first + low];
  const start = density[first + low];
  const slope = (density[first + high] - start) / (nodes[high] - nodes[low]);
  const share = nodes[low] + (2 * area) / (start + Math.sqrt(Math.max(0, start * start + 2 * slope * area)));
  return Math.min(1, share);
}

/** Speed β = v/c of an electron. */
function speedOf(electronKeV: number): number {
  const tau = electronKeV / ELECTRON_REST_KEV;
  return Math.sqrt(tau * (tau + 2)) / (1 + tau);
}

/** Cosine to the electron's direction of what has cosine `atRest` in a frame that moves with it. */
export function forward(atRest: number, beta: number): number {
  return (atRest + beta) / (1 + beta * atRest);
}

/** Photons per sr at that cosine when they are isotropic in the moving frame. */
export function forwardDensity(cosine: number, beta: number): number {
  return (1 - beta * beta) / (4 * Math.PI * (1 - beta * cosine) ** 2);
}

/** Cosine of the angle between two directions that a third sees under cosines a and b, at azimuth 2 π u. */
export function composeCosines(a: number, b: number, u: number): number {
  const across = Math.sqrt(Math.max(0, (1 - a * a) * (1 - b * b)));
  return Math.max(-1, Math.min(1, a * b + across * Math.cos(2 * Math.PI * u)));
}

/** Cosine by Fisher's density exp(κ μ) with the given mean; κ by M. Kröger (J. Non-Newton. Fluid Mech. 223 (2015) 77). */
function fisherCosine(mean: number, u: number): number {
  const m2 = mean * mean;
  const kappa = (mean * (3 - (m2 * (6 + m2 * (1 - 2 * m2))) / 5)) / (1 - m2);
  if (kappa < 1e-6) return 2 * u - 1;
  if (kappa > 1e12) return 1;
  return Math.max(-1, 1 + Math.log(u + (1 - u) * Math.exp(-2 * kappa)) / kappa);
}
