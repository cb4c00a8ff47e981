/**
 * Sweeps over the coarse grid, slice by slice along each direction: how many collisions photons make (forwards), and
 * what a photon is worth (backwards). Inside a slice what is emitted, or what a collision is worth, counts as even.
 * The two are exact transposes of one another, so that either way gives the same mean score.
 */
import type { CollisionMatrix } from './collisions.js';
import { COSINE_BINS, COSINES, type DeepGrid } from './grid.js';

/** Rounds over one group, whose photons may scatter into it again; enough where few are absorbed. */
const MAX_ROUNDS = 60;
const SETTLED = 1e-3;

/** Flights within one group: what a slice lets through, and the mean of that over starts inside it. */
class Flights {
  readonly through: Float64Array;
  readonly mean: Float64Array;

  constructor(grid: DeepGrid, group: number) {
    this.through = new Float64Array(grid.slices * COSINE_BINS);
    this.mean = new Float64Array(grid.slices * COSINE_BINS);
    for (let i = 0; i < grid.slices; i++) {
      const depth = grid.opticalDepth[i * grid.groups + group];
      for (let bin = 0; bin < COSINE_BINS; bin++) {
        const path = depth / Math.abs(COSINES[bin]);
        this.through[i * COSINE_BINS + bin] = Math.exp(-path);
        this.mean[i * COSINE_BINS + bin] = path < 1e-6 ? 1 - path / 2 : -Math.expm1(-path) / path;
      }
    }
  }
}

/** Slices in the order a photon of the bin crosses them (`forwards`), or against it. */
function order(slices: number, bin: number, forwards: boolean): { first: number; step: number } {
  const rising = bin >= COSINE_BINS / 2 === forwards;
  return rising ? { first: 0, step: 1 } : { first: slices - 1, step: -1 };
}

/** Emissions on the grid; indices are (slice, group, bin). */
export interface Emitted {
  readonly collisions: Float64Array;
  readonly photons: Float64Array;
}

export interface ForwardFigures {
  /** All collisions, by (slice, group). */
  readonly collisions: Float64Array;
  /** Photons that leave through the far face and the front face by (group, bin), without first flights. */
  readonly far: Float64Array;
  readonly front: Float64Array;
}

/**
 * @param matrices outcome of collisions, by slice
 * @param source photons emitted in slices, and collisions that photons from outside make on their first flight; both
 *   arrays are used up
 */
export function sweepForward(
  grid: DeepGrid,
  matrices: readonly (CollisionMatrix | null)[],
  source: Emitted,
): ForwardFigures {
  const { groups, slices } = grid;
  const perSlice = groups * COSINE_BINS;
  const figures = {
    collisions: new Float64Array(slices * groups),
    far: new Float64Array(perSlice),
    front: new Float64Array(perSlice),
  };
  const { photons, collisions } = source;
  const inGroup = new Float64Array(slices * COSINE_BINS);
  for (let group = groups - 1; group >= 0; group--) {
    const flights = new Flights(grid, group);
    // Photons of the round: those from outside, then those scattered within the group, until few are left.
    let round = gather(photons, grid, group);
    addOutcomes(grid, matrices, group, gather(collisions, grid, group), photons, round, figures.collisions);
    const start = round.reduce((sum, value) => sum + value, 0);
    for (let n = 0; n < MAX_ROUNDS; n++) {
      inGroup.fill(0);
      for (let bin = 0; bin < COSINE_BINS; bin++) {
        const { first, step } = order(slices, bin, true);
        let flow = 0;
        for (let n = 0, i = first; n < slices; n++, i += step) {
          const at = i * COSINE_BINS + bin;
          const emitted = round[at];
          inGroup[at] = flow * (1 - flights.through[at]) + emitted * (1 - flights.mean[at]);
          flow = flow * flights.through[at] + emitted * flights.mean[at];
        }
        const exit = step > 0 ? figures.far : figures.front;
        exit[group * COSINE_BINS + bin] += flow;
      }
      round = new Float64Array(slices * COSINE_BINS);
      addOutcomes(grid, matrices, group, inGroup, photons, round, figures.collisions);
      if (round.reduce((sum, value) => sum + value, 0) <= SETTLED * start) break;
    }
  }
  return figures;
}

function gather(values: Float64Array, grid: DeepGrid, group: number): Float64Array {
  const own = new Float64Array(grid.slices * COSINE_BINS);
  for (let i = 0; i < grid.slices; i++) {
    const from = (i * grid.groups + group) * COSINE_BINS;
    own.set(values.subarray(from, from + COSINE_BINS), i * COSINE_BINS);
  }
  return own;
}

/** Counts collisions of a group and adds what comes out of them: to `photons` below the group, else to `round`. */
function addOutcomes(
  grid: DeepGrid,
  matrices: readonly (CollisionMatrix | null)[],
  group: number,
  collisions: Float64Array,
  photons: Float64Array,
  round: Float64Array,
  counted: Float64Array,
): void {
  const below = group * COSINE_BINS;
  for (let i = 0; i < grid.slices; i++) {
    const matrix = matrices[i];
    if (matrix === null) continue;
    const slice = i * grid.groups * COSINE_BINS;
    for (let bin = 0; bin < COSINE_BINS; bin++) {
      const count = collisions[i * COSINE_BINS + bin];
      if (count === 0) continue;
      counted[i * grid.groups + group] += count;
      const row = matrix.rows[group * COSINE_BINS + bin];
      for (let to = 0; to < below; to++) photons[slice + to] += count * row[to];
      for (let to = 0; to < COSINE_BINS; to++) round[i * COSINE_BINS + to] += count * row[below + to];
    }
  }
}

