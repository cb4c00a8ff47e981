/**
 * Doppler broadening of incoherent scattering: the electron struck moves, so the scattered energy spreads about the
 * Compton value. Impulse approximation (Ribberfors and Berggren 1982) with the Compton profiles of each shell
 * (Biggs, Mendelsohn and Mann 1975).
 *
 * Shell and momentum are drawn together: a shell by its electrons, the component p of the electron's momentum along
 * the momentum transfer by the shell's whole profile, and the pair is kept when the transfer can free the electron,
 * p ≤ p_max(E, θ, binding). That is the same joint law as weighing each shell by its truncated profile. The free
 * choice of shell also chooses the element by its share of S(x, Z) in this approximation.
 */
import { ELECTRON_REST_KEV, FINE_STRUCTURE } from '../constants.js';
import { nextUniform, type StreamState } from '../random.js';

/** Steps of t = √(1 − u) in an inverse cumulative of |p|: fine where the profile's tail makes |p| grow fast. */
export const PROFILE_STEPS = 128;
export const PROFILE_LENGTH = PROFILE_STEPS + 1;
/** Refusals after which the free-electron energy is taken; counted, and hardly ever reached. */
export const MAX_TRIES = 1000;
/** Largest momentum against the transfer, m c: at 1 the photon would keep no energy and the approximation ends. */
export const MOMENTUM_LIMIT = 0.999;

/** Shells of all materials of a problem, those of one material next to each other. */
export interface DopplerTables {
  /** Alias tables of the choice of a shell by its electrons. */
  readonly keep: Float64Array;
  readonly alias: Int32Array;
  readonly bindingKeV: Float64Array;
  /** First number of the shell's inverse cumulative in `momenta`. */
  readonly profile: Int32Array;
  /** |p| in units of m c. */
  readonly momenta: Float64Array;
}

/** Fills the inverse cumulative of |p| (m c) of one shell from its profile J(p), p in atomic units from 0 up. */
export function fillProfile(pz: Float64Array, j: Float64Array, out: Float64Array, base: number): void {
  const p: number[] = [];
  const cumulative: number[] = [];
  let sum = 0;
  // The profile is tabulated at few momenta: integrate ln J against p on a fine grid.
  for (let i = 0; i + 1 < pz.length; i++) {
    const parts = 32;
    const slope = Math.log(Math.max(j[i + 1], 1e-300) / Math.max(j[i], 1e-300)) / (pz[i + 1] - pz[i]);
    for (let n = 0; n < parts; n++) {
      const from = pz[i] + ((pz[i + 1] - pz[i]) * n) / parts;
      p.push(from);
      cumulative.push(sum);
      sum +=
        (Math.max(j[i], 1e-300) *
          Math.exp(slope * (from - pz[i] + (pz[i + 1] - pz[i]) / (2 * parts))) *
          (pz[i + 1] - pz[i])) /
        parts;
    }
  }
  p.push(pz[pz.length - 1]);
  cumulative.push(sum);
  let i = 0;
  for (let step = PROFILE_STEPS; step >= 0; step--) {
    const target = (1 - (step / PROFILE_STEPS) ** 2) * sum;
    while (i < p.length - 2 && cumulative[i + 1] < target) i++;
    const width = cumulative[i + 1] - cumulative[i];
    const part = width > 0 ? Math.min(1, (target - cumulative[i]) / width) : 0;
    out[base + step] = FINE_STRUCTURE * (p[i] + part * (p[i + 1] - p[i]));
  }
}

/** Fills one material's alias table (Walker 1977) over `shares`, entries numbered from `base`. */
export function fillAlias(
  shares: readonly number[],
  keep: Float64Array,
  alias: Int32Array,
  base: number,
): void {
  const count = shares.length;
  const total = shares.reduce((sum, share) => sum + share, 0);
  const scaled = shares.map((share) => (share * count) / total);
  const small = [...scaled.keys()].filter((i) => scaled[i] < 1);
  const large = [...scaled.keys()].filter((i) => scaled[i] >= 1);
  keep.fill(1, base, base + count);
  for (let i = 0; i < count; i++) alias[base + i] = base + i;
  while (small.length > 0 && large.length > 0) {
    const poor = small.pop()!;
    const rich = large[large.length - 1];
    keep[base + poor] = scaled[poor];
    alias[base + poor] = base + rich;
    scaled[rich] -= 1 - scaled[poor];
    if (scaled[rich] < 1) small.push(large.pop()!);
  }
}

/** Largest p (m c) at which a transfer to angle v still leaves the photon E − binding. */
export function maxMomentum(energyKeV: number, v: number, bindingKeV: number): number {
  const left = energyKeV - bindingKeV;
  const transfer = Math.sqrt(bindingKeV * bindingKeV + 4 * energyKeV * left * v);
  return ((2 * energyKeV * left * v) / ELECTRON_REST_KEV - bindingKeV) / transfer;
}

/** Energy of a photon scattered to angle v by an electron of momentum component p (m c). */
export function scatteredEnergy(energyKeV: number, v: number, p: number): number {
  const cosine = 1 - 2 * v;
  const a = 1 + (2 * energyKeV * v) / ELECTRON_REST_KEV;
  const t = p * p;
  const b = a - t * cosine;
  const root = Math.sqrt(Math.max(0, b * b - (a * a - t) * (1 - t)));
  return (energyKeV * (p < 0 ? b - root : b + root)) / (a * a - t);
}

/**
 * Energy (keV) of a photon of `energyKeV` scattered to angle v in the material whose shells start at `first`;
 * 0 when no shell would have it, which the caller counts and replaces by the free-electron energy.
 */
export function sampleDoppler(
  tables: DopplerTables,
  first: number,
  count: number,
  energyKeV: number,
  v: number,
  random: StreamState,
): number {
  const { keep, alias, bindingKeV, profile, momenta } = tables;
  for (let tries = 0; tries < MAX_TRIES; tries++) {
    const pick = nextUniform(random) * count;
    let shell = first + (pick | 0);
    if (pick - (pick | 0) >= keep[shell]) shell = alias[shell];
    const signed = 2 * nextUniform(random) - 1;
    const binding = bindingKeV[shell];
    if (binding >= energyKeV) continue;
    const t = Math.sqrt(1 - Math.abs(signed)) * PROFILE_STEPS;
    const step = Math.min(PROFILE_STEPS - 1, t | 0);
    const at = profile[shell] + step;
    const size = momenta[at] + (t - step) * (momenta[at + 1] - momenta[at]);
    const p = signed < 0 ? -size : size;
    if (p > -MOMENTUM_LIMIT && p <= maxMomentum(energyKeV, v, binding))
      return scatteredEnergy(energyKeV, v, p);
  }
  return 0;
}
