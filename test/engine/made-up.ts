/** Problems with made-up cross sections, in which what must come out is known in closed form. */
import { cellOf } from '../../engine/energy-grid.js';
import { CELL_LENGTH, type Problem } from '../../engine/problem.js';

/** Linear attenuation coefficient and the shares of the processes in it (they add up to 1). */
export interface MadeUp {
  readonly perCm: number;
  readonly photoelectric?: number;
  readonly incoherent?: number;
  readonly coherent?: number;
  readonly pair?: number;
}

/** A copy of the problem in which every material has the given cross sections at energies from `fromKeV` on, 0 below. */
export function withCrossSections(problem: Problem, given: MadeUp, fromKeV = 0): Problem {
  const cells = new Float64Array(problem.cells.length);
  const first = fromKeV === 0 ? 0 : cellOf(problem.grid, fromKeV);
  const { photoelectric = 0, incoherent = 0, coherent = 0 } = given;
  for (let at = 0; at < cells.length; at += CELL_LENGTH) {
    if ((at / CELL_LENGTH) % problem.cellCount < first) continue;
    cells[at] = given.perCm;
    cells[at + 2] = photoelectric;
    cells[at + 4] = photoelectric + incoherent;
    cells[at + 6] = photoelectric + incoherent + coherent;
  }
  return { ...withoutLocalCutoffs(problem), cells };
}

/** A copy of the problem in which every photon above the cutoff is followed, wherever it is born. */
export function withoutLocalCutoffs(problem: Problem): Problem {
  return {
    ...problem,
    localCutoffKeV: problem.localCutoffKeV.map(() => problem.cutoffKeV),
    radiationStep: problem.radiationStep.map(() => 0),
  };
}

/**
 * A copy of the problem in which a photon of `energyKeV`, which must stand at the start of a cell, collides at once in one
 * of the ways of the real material, and nothing below that energy collides at all.
 */
export function withOneCollision(problem: Problem, energyKeV: number): Problem {
  const cells = new Float64Array(problem.cells.length);
  const cell = cellOf(problem.grid, energyKeV);
  for (let at = cell * CELL_LENGTH; at < cells.length; at += problem.cellCount * CELL_LENGTH) {
    cells.set(problem.cells.subarray(at, at + CELL_LENGTH), at);
    cells[at] = AT_ONCE_PER_CM;
    cells[at + 1] = 0;
  }
  return { ...withoutLocalCutoffs(problem), cells };
}

/** A copy of the problem in which photons are absorbed as they are, and do nothing else. */
export function withAbsorptionAlone(problem: Problem): Problem {
  const cells = new Float64Array(problem.cells.length);
  const { nodesKeV } = problem.grid;
  for (let at = 0; at < cells.length; at += CELL_LENGTH) {
    const cell = (at / CELL_LENGTH) % problem.cellCount;
    const [low, high] = [nodesKeV[cell], nodesKeV[cell + 1]];
    const line = (offset: number, energyKeV: number) =>
      problem.cells[at + offset] + problem.cells[at + offset + 1] * energyKeV;
    const [left, right] = [line(0, low) * line(2, low), line(0, high) * line(2, high)];
    cells[at + 1] = high > low ? (right - left) / (high - low) : 0;
    cells[at] = left - cells[at + 1] * low;
    cells[at + 2] = cells[at + 4] = cells[at + 6] = 1;
  }
  return { ...problem, cells };
}

/**
 * A source energy just above a power of two: it stands at the very start of a cell of the energy grid, so that with
 * `withCrossSections(…, energy)` a photon collides once, at the surface, and whatever comes of it flies out freely.
 */
export function firstCollisionEnergyKeV(power: number): number {
  return 2 ** power * (1 + 1e-12);
}

/** So many per cm that all collisions happen in the first hundredth of a micrometre. */
export const AT_ONCE_PER_CM = 1e7;
