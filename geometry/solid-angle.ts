/** The solid angle that a disc takes up as seen from a point. */
import { completeK, heumanLambda } from './elliptic-integrals.js';

/**
 * Solid angle in sr of a disc, seen from a point at `distanceCm` from its plane and `offsetCm` off its axis.
 *
 * On the axis 2π(1 − cos), elsewhere by elliptic integrals (F. Paxton, "Solid angle calculation for a circular disk",
 * Rev. Sci. Instrum. 30, 254, 1959). Off the axis the absolute error is about 1e-14 sr.
 *
 * @throws RangeError if a radius or distance is not above 0, or the offset is below 0
 */
export function discSolidAngleSr(radiusCm: number, distanceCm: number, offsetCm = 0): number {
  if (!(radiusCm > 0 && distanceCm > 0 && offsetCm >= 0)) {
    throw new RangeError('a disc needs radius and distance above 0 and an offset not below 0');
  }
  if (offsetCm === 0) {
    const slant = Math.hypot(radiusCm, distanceCm);
    return (2 * Math.PI * radiusCm * radiusCm) / (slant * (slant + distanceCm));
  }
  const farthest = Math.hypot(distanceCm, offsetCm + radiusCm);
  const nearest = Math.hypot(distanceCm, offsetCm - radiusCm);
  const complement = (nearest / farthest) ** 2;
  const lambda = heumanLambda(distanceCm / nearest, Math.abs(offsetCm - radiusCm) / nearest, complement);
  const edgeTerm = ((2 * distanceCm) / farthest) * completeK(complement);
  return offsetCm < radiusCm ? Math.PI * (2 - lambda) - edgeTerm : Math.PI * lambda - edgeTerm;
}
