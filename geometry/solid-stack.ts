/**
 * Layers between planes, each with an edge of its own: where a straight flight meets a surface, and which layer it
 * enters next. Beside a layer narrower than its neighbours is vacuum.
 *
 * A flight never decides by its coordinates which layer it is in: it carries the layer's number and only meets that
 * layer's surfaces. Layers are convex and ordered by depth, so a flight visits each at most once, always in the order
 * of its travel: it cannot loop or get lost between two layers, whatever the rounding. No length is compared with a
 * fixed small one: a stack scaled by a power of two gives the same bits.
 */

/** The edge of a layer, around the axis: none, a circle, or a rectangle (width along x, height along y). */
export type Edge =
  | { readonly kind: 'none' }
  | { readonly kind: 'radius'; readonly radiusCm: number }
  | { readonly kind: 'rectangle'; readonly widthCm: number; readonly heightCm: number };

export interface SolidLayer {
  readonly thicknessCm: number;
  readonly edge: Edge;
}

/** Compiled stack; sizes that do not limit are Infinity. */
export interface SolidStack {
  readonly layers: number;
  /** Layer l lies between planes l and l + 1. */
  readonly planesCm: Float64Array;
  readonly radiusSquaredCm2: Float64Array;
  /** 1/(2 R), 0 without a circle. */
  readonly inverseDiameterPerCm: Float64Array;
  readonly halfWidthCm: Float64Array;
  readonly halfHeightCm: Float64Array;
}

/** Slots of a ray: position in cm, then direction cosines. z runs from the front face (0) into the stack. */
export const X = 0;
export const Y = 1;
export const Z = 2;
export const U = 3;
export const V = 4;
export const W = 5;
export const RAY_LENGTH = 6;

/**
 * How a ray left that meets no layer any more: through a face of the last layer it was in, on the side away from the
 * source or towards it, or through that layer's lateral surface. NEVER: it met no layer at all.
 */
export const LEFT_FAR = -1;
export const LEFT_FRONT = -2;
export const LEFT_SIDE = -3;
export const NEVER = -4;

/** Position may be off its layer by rounding: this share of the layer's size, not more. */
const ROUNDING = 1e-9;

/** Compiles a stack; its arrays are in shared memory. */
export function makeSolidStack(layers: readonly SolidLayer[]): SolidStack {
  const fill = (value: (edge: Edge) => number) => shared(layers.map(({ edge }) => value(edge)));
  const planes = [0];
  layers.forEach(({ thicknessCm }, l) => planes.push(planes[l] + thicknessCm));
  return {
    layers: layers.length,
    planesCm: shared(planes),
    radiusSquaredCm2: fill((edge) => (edge.kind === 'radius' ? edge.radiusCm ** 2 : Infinity)),
    inverseDiameterPerCm: fill((edge) => (edge.kind === 'radius' ? 0.5 / edge.radiusCm : 0)),
    halfWidthCm: fill((edge) => (edge.kind === 'rectangle' ? edge.widthCm / 2 : Infinity)),
    halfHeightCm: fill((edge) => (edge.kind === 'rectangle' ? edge.heightCm / 2 : Infinity)),
  };
}

function shared(values: readonly number[]): Float64Array {
  const array = new Float64Array(new SharedArrayBuffer(8 * values.length));
  array.set(values);
  return array;
}

/** Whether a point lies inside the edge of a layer, at whatever depth. */
export function isInsideEdge(stack: SolidStack, layer: number, x: number, y: number): boolean {
  return (
    x * x + y * y < stack.radiusSquaredCm2[layer] &&
    Math.abs(x) < stack.halfWidthCm[layer] &&
    Math.abs(y) < stack.halfHeightCm[layer]
  );
}

/** Whether a point lies in a layer. */
export function holds(stack: SolidStack, layer: number, x: number, y: number, z: number): boolean {
  return z >= stack.planesCm[layer] && z <= stack.planesCm[layer + 1] && isInsideEdge(stack, layer, x, y);
}

