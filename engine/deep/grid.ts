/**
 * The coarse grid of depth, energy and direction on which deep transport knows how much a photon is worth: slices of
 * the layers, groups of energy, bins of the direction cosine. It steers which photons are followed and where they
 * collide; no result depends on it but by its statistical error.
 */
import { bucketStartKeV, cellOf } from '../energy-grid.js';
import { sliceStack } from './slices.js';
import { CELL_LENGTH, sharedDoubles, sharedInts, type Problem } from '../problem.js';

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

/** Groups to a factor e in energy: 11 % wide, so that attenuation changes little within a group. */
const GROUPS_PER_E_FOLD = 9;
/** Photons below it count as being at it: they reach nothing that is far. */
const LOWEST_KEV = 15;

export interface DeepGrid {
  readonly groups: number;
  /** Energy each group stands for, ascending. */
  readonly energiesKeV: Float64Array;
  /** Group by the bucket of the energy grid. */
  readonly groupOfBucket: Int32Array;
  readonly slices: number;
  /** Bounds of the slices, cm from the front face. */
  readonly edgesCm: Float64Array;
  /** First slice of each layer, and the number of all. */
  readonly firstSlice: Int32Array;
  readonly layerOfSlice: Int32Array;
  /** Slice to try first, by layer and even step of depth in it; steps per cm of each layer. */
  readonly sliceGuide: Int32Array;
  readonly guidePerCm: Float64Array;
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
  const perCm = (layer: number, group: number) =>
    attenuationPerCm(problem, problem.slotOfLayer[layer], energiesKeV[group]);
  const slices = sliceStack(
    Array.from({ length: problem.layers }, (_, layer) => {
      const all = Array.from({ length: groups }, (_, group) => perCm(layer, group));
      return {
        lowCm: problem.boundariesCm[layer],
        highCm: problem.boundariesCm[layer + 1],
        leastPerCm: Math.min(...all),
        mostPerCm: Math.max(...all),
      };
    }),
  );
  const { edgesCm, layerOfSlice } = slices;
  const opticalDepth = sharedDoubles(layerOfSlice.length * groups);
  layerOfSlice.forEach((layer, i) => {
    for (let g = 0; g < groups; g++) {
      opticalDepth[i * groups + g] = (edgesCm[i + 1] - edgesCm[i]) * perCm(layer, g);
    }
  });
  return {
    groups,
    energiesKeV,
    groupOfBucket: groupsOfBuckets(problem, energiesKeV),
    slices: layerOfSlice.length,
    ...slices,
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
