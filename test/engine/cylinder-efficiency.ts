/** Total efficiency of a bare cylinder for a point source: the share of photons that collide, by integrals over chords. */
import { integrate } from './goodness.js';

export interface Cylinder {
  readonly radiusCm: number;
  readonly heightCm: number;
}

/** Share of all photons of a point on the axis that collide: ½ ∫ (1 − exp(−μ l(θ))) sin θ dθ. */
export function onAxisEfficiency(
  { radiusCm, heightCm }: Cylinder,
  distanceCm: number,
  perCm: number,
): number {
  const collides = (chord: number) => -Math.expm1(-perCm * chord);
  // Out through the far face up to the first angle, then out through the side.
  const first = Math.atan(radiusCm / (distanceCm + heightCm));
  const last = Math.atan(radiusCm / distanceCm);
  const byFace = (theta: number) => collides(heightCm / Math.cos(theta)) * Math.sin(theta);
  const bySide = (theta: number) =>
    collides(radiusCm / Math.sin(theta) - distanceCm / Math.cos(theta)) * Math.sin(theta);
  return 0.5 * (integrate(byFace, 0, first) + integrate(bySide, first, last));
}

/** The same for a point off the axis, over all directions, from its own formula for chords. */
export function offAxisEfficiency(
  cylinder: Cylinder,
  distanceCm: number,
  offsetCm: number,
  perCm: number,
): number {
  // Directions towards the axis lie around azimuth 0; those of the cylinder within a quarter turn if it is not above.
  const parts = 400;
  return (
    integrate(
      (azimuth) =>
        integrate(
          (cosine) => -Math.expm1(-perCm * chordOf(cylinder, distanceCm, offsetCm, cosine, azimuth)),
          0,
          1,
          parts,
        ),
      0,
      Math.PI,
      parts,
    ) /
    (2 * Math.PI)
  );
}

/** Chord of a ray from (−offset, 0, −distance) in the direction of a polar cosine and an azimuth. */
function chordOf(
  { radiusCm, heightCm }: Cylinder,
  distanceCm: number,
  offsetCm: number,
  cosine: number,
  azimuth: number,
): number {
  const sine = Math.sqrt(1 - cosine * cosine);
  const miss = offsetCm * Math.sin(azimuth);
  if (Math.abs(miss) >= radiusCm) return 0;
  const half = Math.sqrt(radiusCm * radiusCm - miss * miss);
  const middle = offsetCm * Math.cos(azimuth);
  const enters = Math.max(distanceCm / cosine, (middle - half) / sine);
  const leaves = Math.min((distanceCm + heightCm) / cosine, (middle + half) / sine);
  return Math.max(0, leaves - enters);
}