/** False for a ray whose place is off its layer by more than rounding, or is not a number: it got lost. */
export function isInPlace(stack: SolidStack, layer: number, ray: Float64Array): boolean {
  const x = ray[X];
  const y = ray[Y];
  const z = ray[Z];
  const slack = ROUNDING * stack.planesCm[stack.layers];
  return (
    z >= stack.planesCm[layer] - slack &&
    z <= stack.planesCm[layer + 1] + slack &&
    x * x + y * y <= stack.radiusSquaredCm2[layer] * (1 + ROUNDING) &&
    Math.abs(x) <= stack.halfWidthCm[layer] * (1 + ROUNDING) &&
    Math.abs(y) <= stack.halfHeightCm[layer] * (1 + ROUNDING)
  );
}

/** Distance along a ray inside a layer to the plane it flies towards. */
export function distanceToPlane(stack: SolidStack, layer: number, ray: Float64Array): number {
  const w = ray[W];
  if (w > 0) return Math.max(0, (stack.planesCm[layer + 1] - ray[Z]) / w);
  if (w < 0) return Math.max(0, (stack.planesCm[layer] - ray[Z]) / w);
  return Infinity;
}

/** A distance that a point in a layer is at least away from its surface, cm; exact at planes and straight edges. */
export function clearance(stack: SolidStack, layer: number, ray: Float64Array): number {
  const x = ray[X];
  const y = ray[Y];
  const z = ray[Z];
  const planesCm = Math.min(z - stack.planesCm[layer], stack.planesCm[layer + 1] - z);
  const inverseDiameter = stack.inverseDiameterPerCm[layer];
  // R − r = (R² − r²)/(R + r), and r is R at most.
  const edgeCm =
    inverseDiameter > 0
      ? (stack.radiusSquaredCm2[layer] - x * x - y * y) * inverseDiameter
      : Math.min(stack.halfWidthCm[layer] - Math.abs(x), stack.halfHeightCm[layer] - Math.abs(y));
  return Math.max(0, Math.min(planesCm, edgeCm));
}

/**
 * Distance along a ray inside a layer to its edge; Infinity where the ray is still inside the edge after `withinCm`.
 */
export function distanceToEdge(
  stack: SolidStack,
  layer: number,
  ray: Float64Array,
  withinCm: number,
): number {
  const x = ray[X];
  const y = ray[Y];
  const u = ray[U];
  const v = ray[V];
  if (isInsideEdge(stack, layer, x + withinCm * u, y + withinCm * v)) return Infinity;
  const radiusSquared = stack.radiusSquaredCm2[layer];
  if (radiusSquared < Infinity) {
    const across = u * u + v * v;
    if (across === 0) return Infinity;
    const moment = x * v - y * u;
    const root = Math.sqrt(Math.max(0, across * radiusSquared - moment * moment));
    return Math.max(0, (root - x * u - y * v) / across);
  }
  const alongX = u === 0 ? Infinity : (stack.halfWidthCm[layer] - (u > 0 ? x : -x)) / Math.abs(u);
  const alongY = v === 0 ? Infinity : (stack.halfHeightCm[layer] - (v > 0 ? y : -y)) / Math.abs(v);
  return Math.max(0, Math.min(alongX, alongY));
}

/** Distances along a line at which it comes into and out of the endless prism over an edge; out ≤ in if it misses. */
const chord = new Float64Array(2);

function setChord(stack: SolidStack, layer: number, ray: Float64Array): void {
  const x = ray[X];
  const y = ray[Y];
  const u = ray[U];
  const v = ray[V];
  const radiusSquared = stack.radiusSquaredCm2[layer];
  chord[0] = -Infinity;
  chord[1] = Infinity;
  if (radiusSquared < Infinity) {
    // From the distance of the line to the axis, not that of its start: exact also from far away.
    const across = u * u + v * v;
    const moment = x * v - y * u;
    const square = across * radiusSquared - moment * moment;
    if (square > 0) {
      const root = Math.sqrt(square);
      chord[0] = (-root - x * u - y * v) / across;
      chord[1] = (root - x * u - y * v) / across;
    } else if (across > 0 || x * x + y * y >= radiusSquared) {
      chord[1] = -Infinity;
    }
    return;
  }
  clipChord(x, u, stack.halfWidthCm[layer]);
  clipChord(y, v, stack.halfHeightCm[layer]);
}

