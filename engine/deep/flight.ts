/**
 * Where a photon collides next. The flight must end in the stack, and where is drawn slice by slice in proportion to the
 * chance of a collision there times what a collision is worth there: then all collisions bring about the same. A part
 * of the flights is drawn by the chance alone, which bounds the weights. The weight makes up for both.
 */
import { W, Z } from '../../geometry/index.js';
import { COSINE_BINS, COSINES, cosineBin, type DeepGrid } from './grid.js';
import { depthToFar, depthToFront } from './paths.js';
import { bucketOf } from '../energy-grid.js';
import { GUIDE_STEPS } from './slices.js';
import { ENERGY } from '../photon.js';
import { CELL_LENGTH, sharedDoubles, type Problem } from '../problem.js';
import { nextOpenUniform, nextUniform, type StreamState } from '../random.js';

/** Part of the flights drawn by the chance of a collision alone. */
const ANALOG_PART = 0.1;

/**
 * Tables of the draw by (group, bin, edge of slices): ln of the worth of what lies beyond the edge times the chance to
 * come as far from the end of the stack where flights of that bin begin. Differences along a flight are logarithms of
 * the share of collisions that lie beyond; they fall to −∞ at the face it heads for.
 *
 * @param collisionWorth by (slice, group, bin)
 */
export function makeFlightTables(grid: DeepGrid, collisionWorth: Float64Array): Float64Array {
  const { groups, slices, opticalDepth } = grid;
  const tables = sharedDoubles(groups * COSINE_BINS * (slices + 1));
  for (let group = 0; group < groups; group++) {
    for (let bin = 0; bin < COSINE_BINS; bin++) {
      const base = (group * COSINE_BINS + bin) * (slices + 1);
      const step = COSINES[bin] > 0 ? -1 : 1;
      const worthAt = (i: number) => collisionWorth[(i * groups + group) * COSINE_BINS + bin];
      let isWorthless = true;
      for (let i = 0; i < slices && isWorthless; i++) isWorthless = worthAt(i) === 0;
      // From the face the flight heads for, back to where it may start; `path` is what it has then behind it.
      let beyond = 0;
      let path = 0;
      let edge = step < 0 ? slices : 0;
      const paths = new Float64Array(slices + 1);
      tables[base + edge] = -Infinity;
      for (let n = 0; n < slices; n++) {
        const i = step < 0 ? edge - 1 : edge;
        const depth = opticalDepth[i * groups + group] / Math.abs(COSINES[bin]);
        const through = Math.exp(-depth);
        beyond = beyond * through + (isWorthless ? 1 : worthAt(i)) * (1 - through);
        path += depth;
        edge += step;
        paths[edge] = path;
        tables[base + edge] = Math.log(beyond);
      }
      for (let e = 0; e <= slices; e++) tables[base + e] += paths[e];
    }
  }
  return tables;
}

/** Result of the last draw: where the collision is, and the factor on the weight. */
export class Flight {
  z = 0;
  layer = 0;
  slice = 0;
  private readonly grid: DeepGrid;
  private readonly tables: Float64Array;

  constructor(
    private readonly problem: Problem,
    private readonly random: StreamState,
  ) {
    this.grid = problem.deep!.plan.grid;
    this.tables = problem.deep!.plan.flights;
  }

  /** Slice that holds depth z of a layer. */
  sliceAt(z: number, layer: number): number {
    const { firstSlice, edgesCm, sliceGuide, guidePerCm } = this.grid;
    const step = ((z - this.problem.boundariesCm[layer]) * guidePerCm[layer]) | 0;
    const last = firstSlice[layer + 1] - 1;
    let slice =
      sliceGuide[layer * GUIDE_STEPS + (step < 0 ? 0 : step >= GUIDE_STEPS ? GUIDE_STEPS - 1 : step)];
    while (slice < last && z >= edgesCm[slice + 1]) slice++;
    return slice;
  }

  /** Draws the next collision of a photon in `layer`. Returns the factor on its weight, 0 when nothing lies ahead. */
  draw(photon: Float64Array, layer: number, cell: number): number {
    const { problem, random } = this;
    const w = photon[W];
    const z = photon[Z];
    const energyKeV = photon[ENERGY];
    if (w === 0) return 0;
    const toFace = w > 0 ? depthToFar : depthToFront;
    const reach = -Math.expm1(-toFace(problem, energyKeV, cell, z, layer) / Math.abs(w));
    if (!(reach > 0)) return 0;
    const start = this.sliceAt(z, layer);
    const base = this.tableOf(energyKeV, w);
    const here = this.levelAt(base, start, z, w > 0);
    const byChance = nextUniform(random) < ANALOG_PART;
    if (byChance) this.drawByChance(photon, layer, cell, reach);
    else this.drawSlice(base, start, here, w > 0);

    // Chance of a collision in the slice, and the place inside it.
    const { edgesCm, layerOfSlice } = this.grid;
    const slice = this.slice;
    const own = layerOfSlice[slice];
    const isOwn = slice === start;
    const nearCm = isOwn ? z : edgesCm[w > 0 ? slice : slice + 1];
    const endCm = w > 0 ? Math.max(nearCm, edgesCm[slice + 1]) : Math.min(nearCm, edgesCm[slice]);
    const perCm = this.attenuation(own, cell, energyKeV);
    const before = isOwn ? 0 : this.pathTo(photon, layer, cell, own, nearCm);
    const within = ((endCm - nearCm) * perCm) / w;
    const inside = -Math.expm1(-within);
    const chance = Math.exp(-before) * inside;
    if (!(chance > 0)) return 0;
    this.layer = own;
    if (!byChance) {
      const path = -Math.log1p(-nextOpenUniform(random) * inside);
      this.z = path >= within ? endCm : nearCm + (path * w) / perCm;
    }
    const share = this.shareOf(base, start, here, slice, w > 0);
    return chance / ((1 - ANALOG_PART) * share + (ANALOG_PART * chance) / reach);
  }

