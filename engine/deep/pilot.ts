/**
 * The pilot run of deep transport: what a photon at each depth, energy and direction is worth to the figures asked
 * for, and from that where photons are split or ended and how far they fly.
 *
 * The figures are weighed by their own size, estimated by a sweep forwards: so a figure that one source photon in a
 * million contributes to counts as much as one to which every photon does (consistent adjoint-driven importance
 * sampling, J. C. Wagner and A. Haghighat, Nucl. Sci. Eng. 128 (1998) 186, with the forward weighing of Wagner,
 * Peplow and Mosher, Nucl. Sci. Eng. 176 (2014) 37). The pilot depends on the setup and its seed alone.
 */
import { doseCoefficient } from '../../materials/index.js';
import { makeFlightTables } from './flight.js';
import { collisionMatrices } from './collisions.js';
import { COSINE_BINS, COSINES, makeDeepGrid, type DeepGrid } from './grid.js';
import { makeStartPlan, type StartPlan } from './start-plan.js';
import { emittedOf } from './start.js';
import { sweepBackward, sweepForward, type ForwardFigures, type Response } from './sweep.js';
import { topEnergyKeV } from '../emission.js';
import { sharedDoubles, type Problem } from '../problem.js';
import type { DoseQuantity, Tally } from '../setup.js';

/** Kind of score that pilot figures stand for: a dose quantity, or energy where none is asked for. */
type Scored = DoseQuantity | 'energy';

/** What steers deep transport; indices are (slice, group, bin) if not said otherwise. */
export interface DeepPlan {
  readonly grid: DeepGrid;
  /** Worth of a photon in flight by what its next collision brings; the mean over source photons is 1. */
  readonly importance: Float64Array;
  /** Largest worth in any direction, with what the photon scores by leaving, by (slice, group). */
  readonly topImportance: Float64Array;
  /** How source photons are drawn. */
  readonly start: StartPlan;
  /** Where flights end; see deep/flight.ts. */
  readonly flights: Float64Array;
  /** Mean score per source photon at the far and the front face, roughly: what is small against it is left to chance. */
  readonly farScore: number;
  readonly frontScore: number;
}

/** Shares of the effort: figures behind, in front and inside the stack. */
interface Shares {
  readonly far: number;
  readonly front: number;
  readonly deposit: number;
  readonly depth: number;
}

/** Part of the effort for a face that goes to the number of photons, whatever their dose: it serves the spectrum. */
const NUMBER_SHARE = 0.2;
/** A fluence counts with 1/|w|, but not more than this: grazing photons are few. */
const LEAST_COSINE = 0.1;
/** Importances are kept above this share of the largest at the same depth, so that no photon is ended for certain. */
const LEAST_IMPORTANCE = 1e-6;
/** Makes the plan of a problem. */
export function makeDeepPlan(problem: Problem, tally: Tally): DeepPlan {
  const grid = makeDeepGrid(problem, topEnergyKeV(problem.emission));
  const matricesOfSlots = collisionMatrices(problem, grid);
  const matrices = Array.from(grid.layerOfSlice, (layer) => matricesOfSlots[problem.slotOfLayer[layer]]);
  const scored: Scored = tally.dose[0] ?? 'energy';
  const pieces = scorePieces(grid, scored);
  const source = emittedOf(problem, grid);
  const first = Float64Array.from(source.collisions);
  const born = Float64Array.from(source.photons);
  const forward = sweepForward(grid, matrices, source);
  const response = weighResponse(problem, grid, matrices, pieces, forward, sharesFor(tally));
  const worth = sweepBackward(grid, matrices, response);
  const mean = dot(first, worth.collision) + dot(born, worth.flight);
  const scale = mean > 0 ? 1 / mean : 0;
  const importance = shared(worth.flight.map((value) => value * scale));
  keepAlive(grid, importance);
  const topImportance = topOf(
    grid,
    worth.whole.map((value) => value * scale),
  );
  return {
    grid,
    start: makeStartPlan(problem, grid, importance),
    importance,
    topImportance,
    flights: makeFlightTables(grid, worth.collision),
    farScore: dot(forward.far, pieces.leaving),
    frontScore: dot(forward.front, pieces.leaving),
  };
}

function dot(a: Float64Array, b: Float64Array): number {
  return a.reduce((sum, value, i) => sum + value * b[i], 0);
}

function shared(values: Float64Array): Float64Array {
  const copy = sharedDoubles(values.length);
  copy.set(values);
  return copy;
}

/** Unweighed scores: of a photon that leaves by (group, bin), and of its path in matter by group. */
interface ScorePieces {
  readonly leaving: Float64Array;
  readonly path: Float64Array;
}

