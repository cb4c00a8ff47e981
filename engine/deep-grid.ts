/**
 * The coarse grid of depth, energy and direction on which deep transport knows how much a photon is worth: slices of
 * the layers, groups of energy, bins of the direction cosine. It steers which photons are followed and where they
 * collide; no result depends on it but by its statistical error.
 */
import { bucketStartKeV, cellOf } from './energy-grid.js';
import { CELL_LENGTH, sharedDoubles, sharedInts, type Problem } from './problem.js';

/**
 * Bounds of the bins of |w|, in 64ths: finest along the axis, where the photons that get through fly, so that the
 * attenuation exp(−τ/w) changes little within a bin.
 */
const BOUNDS = [0, 12, 24, 35, 44, 51, 56, 60, 62, 64];
const HALF = BOUNDS.length - 1;
/** Bins of w from −1 to 1. */
export const COSINE_BINS = 2 * HALF;
const FINENESS = 64;

/** Bin of w by floor((w + 1) × 64). */
export const COSINE_BIN = Int32Array.from({ length: 2 * FINENESS + 1 }, (_, i) => {
  const backwards = i < FINENESS;
  const part = backwards ? FINENESS - 1 - i : i - FINENESS;
  const bin = BOUNDS.findIndex((bound) => bound > part) - 1;
  const inside = bin < 0 ? HALF - 1 : bin;
  return backwards ? HALF - 1 - inside : HALF + inside;
});

/** Lower bound of each bin of w, and 1. */
export const COSINE_BOUNDS = Float64Array.from(
  [
    ...BOUNDS.slice(1)
      .reverse()
      .map((bound) => -bound),
    ...BOUNDS,
  ],
  (bound) => bound / FINENESS,
);
/** Middle of each bin. */
export const COSINES = Float64Array.from(
  { length: COSINE_BINS },
  (_, bin) => (COSINE_BOUNDS[bin] + COSINE_BOUNDS[bin + 1]) / 2,
);

/** Bin of a direction cosine in [−1, 1]. */
export function cosineBin(w: number): number {
  return COSINE_BIN[((w + 1) * FINENESS) | 0];
}

/** Groups to a factor e in energy: 10 % wide, so that attenuation changes little within a group. */
const GROUPS_PER_E_FOLD = 9;
/** Photons below it count as being at it: they reach nothing that is far. */
const LOWEST_KEV = 15;
/** Optical thickness of a slice for the most penetrating energy. */
const SLICE_DEPTH = 0.35;
const MIN_SLICES = 4;
const MAX_SLICES = 480;

export interface DeepGrid {
  readonly groups: number;
  /** Energy each group stands for, ascending. */
  readonly energiesKeV: Float64Array;
  /** Group by the bucket of the energy grid. */
  readonly groupOfBucket: Int32Array;
  readonly slices: number;
  /** First slice of each layer, and the number of all. */
  readonly firstSlice: Int32Array;
  readonly slicesPerCm: Float64Array;
  readonly layerOfSlice: Int32Array;
  /** Optical thickness of each slice, group by group. */
  readonly opticalDepth: Float64Array;
}

/** Attenuation coefficient of a material at an energy, 1/cm. */
export function attenuationPerCm(problem: Problem, slot: number, energyKeV: number): number {
  const at = (slot * problem.cellCount + cellOf(problem.grid, energyKeV)) * CELL_LENGTH;
  return problem.cells[at] + problem.cells[at + 1] * energyKeV;
}

/** The grid of a problem whose source reaches `topKeV`. */
export function makeDeepGrid(problem: Problem, topKeV: number): DeepGrid {
  const energiesKeV = groupEnergies(problem, topKeV);
  const groups = energiesKeV.length;
  const perLayer = slicesOfLayers(problem, energiesKeV);
  const slices = perLayer.reduce((sum, count) => sum + count, 0);
  const firstSlice = sharedInts(problem.layers + 1);
  const slicesPerCm = sharedDoubles(problem.layers);
  const layerOfSlice = sharedInts(slices);
  const opticalDepth = sharedDoubles(slices * groups);
  perLayer.forEach((count, layer) => {
    const first = firstSlice[layer];
    const thicknessCm = problem.boundariesCm[layer + 1] - problem.boundariesCm[layer];
    firstSlice[layer + 1] = first + count;
    slicesPerCm[layer] = count / thicknessCm;
    layerOfSlice.fill(layer, first, first + count);
    for (let g = 0; g < groups; g++) {
      const perCm = attenuationPerCm(problem, problem.slotOfLayer[layer], energiesKeV[g]);
      for (let i = first; i < first + count; i++) {
        opticalDepth[i * groups + g] = (perCm * thicknessCm) / count;
      }
    }
  });
  const groupOfBucket = groupsOfBuckets(problem, energiesKeV);
  return {
    groups,
    energiesKeV,
    groupOfBucket,
    slices,
    firstSlice,
    slicesPerCm,
    layerOfSlice,
    opticalDepth,
  };
}

function groupEnergies(problem: Problem, topKeV: number): Float64Array {
  const low = Math.max(problem.cutoffKeV, Math.min(LOWEST_KEV, topKeV / 8));
  const span = Math.log(topKeV / low);
  const groups = Math.max(2, Math.ceil(span * GROUPS_PER_E_FOLD) + 1);
  const energies = sharedDoubles(groups);
  for (let g = 0; g < groups; g++) energies[g] = topKeV * Math.exp((g / (groups - 1) - 1) * span);
  energies[groups - 1] = topKeV;
  return energies;
}

function slicesOfLayers(problem: Problem, energiesKeV: Float64Array): number[] {
  const depths = Array.from({ length: problem.layers }, (_, layer) => {
    const thicknessCm = problem.boundariesCm[layer + 1] - problem.boundariesCm[layer];
    const slot = problem.slotOfLayer[layer];
    return thicknessCm * Math.min(...energiesKeV.map((energy) => attenuationPerCm(problem, slot, energy)));
  });
  const total = depths.reduce((sum, depth) => sum + depth, 0);
  const step = Math.max(SLICE_DEPTH, total / MAX_SLICES);
  return depths.map((depth) => (depth === 0 ? 1 : Math.max(MIN_SLICES, Math.ceil(depth / step))));
}

function groupsOfBuckets(problem: Problem, energiesKeV: Float64Array): Int32Array {
  const buckets = problem.grid.firstCell.length;
  const groups = sharedInts(buckets);
  for (let bucket = 0; bucket < buckets; bucket++) {
    const energyKeV = Math.sqrt(bucketStartKeV(bucket) * bucketStartKeV(bucket + 1));
    groups[bucket] = Math.round(placeInGroups(energiesKeV, energyKeV));
  }
  return groups;
}

/** Where an energy stands among the groups, between 0 and the last, even in its logarithm. */
export function placeInGroups(energiesKeV: Float64Array, energyKeV: number): number {
  const last = energiesKeV.length - 1;
  const place = (last * Math.log(energyKeV / energiesKeV[0])) / Math.log(energiesKeV[last] / energiesKeV[0]);
  return Math.max(0, Math.min(last, place));
}