  private tableOf(energyKeV: number, w: number): number {
    const { groupOfBucket, slices } = this.grid;
    return (groupOfBucket[bucketOf(energyKeV)] * COSINE_BINS + cosineBin(w)) * (slices + 1);
  }

  /** Table at the place of the photon, between the edges of its slice. */
  private levelAt(base: number, slice: number, z: number, forwards: boolean): number {
    const { edgesCm } = this.grid;
    const inside = (z - edgesCm[slice]) / (edgesCm[slice + 1] - edgesCm[slice]);
    const part = Math.max(0, Math.min(1, forwards ? inside : 1 - inside));
    const from = this.tables[base + slice + (forwards ? 0 : 1)];
    const to = this.tables[base + slice + (forwards ? 1 : 0)];
    // Towards the face the level falls without end; the slice there holds all that is left.
    return to === -Infinity ? from : from + part * (to - from);
  }

  /** Share of the collisions drawn by worth that fall into a slice. */
  private shareOf(base: number, start: number, here: number, slice: number, forwards: boolean): number {
    if (here === -Infinity) return 0;
    const { tables } = this;
    const end = Math.exp(tables[base + slice + (forwards ? 1 : 0)] - here);
    if (slice === start) return 1 - end;
    return Math.exp(tables[base + slice + (forwards ? 0 : 1)] - here) - end;
  }

  private drawSlice(base: number, start: number, here: number, forwards: boolean): void {
    const { tables } = this;
    const level = here + Math.log(nextOpenUniform(this.random));
    if (forwards) {
      // The last edge that is still above the level.
      let low = start;
      let high = this.grid.slices;
      while (high - low > 1) {
        const middle = (low + high) >> 1;
        if (tables[base + middle] >= level) low = middle;
        else high = middle;
      }
      this.slice = low;
    } else {
      let low = 0;
      let high = start + 1;
      while (high - low > 1) {
        const middle = (low + high) >> 1;
        if (tables[base + middle] >= level) high = middle;
        else low = middle;
      }
      this.slice = high - 1;
    }
  }

  /** Draws a place by the chance of a collision, given that there is one. */
  private drawByChance(photon: Float64Array, layer: number, cell: number, reach: number): void {
    const { problem } = this;
    const w = photon[W];
    const step = w > 0 ? 1 : -1;
    let left = -Math.log1p(-nextOpenUniform(this.random) * reach);
    let z = photon[Z];
    let last = z;
    let lastLayer = layer;
    for (let l = layer; l >= 0 && l < problem.layers; l += step) {
      const boundary = problem.boundariesCm[w > 0 ? l + 1 : l];
      const perCm = this.attenuation(l, cell, photon[ENERGY]);
      const ahead = ((boundary - z) * perCm) / w;
      if (perCm > 0) {
        // Rounding may leave a rest behind the last matter: then the collision is at its face.
        last = left <= ahead ? z + (left * w) / perCm : boundary;
        lastLayer = l;
        if (left <= ahead) break;
      }
      left -= ahead;
      z = boundary;
    }
    this.z = last;
    this.layer = lastLayer;
    this.slice = this.sliceAt(last, lastLayer);
  }

  /** Optical path to depth `endCm` of layer `to`. */
  private pathTo(photon: Float64Array, layer: number, cell: number, to: number, endCm: number): number {
    const { boundariesCm } = this.problem;
    const w = photon[W];
    const step = w > 0 ? 1 : -1;
    let z = photon[Z];
    let depth = 0;
    for (let l = layer; l !== to; l += step) {
      const boundary = boundariesCm[w > 0 ? l + 1 : l];
      depth += (boundary - z) * this.attenuation(l, cell, photon[ENERGY]);
      z = boundary;
    }
    return (depth + (endCm - z) * this.attenuation(to, cell, photon[ENERGY])) / w;
  }

  private attenuation(layer: number, cell: number, energyKeV: number): number {
    const { cells, cellCount, slotOfLayer } = this.problem;
    const at = (slotOfLayer[layer] * cellCount + cell) * CELL_LENGTH;
    return cells[at] + cells[at + 1] * energyKeV;
  }
}
