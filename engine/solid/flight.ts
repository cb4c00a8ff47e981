/** Flights of photons through a stack whose layers have edges. */
import {
  LEFT_SIDE,
  Track,
  U,
  V,
  W,
  X,
  Y,
  Z,
  crossOut,
  distanceToEdge,
  distanceToPlane,
  holds,
  isInPlace,
  move,
  traceThrough,
  type SolidStack,
} from '../../geometry/index.js';
import { nextOpticalLength } from '../optical-length.js';
import { ENERGY } from '../photon.js';
import type { Site } from '../physics/interact.js';
import { CELL_LENGTH, type Problem } from '../problem.js';
import { nextOpenUniform, type StreamState } from '../random.js';

/**
 * Flies a photon from inside `layer` to its next collision or out of the stack.
 *
 * @returns the layer of the collision, or how it left
 */
export function fly(
  problem: Problem,
  stack: SolidStack,
  photon: Float64Array,
  layer: number,
  cell: number,
  site: Site,
): number {
  const { cells, cellCount, slotOfLayer } = problem;
  const energyKeV = photon[ENERGY];
  let tau = nextOpticalLength(site.random);
  for (;;) {
    const at = (slotOfLayer[layer] * cellCount + cell) * CELL_LENGTH;
    const attenuation = cells[at] + cells[at + 1] * energyKeV;
    const pathCm = tau / attenuation;
    const x = photon[X] + pathCm * photon[U];
    const y = photon[Y] + pathCm * photon[V];
    const z = photon[Z] + pathCm * photon[W];
    // Layers are convex: with both ends the whole flight lies inside.
    if (holds(stack, layer, x, y, z)) {
      photon[X] = x;
      photon[Y] = y;
      photon[Z] = z;
      return layer;
    }
    if (!isInPlace(stack, layer, photon)) site.strayed++;
    const planeCm = distanceToPlane(stack, layer, photon);
    const edgeCm = distanceToEdge(stack, layer, photon, planeCm);
    const outCm = Math.min(planeCm, edgeCm);
    if (outCm === Infinity) {
      // Along the planes of an endless vacuum there is nothing to meet.
      site.strayed++;
      return LEFT_SIDE;
    }
    // The end was outside by rounding alone.
    if (pathCm <= outCm) {
      move(photon, pathCm);
      return layer;
    }
    tau = Math.max(0, tau - outCm * attenuation);
    layer = crossOut(stack, layer, photon, planeCm, edgeCm);
    if (layer < 0) return layer;
  }
}

/** The first flight of a biased history: through untouched, and to a collision on the same way. */
export class FirstFlight {
  /** Share that collides, 1 − e^−τ. */
  collidedShare = 0;
  /** How the untouched share leaves. */
  left = LEFT_SIDE;
  /** Layer of the collision; the photon stands there. */
  layer = 0;
  private readonly track: Track;
  /** Optical length from the start to the end of each piece of the track. */
  private readonly depth: Float64Array;

  constructor(layers: number) {
    this.track = new Track(layers);
    this.depth = new Float64Array(layers);
  }

  /** Follows the photon from inside `layer`, and puts it to a collision if any is possible. */
  play(
    problem: Problem,
    stack: SolidStack,
    photon: Float64Array,
    layer: number,
    cell: number,
    random: StreamState,
  ): void {
    const { cells, cellCount, slotOfLayer } = problem;
    const { track, depth } = this;
    const energyKeV = photon[ENERGY];
    this.left = traceThrough(stack, layer, photon, track);
    let total = 0;
    for (let i = 0; i < track.count; i++) {
      const at = (slotOfLayer[track.layer[i]] * cellCount + cell) * CELL_LENGTH;
      total += track.piece[4 * i + 3] * (cells[at] + cells[at + 1] * energyKeV);
      depth[i] = total;
    }
    this.collidedShare = -Math.expm1(-total);
    if (total === 0) return;
    // Law of flight, cut off at the far end of the way.
    const tau = Math.min(total, -Math.log1p(-this.collidedShare * nextOpenUniform(random)));
    let i = 0;
    while (tau > depth[i]) i++;
    const before = i > 0 ? depth[i - 1] : 0;
    const part = (tau - before) / (depth[i] - before);
    this.layer = track.layer[i];
    photon[X] = track.piece[4 * i];
    photon[Y] = track.piece[4 * i + 1];
    photon[Z] = track.piece[4 * i + 2];
    move(photon, part * track.piece[4 * i + 3]);
  }
}