/** Cuts the chord down to where |at + slope t| is below `half`. */
function clipChord(at: number, slope: number, half: number): void {
  if (slope === 0) {
    if (Math.abs(at) >= half) chord[1] = -Infinity;
    return;
  }
  const speed = Math.abs(slope);
  const forward = slope > 0 ? at : -at;
  chord[0] = Math.max(chord[0], (-half - forward) / speed);
  chord[1] = Math.min(chord[1], (half - forward) / speed);
}

/**
 * Moves a ray that is in no layer, and before layer `from` on its way, to the first one it meets among that and those
 * behind it.
 *
 * @returns the layer it enters, or NEVER (then it has not been moved)
 */
export function enterStack(stack: SolidStack, from: number, ray: Float64Array): number {
  const w = ray[W];
  if (w === 0) return NEVER;
  const z = ray[Z];
  const forward = w > 0 ? 1 : 0;
  for (let layer = from; layer >= 0 && layer < stack.layers; layer += 2 * forward - 1) {
    const near = stack.planesCm[layer + 1 - forward];
    const nearCm = (near - z) / w;
    if (isInsideEdge(stack, layer, ray[X] + nearCm * ray[U], ray[Y] + nearCm * ray[V])) {
      move(ray, nearCm);
      ray[Z] = near;
      return layer;
    }
    setChord(stack, layer, ray);
    if (chord[0] >= nearCm && chord[0] < Math.min(chord[1], (stack.planesCm[layer + forward] - z) / w)) {
      move(ray, chord[0]);
      return layer;
    }
  }
  return NEVER;
}

/**
 * Takes a ray out of its layer, `planeCm` before the plane and `edgeCm` before the edge it flies towards, and on to
 * the next layer it meets.
 *
 * @returns the layer it enters, or how it left
 */
export function crossOut(
  stack: SolidStack,
  layer: number,
  ray: Float64Array,
  planeCm: number,
  edgeCm: number,
): number {
  const forward = ray[W] > 0 ? 1 : 0;
  let left = LEFT_SIDE;
  if (planeCm <= edgeCm) {
    left = forward === 1 ? LEFT_FAR : LEFT_FRONT;
    move(ray, planeCm);
    ray[Z] = stack.planesCm[layer + forward];
  } else {
    move(ray, edgeCm);
  }
  const next = layer + 2 * forward - 1;
  if (next < 0 || next === stack.layers) return left;
  const entered = enterStack(stack, next, ray);
  return entered === NEVER ? left : entered;
}

/** Moves a ray along its direction. */
export function move(ray: Float64Array, distanceCm: number): void {
  ray[X] += distanceCm * ray[U];
  ray[Y] += distanceCm * ray[V];
  ray[Z] += distanceCm * ray[W];
}

/** The straight way of a ray through a stack: for each layer it crosses, where it enters and how far it flies there. */
export class Track {
  count = 0;
  readonly layer: Int32Array;
  /** x, y, z of the point of entry, then the length, cm. */
  readonly piece: Float64Array;

  constructor(layers: number) {
    this.layer = new Int32Array(layers);
    this.piece = new Float64Array(4 * layers);
  }
}

/**
 * Follows a ray from inside `layer` straight through the stack and writes down its pieces; the ray itself is moved.
 *
 * @returns how it left
 */
export function traceThrough(stack: SolidStack, layer: number, ray: Float64Array, track: Track): number {
  let count = 0;
  while (layer >= 0) {
    const planeCm = distanceToPlane(stack, layer, ray);
    const edgeCm = distanceToEdge(stack, layer, ray, planeCm);
    const at = 4 * count;
    track.layer[count] = layer;
    track.piece[at] = ray[X];
    track.piece[at + 1] = ray[Y];
    track.piece[at + 2] = ray[Z];
    track.piece[at + 3] = Math.min(planeCm, edgeCm);
    count++;
    layer = crossOut(stack, layer, ray, planeCm, edgeCm);
  }
  track.count = count;
  return layer;
}