function scorePieces(grid: DeepGrid, scored: Scored): ScorePieces {
  const leaving = new Float64Array(grid.groups * COSINE_BINS);
  const path = new Float64Array(grid.groups);
  for (let g = 0; g < grid.groups; g++) {
    const energyKeV = grid.energiesKeV[g];
    path[g] = scored === 'energy' ? energyKeV : doseCoefficient(scored, energyKeV);
    for (let bin = 0; bin < COSINE_BINS; bin++) {
      const slant = scored === 'energy' ? 1 : Math.max(LEAST_COSINE, Math.abs(COSINES[bin]));
      leaving[g * COSINE_BINS + bin] = path[g] / slant;
    }
  }
  return { leaving, path };
}

function sharesFor({ dose, dosePoints, depthProfile }: Tally): Shares {
  const behind = dosePoints.length === 0 || dosePoints.some(({ zCm }) => zCm > 0);
  const inFront = dosePoints.some(({ zCm }) => zCm <= 0);
  return {
    far: behind ? 1 : 0.3,
    front: inFront ? 1 : dose.length > 0 ? 0.15 : 0.1,
    deposit: 0.1,
    depth: depthProfile === null ? 0 : 1,
  };
}

/** The response to sweep backwards from: each figure in units of its own size, times its share. */
function weighResponse(
  problem: Problem,
  grid: DeepGrid,
  matrices: ReturnType<typeof collisionMatrices>,
  { leaving, path }: ScorePieces,
  forward: ForwardFigures,
  shares: Shares,
): Response {
  const over = (share: number, size: number) => (size > 0 ? share / size : 0);
  const faceResponse = (left: Float64Array, share: number) => {
    const dose = over(share * (1 - NUMBER_SHARE), dot(left, leaving));
    const number = over(
      share * NUMBER_SHARE,
      left.reduce((sum, value) => sum + value, 0),
    );
    return leaving.map((value) => dose * value + number);
  };
  const far = faceResponse(forward.far, shares.far);
  const front = faceResponse(forward.front, shares.front);
  const collision = new Float64Array(grid.slices * grid.groups);
  for (let layer = 0; layer < problem.layers; layer++) {
    const [first, end] = [grid.firstSlice[layer] * grid.groups, grid.firstSlice[layer + 1] * grid.groups];
    const deposit = (i: number) => matrices[Math.floor(i / grid.groups)]?.depositedKeV[i % grid.groups] ?? 0;
    let depositedKeV = 0;
    for (let i = first; i < end; i++) depositedKeV += forward.collisions[i] * deposit(i);
    const weight = over(shares.deposit / problem.layers, depositedKeV);
    for (let i = first; i < end; i++) collision[i] += weight * deposit(i);
  }
  if (shares.depth > 0) addDepths(problem, grid, path, forward, shares.depth, collision);
  return { far, front, collision };
}

/** Every depth of the layer profiled counts alike. */
function addDepths(
  problem: Problem,
  grid: DeepGrid,
  path: Float64Array,
  forward: ForwardFigures,
  share: number,
  collision: Float64Array,
): void {
  const layer = problem.tally.dose.depthLayer;
  const [first, end] = [grid.firstSlice[layer], grid.firstSlice[layer + 1]];
  for (let i = first; i < end; i++) {
    const scoreOf = (g: number) => path[g] / Math.max(grid.opticalDepth[i * grid.groups + g], 1e-300);
    let size = 0;
    for (let g = 0; g < grid.groups; g++) size += forward.collisions[i * grid.groups + g] * scoreOf(g);
    if (size === 0) continue;
    const part =
      (share * (grid.edgesCm[i + 1] - grid.edgesCm[i])) / (grid.edgesCm[end] - grid.edgesCm[first]);
    for (let g = 0; g < grid.groups; g++) {
      collision[i * grid.groups + g] += (part * scoreOf(g)) / size;
    }
  }
}

/** Raises what is worth next to nothing. */
function keepAlive(grid: DeepGrid, importance: Float64Array): void {
  const perSlice = grid.groups * COSINE_BINS;
  for (let i = 0; i < grid.slices; i++) {
    const slice = importance.subarray(i * perSlice, (i + 1) * perSlice);
    const least = LEAST_IMPORTANCE * slice.reduce((top, value) => Math.max(top, value), 0);
    for (let k = 0; k < perSlice; k++) slice[k] = Math.max(slice[k], least);
  }
}

/** Largest worth by (slice, group), kept above nothing likewise. */
function topOf(grid: DeepGrid, worth: Float64Array): Float64Array {
  const raised = Float64Array.from(worth);
  keepAlive(grid, raised);
  const tops = sharedDoubles(grid.slices * grid.groups);
  raised.forEach((value, k) => {
    const group = Math.floor(k / COSINE_BINS);
    tops[group] = Math.max(tops[group], value);
  });
  return tops;
}
