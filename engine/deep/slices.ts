/**
 * Slices of a stack for the coarse grid of deep transport: even inside a layer, for the photons that get farthest, and
 * ever finer towards its faces, for soft photons that get out from there alone.
 */
import { sharedDoubles, sharedInts } from '../problem.js';

/** Optical thickness of a slice for the most penetrating photons, and of one at a face for the least. */
const SLICE_DEPTH = 0.35;
const FACE_DEPTH = 0.5;
/** Ratio of neighbouring slices at a face. */
const GROWTH = 2;
const MIN_SLICES = 4;
/** Bound of the even slices of a stack, beyond which they become coarser. */
const MAX_SLICES = 480;
/** Stacks of more layers are refined at their outer faces only. */
const MAX_REFINED_LAYERS = 8;

/** A layer with the range of its attenuation coefficient. */
export interface SlicedLayer {
  readonly lowCm: number;
  readonly highCm: number;
  readonly leastPerCm: number;
  readonly mostPerCm: number;
}

export interface Slices {
  readonly edgesCm: Float64Array;
  readonly firstSlice: Int32Array;
  readonly layerOfSlice: Int32Array;
  readonly sliceGuide: Int32Array;
  readonly guidePerCm: Float64Array;
}

/** Steps of depth in a layer that the guide tells apart. */
export const GUIDE_STEPS = 64;

export function sliceStack(layers: readonly SlicedLayer[]): Slices {
  const depthOf = ({ lowCm, highCm, leastPerCm }: SlicedLayer) => (highCm - lowCm) * leastPerCm;
  const total = layers.reduce((sum, layer) => sum + depthOf(layer), 0);
  const step = Math.max(SLICE_DEPTH, total / MAX_SLICES);
  const shares = layers.map((layer, l) => {
    const refineAll = layers.length <= MAX_REFINED_LAYERS;
    const even = Math.max(MIN_SLICES, Math.ceil(depthOf(layer) / step));
    const face = FACE_DEPTH / ((layer.highCm - layer.lowCm) * layer.mostPerCm);
    if (layer.mostPerCm === 0) return [1];
    return sharesOf(
      1 / even,
      refineAll || l === 0 ? face : 1,
      refineAll || l === layers.length - 1 ? face : 1,
    );
  });
  const count = shares.reduce((sum, own) => sum + own.length, 0);
  const edgesCm = sharedDoubles(count + 1);
  const firstSlice = sharedInts(layers.length + 1);
  const layerOfSlice = sharedInts(count);
  layers.forEach(({ lowCm, highCm }, l) => {
    const first = firstSlice[l];
    let share = 0;
    shares[l].forEach((own, i) => {
      edgesCm[first + i] = lowCm + share * (highCm - lowCm);
      share += own;
    });
    firstSlice[l + 1] = first + shares[l].length;
    edgesCm[firstSlice[l + 1]] = highCm;
    layerOfSlice.fill(l, first, firstSlice[l + 1]);
  });
  return { edgesCm, firstSlice, layerOfSlice, ...guideOf(layers, edgesCm, firstSlice) };
}

/** Shares of the thickness that the slices of a layer take, growing from both faces to an even size. */
function sharesOf(even: number, nearFace: number, farFace: number): number[] {
  const growing = (face: number) => {
    const sizes: number[] = [];
    for (let size = face; size < even; size *= GROWTH) sizes.push(size);
    return sizes;
  };
  const [near, far] = [growing(nearFace), growing(farFace)];
  const taken = [...near, ...far].reduce((sum, size) => sum + size, 0);
  const middle = Math.max(1, Math.ceil((1 - taken) / even));
  const left = Math.max(even, 1 - taken);
  const sizes = [...near, ...Array.from({ length: middle }, () => left / middle), ...far.reverse()];
  const sum = sizes.reduce((total, size) => total + size, 0);
  return sizes.map((size) => size / sum);
}

function guideOf(
  layers: readonly SlicedLayer[],
  edgesCm: Float64Array,
  firstSlice: Int32Array,
): Pick<Slices, 'sliceGuide' | 'guidePerCm'> {
  const sliceGuide = sharedInts(layers.length * GUIDE_STEPS);
  const guidePerCm = sharedDoubles(layers.length);
  layers.forEach(({ lowCm, highCm }, l) => {
    guidePerCm[l] = GUIDE_STEPS / (highCm - lowCm);
    let slice = firstSlice[l];
    for (let n = 0; n < GUIDE_STEPS; n++) {
      // A step early: the bound is subject to rounding.
      const z = lowCm + ((n - 1) / GUIDE_STEPS) * (highCm - lowCm);
      while (slice + 1 < firstSlice[l + 1] && edgesCm[slice + 1] <= z) slice++;
      sliceGuide[l * GUIDE_STEPS + n] = slice;
    }
  });
  return { sliceGuide, guidePerCm };
}
