/**
 * What comes out of a collision, on the coarse grid: for a photon of each group and direction bin the mean number of
 * photons in each group and direction bin. It is found by playing collisions with the very sampler of the history
 * loops, so that whatever physics is on is in it.
 */
import { cellOf } from '../energy-grid.js';
import {
  attenuationPerCm,
  COSINE_BINS,
  COSINE_BOUNDS,
  cosineBin,
  placeInGroups,
  type DeepGrid,
} from './grid.js';
import { interact, Site } from '../physics/interact.js';
import type { Problem } from '../problem.js';
import { seedStream } from '../random.js';

/** Collisions played for each group: single elements are then good to a few per cent, sums to one. */
const PLAYED = 1500;
/** Bins of sin(θ/2), in which the scattering laws are smooth from X-rays to 20 MeV. */
const ANGLES = 48;

/** Outcomes of collisions in one material. */
export interface CollisionMatrix {
  /** Row (group, bin) is the mean number of photons by group (from 0 to its own) and bin. */
  readonly rows: readonly Float64Array[];
  /** Mean energy left on the spot, by group. */
  readonly depositedKeV: Float64Array;
}

/** Matrices of all materials of a problem; null for vacuum. */
export function collisionMatrices(problem: Problem, grid: DeepGrid): (CollisionMatrix | null)[] {
  const slots = Math.max(...problem.slotOfLayer) + 1;
  const topKeV = grid.energiesKeV[grid.groups - 1];
  return Array.from({ length: slots }, (_, slot) =>
    attenuationPerCm(problem, slot, topKeV) === 0 ? null : collisionMatrix(problem, grid, slot),
  );
}

function collisionMatrix(problem: Problem, grid: DeepGrid, slot: number): CollisionMatrix {
  const site = new Site();
  site.localCutoffKeV = problem.cutoffKeV;
  seedStream(site.random, `${problem.seed}/pilot`, slot);
  const rows: Float64Array[] = [];
  const depositedKeV = new Float64Array(grid.groups);
  for (let group = 0; group < grid.groups; group++) {
    const counts = playCollisions(problem, grid, slot, group, site);
    depositedKeV[group] = counts.depositedKeV;
    rows.push(...turnedRows(counts.byGroupAndAngle, group));
  }
  return { rows, depositedKeV };
}

/** Means over collisions of a photon of the group's energy, photons out by group and angle. */
function playCollisions(problem: Problem, grid: DeepGrid, slot: number, group: number, site: Site) {
  const energyKeV = grid.energiesKeV[group];
  const cell = cellOf(problem.grid, energyKeV);
  const byGroupAndAngle = new Float64Array((group + 1) * ANGLES);
  let depositedKeV = 0;
  const note = (photonKeV: number, v: number) => {
    const place = Math.min(group, placeInGroups(grid.energiesKeV, photonKeV));
    const below = Math.floor(place);
    const part = place - below;
    const angle = Math.min(ANGLES - 1, Math.floor(Math.sqrt(v) * ANGLES));
    byGroupAndAngle[below * ANGLES + angle] += (1 - part) / PLAYED;
    if (part > 0) byGroupAndAngle[(below + 1) * ANGLES + angle] += part / PLAYED;
  };
  for (let n = 0; n < PLAYED; n++) {
    site.energyKeV = energyKeV;
    interact(problem, site, slot, cell);
    depositedKeV += site.depositedKeV / PLAYED;
    if (site.energyKeV > 0) note(site.energyKeV, site.v);
    const { count, energyKeV: energies, cosine } = site.secondaries;
    for (let i = 0; i < count; i++) note(energies[i], Math.max(0, (1 - cosine[i]) / 2));
  }
  return { byGroupAndAngle, depositedKeV };
}

/** The rows of one group: angles turned into direction bins, for each bin of the photon that came in. */
function turnedRows(byGroupAndAngle: Float64Array, group: number): Float64Array[] {
  const turns = turnTable();
  return Array.from({ length: COSINE_BINS }, (_, from) => {
    const row = new Float64Array((group + 1) * COSINE_BINS);
    for (let g = 0; g <= group; g++) {
      for (let angle = 0; angle < ANGLES; angle++) {
        const count = byGroupAndAngle[g * ANGLES + angle];
        if (count === 0) continue;
        const table = (angle * COSINE_BINS + from) * COSINE_BINS;
        for (let to = 0; to < COSINE_BINS; to++) row[g * COSINE_BINS + to] += count * turns[table + to];
      }
    }
    return row;
  });
}

let knownTurns: Float64Array | null = null;
const PLACES = [1 / 6, 3 / 6, 5 / 6];
const AZIMUTHS = 24;

/** Share of photons of a direction bin that an angle bin brings into each direction bin, over all azimuths. */
function turnTable(): Float64Array {
  if (knownTurns !== null) return knownTurns;
  const turns = new Float64Array(ANGLES * COSINE_BINS * COSINE_BINS);
  const share = 1 / (PLACES.length ** 2 * AZIMUTHS);
  for (let angle = 0; angle < ANGLES; angle++) {
    for (let from = 0; from < COSINE_BINS; from++) {
      const table = (angle * COSINE_BINS + from) * COSINE_BINS;
      for (const inAngle of PLACES) {
        const cosine = 1 - 2 * ((angle + inAngle) / ANGLES) ** 2;
        for (const inBin of PLACES) {
          const w = COSINE_BOUNDS[from] + inBin * (COSINE_BOUNDS[from + 1] - COSINE_BOUNDS[from]);
          const sines = Math.sqrt((1 - cosine * cosine) * (1 - w * w));
          for (let n = 0; n < AZIMUTHS; n++) {
            const turned = w * cosine + sines * Math.cos((Math.PI * (n + 0.5)) / AZIMUTHS);
            turns[table + cosineBin(turned)] += share;
          }
        }
      }
    }
  }
  knownTurns = turns;
  return turns;
}
