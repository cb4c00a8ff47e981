/** The source on the coarse grid: first collisions of photons from outside, or photons emitted in slices. */
import {
  attenuationPerCm,
  COSINE_BINS,
  COSINE_BOUNDS,
  cosineBin,
  placeInGroups,
  type DeepGrid,
} from './grid.js';
import type { Emitted } from './sweep.js';
import type { Problem } from '../problem.js';

/** More source energies than these are gathered into groups. */
const MAX_ENERGIES = 16;
/** Directions that stand for those of a source that emits into a half space. */
const DIRECTIONS = 32;

/** The source, one photon in all. */
export function emittedOf(problem: Problem, grid: DeepGrid): Emitted {
  const length = grid.slices * grid.groups * COSINE_BINS;
  const emitted = { collisions: new Float64Array(length), photons: new Float64Array(length) };
  for (const { energyKeV, share } of energiesOf(problem, grid)) {
    if (problem.source.kind === 'embedded') emitInLayer(problem, grid, energyKeV, share, emitted.photons);
    else {
      for (const { w, part } of directionsOf(problem)) {
        collideFirst(problem, grid, energyKeV, w, share * part, emitted.collisions);
      }
    }
  }
  return emitted;
}

function energiesOf(problem: Problem, grid: DeepGrid): { energyKeV: number; share: number }[] {
  const { cumulative, lowKeV, highKeV } = problem.emission;
  const all = Array.from(cumulative, (upTo, i) => ({
    energyKeV: (lowKeV[i] + highKeV[i]) / 2,
    share: upTo - (i > 0 ? cumulative[i - 1] : 0),
  }));
  if (all.length <= MAX_ENERGIES) return all;
  const shares = new Float64Array(grid.groups);
  for (const { energyKeV, share } of all)
    spread(grid, energyKeV, share, (group, part) => (shares[group] += part));
  return Array.from(shares, (share, g) => ({ energyKeV: grid.energiesKeV[g], share })).filter(
    ({ share }) => share > 0,
  );
}

/** Divides a number between the two groups next to an energy. */
function spread(
  grid: DeepGrid,
  energyKeV: number,
  amount: number,
  add: (group: number, part: number) => void,
): void {
  const place = placeInGroups(grid.energiesKeV, energyKeV);
  const below = Math.floor(place);
  add(below, amount * (below + 1 - place));
  if (place > below) add(below + 1, amount * (place - below));
}

function directionsOf({ source, beamCosine }: Problem): { w: number; part: number }[] {
  if (source.kind === 'beam') return [{ w: beamCosine, part: 1 }];
  const likeCosine = source.kind === 'diffuse' && source.law === 'isotropic';
  return Array.from({ length: DIRECTIONS }, (_, n) => {
    const w = (n + 0.5) / DIRECTIONS;
    return { w, part: (likeCosine ? 2 * w : 1) / DIRECTIONS };
  });
}

function collideFirst(
  problem: Problem,
  grid: DeepGrid,
  energyKeV: number,
  w: number,
  amount: number,
  collisions: Float64Array,
): void {
  const bin = cosineBin(w);
  let flow = amount;
  for (let i = 0; i < grid.slices; i++) {
    const layer = grid.layerOfSlice[i];
    const perCm = attenuationPerCm(problem, problem.slotOfLayer[layer], energyKeV);
    const collided = -flow * Math.expm1(-((grid.edgesCm[i + 1] - grid.edgesCm[i]) * perCm) / w);
    flow -= collided;
    if (collided > 0) {
      spread(grid, energyKeV, collided, (group, part) => {
        collisions[(i * grid.groups + group) * COSINE_BINS + bin] += part;
      });
    }
  }
}

function emitInLayer(
  problem: Problem,
  grid: DeepGrid,
  energyKeV: number,
  share: number,
  photons: Float64Array,
): void {
  const [first, end] = [grid.firstSlice[problem.sourceLayer], grid.firstSlice[problem.sourceLayer + 1]];
  for (let i = first; i < end; i++) {
    for (let bin = 0; bin < COSINE_BINS; bin++) {
      const part = (COSINE_BOUNDS[bin + 1] - COSINE_BOUNDS[bin]) / 2;
      const thickness = (grid.edgesCm[i + 1] - grid.edgesCm[i]) / (grid.edgesCm[end] - grid.edgesCm[first]);
      spread(grid, energyKeV, share * part * thickness, (group, amount) => {
        photons[(i * grid.groups + group) * COSINE_BINS + bin] += amount;
      });
    }
  }
}
