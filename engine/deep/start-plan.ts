/**
 * How source photons are drawn so that all are worth the same: line, depth and direction in proportion to their share
 * times their importance. The weight makes up for it. A tenth are drawn by their share alone, which bounds the weights.
 */
import { COSINE_BINS, COSINE_BOUNDS, placeInGroups, type DeepGrid } from './grid.js';
import { sharedDoubles, type Problem } from '../problem.js';

/** Part drawn by the shares alone. */
const ANALOG_PART = 0.1;

export interface StartPlan {
  /** Cumulative choice of a line or bin of the spectrum, and the weight that goes with it. */
  readonly lineCumulative: Float64Array;
  readonly lineWeight: Float64Array;
  /**
   * Start cells, slices times direction bins: those of the source layer, or the front face alone. By (group, cell):
   * cumulative choice and weight.
   */
  readonly firstSlice: number;
  readonly slices: number;
  readonly cellCumulative: Float64Array;
  readonly cellWeight: Float64Array;
}

/** @param importance by (slice, group, bin) */
export function makeStartPlan(problem: Problem, grid: DeepGrid, importance: Float64Array): StartPlan {
  const isInside = problem.source.kind === 'embedded';
  const firstSlice = isInside ? grid.firstSlice[problem.sourceLayer] : 0;
  const slices = isInside ? grid.firstSlice[problem.sourceLayer + 1] - firstSlice : 1;
  const shares = cellShares(problem, grid, firstSlice, slices);
  const cells = slices * COSINE_BINS;
  const cellCumulative = sharedDoubles(grid.groups * cells);
  const cellWeight = sharedDoubles(grid.groups * cells);
  const worths = Array.from({ length: grid.groups }, (_, group) => {
    const worth = shares.map((share, cell) => {
      const slice = firstSlice + Math.floor(cell / COSINE_BINS);
      return share * importance[(slice * grid.groups + group) * COSINE_BINS + (cell % COSINE_BINS)];
    });
    const at = group * cells;
    choose(shares, worth, cellCumulative.subarray(at, at + cells), cellWeight.subarray(at, at + cells));
    return worth.reduce((sum, value) => sum + value, 0);
  });
  const { cumulative, lowKeV, highKeV } = problem.emission;
  const lineShares = Float64Array.from(cumulative, (upTo, i) => upTo - (i > 0 ? cumulative[i - 1] : 0));
  const lineWorth = lineShares.map((share, i) => {
    const group = Math.round(placeInGroups(grid.energiesKeV, (lowKeV[i] + highKeV[i]) / 2));
    return share * worths[group];
  });
  const lineCumulative = sharedDoubles(cumulative.length);
  const lineWeight = sharedDoubles(cumulative.length);
  choose(lineShares, lineWorth, lineCumulative, lineWeight);
  return { lineCumulative, lineWeight, firstSlice, slices, cellCumulative, cellWeight };
}

/** Chances that a source photon starts in each cell, by slice and bin. */
function cellShares(problem: Problem, grid: DeepGrid, firstSlice: number, slices: number): Float64Array {
  const { source } = problem;
  const shares = new Float64Array(slices * COSINE_BINS);
  const layerCm = grid.edgesCm[firstSlice + slices] - grid.edgesCm[firstSlice];
  for (let i = 0; i < slices; i++) {
    const thickness = (grid.edgesCm[firstSlice + i + 1] - grid.edgesCm[firstSlice + i]) / layerCm;
    for (let bin = 0; bin < COSINE_BINS; bin++) {
      const [low, high] = [COSINE_BOUNDS[bin], COSINE_BOUNDS[bin + 1]];
      const share =
        source.kind === 'embedded'
          ? (thickness * (high - low)) / 2
          : low < 0
            ? 0
            : source.kind === 'diffuse' && source.law === 'isotropic'
              ? high * high - low * low
              : high - low;
      shares[i * COSINE_BINS + bin] = share;
    }
  }
  return shares;
}

/** Fills the cumulative of a choice by worth, with its analog part, and the weights. */
function choose(
  shares: Float64Array,
  worth: Float64Array,
  cumulative: Float64Array,
  weight: Float64Array,
): void {
  const total = worth.reduce((sum, value) => sum + value, 0);
  let sum = 0;
  shares.forEach((share, i) => {
    const chance = total > 0 ? ANALOG_PART * share + ((1 - ANALOG_PART) * worth[i]) / total : share;
    sum += chance;
    cumulative[i] = sum;
    weight[i] = chance > 0 ? share / chance : 0;
  });
  // Rounding must not leave a gap at the end: the last that can be chosen takes it.
  for (let i = shares.length - 1; i >= 0; i--) {
    cumulative[i] = 1;
    if (shares[i] > 0) break;
  }
}

/** Index of the first cumulative value above u, from `first` on, among `count`; counted from `first`. */
export function pick(cumulative: Float64Array, first: number, count: number, u: number): number {
  let low = 0;
  let high = count - 1;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (cumulative[first + middle] > u) high = middle;
    else low = middle + 1;
  }
  return low;
}
