/** A photon in space: the slots of a ray (position, direction), then its energy and its weight. */
import { RAY_LENGTH } from '../geometry/index.js';

export const ENERGY = RAY_LENGTH;
export const WEIGHT = RAY_LENGTH + 1;
export const PHOTON_LENGTH = RAY_LENGTH + 2;

/** Copies a photon from place `from` of an array of photons to place `to` of another. */
export function copyPhoton(source: Float64Array, from: number, target: Float64Array, to: number): void {
  const a = from * PHOTON_LENGTH;
  const b = to * PHOTON_LENGTH;
  for (let slot = 0; slot < PHOTON_LENGTH; slot++) target[b + slot] = source[a + slot];
}
