/** Directions in space: turned about an axis by any angle, without a special case and without drift of their length. */
import { U, V, W } from './solid-stack.js';

/** Steps of the tables over a whole turn; their nodes lie in the middle of the steps. */
const STEPS = 1024;
const STEP = (2 * Math.PI) / STEPS;
const TURN_COSINE = Float64Array.from({ length: STEPS }, (_, i) => Math.cos((i + 0.5) * STEP));
const TURN_SINE = Float64Array.from({ length: STEPS }, (_, i) => Math.sin((i + 0.5) * STEP));

/** Points a ray along the axis of the stack. */
export function pointAlongAxis(ray: Float64Array): void {
  ray[U] = 0;
  ray[V] = 0;
  ray[W] = 1;
}

/**
 * Turns the direction of a ray by the polar angle θ of v = (1 − cos θ)/2, with an azimuth about its old direction.
 *
 * The two directions across come from Duff et al., "Building an orthonormal basis, revisited" (J. Computer Graphics
 * Techniques 6, 2017), good for every direction. Sine and cosine of the azimuth are expanded to second order about
 * table nodes (error below 5e-9), and the length is pulled back to 1 by one Newton step.
 *
 * @param v in [0, 1]: 0 goes straight on, 1 straight back
 * @param azimuth share of a whole turn, in [0, 1)
 */
export function turn(ray: Float64Array, v: number, azimuth: number): void {
  const part = azimuth * STEPS;
  const step = part | 0;
  const angle = (part - step - 0.5) * STEP;
  const even = 1 - 0.5 * angle * angle;
  const sine = 2 * Math.sqrt(v * (1 - v));
  const first = sine * (TURN_COSINE[step] * even - TURN_SINE[step] * angle);
  const second = sine * (TURN_SINE[step] * even + TURN_COSINE[step] * angle);
  const along = 1 - 2 * v;
  const u0 = ray[U];
  const v0 = ray[V];
  const w0 = ray[W];
  const sign = w0 >= 0 ? 1 : -1;
  const a = -1 / (sign + w0);
  const b = u0 * v0 * a;
  const u = along * u0 + first * (1 + sign * u0 * u0 * a) + second * b;
  const across = along * v0 + first * sign * b + second * (sign + v0 * v0 * a);
  const w = along * w0 - first * sign * u0 - second * v0;
  const scale = 1.5 - 0.5 * (u * u + across * across + w * w);
  ray[U] = u * scale;
  ray[V] = across * scale;
  ray[W] = w * scale;
}
