/**
 * Which directions from a point in front of a stack can meet it: a circular cone that holds the whole stack, as narrow
 * as its axis allows. A photon sent uniformly into the cone stands for the cone's share of the whole sphere.
 */
import type { SolidStack } from './solid-stack.js';

/** Slots of an aim: axis of the cone (outwards from the stack's axis, along z), then 1 − cos of its half-angle. */
export const AIM_ACROSS = 0;
export const AIM_ALONG = 1;
export const AIM_OPENNESS = 2;
export const AIM_LENGTH = 3;

/** Widening of a cone over its rounding: directions outside the stack only score nothing. */
const ROUNDING = 1 + 2 ** -40;

/**
 * The circles whose convex hull holds the stack: depth and radius of each, in turn; null if a layer has no edge.
 * Only corners of the hull of the profile are kept.
 */
export function rimsOf(stack: SolidStack): Float64Array | null {
  const corners: [number, number][] = [];
  for (let layer = 0; layer < stack.layers; layer++) {
    const radius = Math.min(
      Math.sqrt(stack.radiusSquaredCm2[layer]),
      Math.hypot(stack.halfWidthCm[layer], stack.halfHeightCm[layer]),
    );
    if (radius === Infinity) return null;
    for (const z of [stack.planesCm[layer], stack.planesCm[layer + 1]]) addCorner(corners, z, radius);
  }
  const rims = new Float64Array(new SharedArrayBuffer(16 * corners.length));
  rims.set(corners.flat());
  return rims;
}

/** Adds a corner of the upper hull, after those it hides are taken away. */
function addCorner(corners: [number, number][], z: number, radius: number): void {
  if (corners.length > 0 && corners[corners.length - 1][0] === z) {
    if (corners[corners.length - 1][1] >= radius) return;
    corners.pop();
  }
  while (corners.length > 1) {
    const [z0, r0] = corners[corners.length - 2];
    const [z1, r1] = corners[corners.length - 1];
    if ((r1 - r0) * (z - z0) > (radius - r0) * (z1 - z0)) break;
    corners.pop();
  }
  corners.push([z, radius]);
}

/**
 * Sets `aim` to the cone from a point `distanceCm` in front of the stack and `offsetCm` off its axis. Where no cone
 * narrower than a half space will do, it is the half space towards the stack.
 */
export function aimAt(
  rims: Float64Array | null,
  distanceCm: number,
  offsetCm: number,
  aim: Float64Array,
): void {
  aim[AIM_ACROSS] = 0;
  aim[AIM_ALONG] = 1;
  aim[AIM_OPENNESS] = 1;
  if (rims === null || !(distanceCm > 0)) return;
  // Axis: halfway between the outermost directions in the plane of the point and the axis of the stack.
  let low = Infinity;
  let high = -Infinity;
  for (let i = 0; i < rims.length; i += 2) {
    const depth = rims[i] + distanceCm;
    low = Math.min(low, (-rims[i + 1] - offsetCm) / depth);
    high = Math.max(high, (rims[i + 1] - offsetCm) / depth);
  }
  const lowLength = Math.sqrt(1 + low * low);
  const highLength = Math.sqrt(1 + high * high);
  let across = low / lowLength + high / highLength;
  let along = 1 / lowLength + 1 / highLength;
  const length = Math.sqrt(across * across + along * along);
  across /= length;
  along /= length;
  let openness = 0;
  for (let i = 0; i < rims.length; i += 2) {
    openness = Math.max(openness, rimOpenness(rims[i] + distanceCm, rims[i + 1], offsetCm, across, along));
  }
  // A cone narrower than a half space is convex: with the rims it holds all between them.
  if (!(openness * ROUNDING < 1)) return;
  aim[AIM_ACROSS] = across;
  aim[AIM_ALONG] = along;
  aim[AIM_OPENNESS] = openness * ROUNDING;
}

/**
 * Largest 1 − cos of the angle between the axis and a point of a rim. With q the cosine of the rim point's azimuth the
 * cosine of the angle is (A + B q)/√(C − 2 R ρ q): the extremes are at q = ±1 and where its derivative is zero.
 */
function rimOpenness(depth: number, radius: number, offset: number, across: number, along: number): number {
  const ends = Math.max(
    openness(1, depth, radius, offset, across, along),
    openness(-1, depth, radius, offset, across, along),
  );
  const b = across * radius;
  const slope = b * radius * offset;
  if (slope === 0) return ends;
  const c = radius * radius + offset * offset + depth * depth;
  const q = (b * c + radius * offset * (along * depth - across * offset)) / slope;
  return q > -1 && q < 1 ? Math.max(ends, openness(q, depth, radius, offset, across, along)) : ends;
}

/** 1 − cos of the angle between the axis and the rim point of azimuth cosine q, from the chord: precise when small. */
function openness(
  q: number,
  depth: number,
  radius: number,
  offset: number,
  across: number,
  along: number,
): number {
  const x = radius * q - offset;
  const ySquared = radius * radius * (1 - q * q);
  const length = Math.sqrt(x * x + ySquared + depth * depth);
  const dx = x / length - across;
  const dz = depth / length - along;
  return 0.5 * (dx * dx + ySquared / (length * length) + dz * dz);
}