/** What scores: photons that leave, by (group, bin), and collisions, by (slice, group). */
export interface Response {
  readonly far: Float64Array;
  readonly front: Float64Array;
  readonly collision: Float64Array;
}

/** Worth by (slice, group, bin): of a collision, and of a photon in flight but for its leaving without one. */
export interface Worth {
  readonly collision: Float64Array;
  readonly flight: Float64Array;
  /** Of a photon in flight, with what it scores by leaving. */
  readonly whole: Float64Array;
}

/** @param matrices outcome of collisions, by slice */
export function sweepBackward(
  grid: DeepGrid,
  matrices: readonly (CollisionMatrix | null)[],
  response: Response,
): Worth {
  const { groups, slices } = grid;
  const length = slices * groups * COSINE_BINS;
  const whole = new Float64Array(length);
  const worth = { collision: new Float64Array(length), flight: new Float64Array(length), whole };
  for (let group = 0; group < groups; group++) {
    const flights = new Flights(grid, group);
    const leaving = worthOfLeaving(grid, flights, response, group);
    const fixed = worthBelow(grid, matrices, response, whole, group);
    let collision = fixed;
    let flight = worthOfFlight(grid, flights, collision);
    for (let n = 0; n < MAX_ROUNDS; n++) {
      const next = addWithin(grid, matrices, group, fixed, flight, leaving);
      const change = largestChange(collision, next);
      collision = next;
      flight = worthOfFlight(grid, flights, collision);
      if (change <= SETTLED) break;
    }
    for (let i = 0; i < slices; i++) {
      for (let bin = 0; bin < COSINE_BINS; bin++) {
        const at = (i * groups + group) * COSINE_BINS + bin;
        const own = i * COSINE_BINS + bin;
        worth.collision[at] = collision[own];
        worth.flight[at] = flight[own];
        whole[at] = flight[own] + leaving[own];
      }
    }
  }
  return worth;
}

/** Mean over starts in each slice of what a photon scores by leaving on this flight. */
function worthOfLeaving(grid: DeepGrid, flights: Flights, response: Response, group: number): Float64Array {
  const leaving = new Float64Array(grid.slices * COSINE_BINS);
  for (let bin = 0; bin < COSINE_BINS; bin++) {
    const { first, step } = order(grid.slices, bin, false);
    let value = (step > 0 ? response.front : response.far)[group * COSINE_BINS + bin];
    for (let n = 0, i = first; n < grid.slices; n++, i += step) {
      const at = i * COSINE_BINS + bin;
      leaving[at] = value * flights.mean[at];
      value *= flights.through[at];
    }
  }
  return leaving;
}

/** What a collision scores itself and through the photons it sends into lower groups. */
function worthBelow(
  grid: DeepGrid,
  matrices: readonly (CollisionMatrix | null)[],
  response: Response,
  whole: Float64Array,
  group: number,
): Float64Array {
  const worth = new Float64Array(grid.slices * COSINE_BINS);
  const below = group * COSINE_BINS;
  for (let i = 0; i < grid.slices; i++) {
    const matrix = matrices[i];
    if (matrix === null) continue;
    const slice = i * grid.groups * COSINE_BINS;
    for (let bin = 0; bin < COSINE_BINS; bin++) {
      const row = matrix.rows[group * COSINE_BINS + bin];
      let sum = response.collision[i * grid.groups + group];
      for (let to = 0; to < below; to++) sum += row[to] * whole[slice + to];
      worth[i * COSINE_BINS + bin] = sum;
    }
  }
  return worth;
}

function addWithin(
  grid: DeepGrid,
  matrices: readonly (CollisionMatrix | null)[],
  group: number,
  fixed: Float64Array,
  flight: Float64Array,
  leaving: Float64Array,
): Float64Array {
  const worth = Float64Array.from(fixed);
  const below = group * COSINE_BINS;
  for (let i = 0; i < grid.slices; i++) {
    const matrix = matrices[i];
    if (matrix === null) continue;
    for (let bin = 0; bin < COSINE_BINS; bin++) {
      const row = matrix.rows[group * COSINE_BINS + bin];
      let sum = 0;
      for (let to = 0; to < COSINE_BINS; to++) {
        sum += row[below + to] * (flight[i * COSINE_BINS + to] + leaving[i * COSINE_BINS + to]);
      }
      worth[i * COSINE_BINS + bin] += sum;
    }
  }
  return worth;
}

/** Mean over starts in each slice of what the next collision of a flight is worth. */
function worthOfFlight(grid: DeepGrid, flights: Flights, collision: Float64Array): Float64Array {
  const worth = new Float64Array(collision.length);
  for (let bin = 0; bin < COSINE_BINS; bin++) {
    const { first, step } = order(grid.slices, bin, false);
    let beyond = 0;
    for (let n = 0, i = first; n < grid.slices; n++, i += step) {
      const at = i * COSINE_BINS + bin;
      worth[at] = collision[at] + (beyond - collision[at]) * flights.mean[at];
      beyond = collision[at] + (beyond - collision[at]) * flights.through[at];
    }
  }
  return worth;
}

function largestChange(before: Float64Array, after: Float64Array): number {
  let change = 0;
  for (let i = 0; i < after.length; i++) {
    if (after[i] > 0) change = Math.max(change, (after[i] - before[i]) / after[i]);
  }
  return change;
}
