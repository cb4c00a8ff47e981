/** Where source photons start. Each function takes uniform numbers and places the ray; directions are the caller's. */
import { U, V, W, X, Y, Z, type SolidStack } from './solid-stack.js';

/** A point uniform in a disc around the axis, in the plane `zCm`. */
export function placeInDisc(ray: Float64Array, radiusCm: number, zCm: number, u1: number, u2: number): void {
  const radius = radiusCm * Math.sqrt(u1);
  ray[X] = radius * Math.cos(2 * Math.PI * u2);
  ray[Y] = radius * Math.sin(2 * Math.PI * u2);
  ray[Z] = zCm;
}

/** A point uniform over the cross section of a layer, in the plane `zCm`. */
export function placeInLayer(
  stack: SolidStack,
  layer: number,
  ray: Float64Array,
  zCm: number,
  u1: number,
  u2: number,
): void {
  const radiusSquared = stack.radiusSquaredCm2[layer];
  if (radiusSquared < Infinity) {
    placeInDisc(ray, Math.sqrt(radiusSquared), zCm, u1, u2);
    return;
  }
  ray[X] = stack.halfWidthCm[layer] * (2 * u1 - 1);
  ray[Y] = stack.halfHeightCm[layer] * (2 * u2 - 1);
  ray[Z] = zCm;
}

/**
 * A photon of a parallel beam that meets the axis at the front face, tilted in the plane of x and z: uniform over the
 * beam's circular cross section, moved along the beam to the plane of the front face.
 */
export function placeInBeam(
  ray: Float64Array,
  radiusCm: number,
  cosine: number,
  u1: number,
  u2: number,
): void {
  if (radiusCm > 0) placeInDisc(ray, radiusCm, 0, u1, u2);
  else ray[X] = ray[Y] = ray[Z] = 0;
  ray[X] /= cosine;
  ray[U] = Math.sqrt(Math.max(0, 1 - cosine * cosine));
  ray[V] = 0;
  ray[W] = cosine;
}
