/**
 * Direction of a photoelectron: the K-shell law of Sauter (Ann. Phys. 403 (1931) 454), which peaks across the photon's
 * direction at low energies and along it at high ones. In ν = 1 − cos θ, with A = 1/β − 1,
 *
 *   p(ν) ∝ (2 − ν) [1/(A + ν) + β γ (γ − 1)(γ − 2)/2] · ν/(A + ν)³,
 *
 * sampled by inverting the last factor and refusing with the first two.
 */
import { ELECTRON_REST_KEV } from '../constants.js';
import { nextUniform, type StreamState } from '../random.js';

/** Cosine of the angle between a photoelectron of `electronKeV` and the photon that freed it. */
export function samplePhotoelectronCosine(electronKeV: number, random: StreamState): number {
  const gamma = 1 + electronKeV / ELECTRON_REST_KEV;
  const beta = Math.sqrt(1 - 1 / (gamma * gamma));
  const a = 1 / beta - 1;
  const constant = 0.5 * beta * gamma * (gamma - 1) * (gamma - 2);
  const highest = 2 * (1 / a + constant);
  for (;;) {
    const u = nextUniform(random);
    const nu = ((2 * a) / ((a + 2) ** 2 - 4 * u)) * (2 * u + (a + 2) * Math.sqrt(u));
    if (nextUniform(random) * highest <= (2 - nu) * (1 / (a + nu) + constant)) return 1 - nu;
  }
}

/** Density of ν = 1 − cos θ, not normalised. */
export function photoelectronShape(electronKeV: number, nu: number): number {
  const gamma = 1 + electronKeV / ELECTRON_REST_KEV;
  const beta = Math.sqrt(1 - 1 / (gamma * gamma));
  const a = 1 / beta - 1;
  const constant = 0.5 * beta * gamma * (gamma - 1) * (gamma - 2);
  return ((2 - nu) * (1 / (a + nu) + constant) * nu) / (a + nu) ** 3;
}
