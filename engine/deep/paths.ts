/** Optical depths from a place in the stack to its faces, along the axis. */
import { CELL_LENGTH, type Problem } from '../problem.js';

/** From depth z in a layer to the far face, for photons of an energy in a cell of the energy grid. */
export function depthToFar(
  problem: Problem,
  energyKeV: number,
  cell: number,
  z: number,
  layer: number,
): number {
  const { cells, cellCount, boundariesCm, slotOfLayer, layers } = problem;
  let depth = 0;
  let from = z;
  for (let l = layer; l < layers; l++) {
    const at = (slotOfLayer[l] * cellCount + cell) * CELL_LENGTH;
    const to = boundariesCm[l + 1];
    depth += (to - from) * (cells[at] + cells[at + 1] * energyKeV);
    from = to;
  }
  return depth;
}

/** From depth z in a layer to the front face. */
export function depthToFront(
  problem: Problem,
  energyKeV: number,
  cell: number,
  z: number,
  layer: number,
): number {
  const { cells, cellCount, boundariesCm, slotOfLayer } = problem;
  let depth = 0;
  let from = z;
  for (let l = layer; l >= 0; l--) {
    const at = (slotOfLayer[l] * cellCount + cell) * CELL_LENGTH;
    const to = boundariesCm[l];
    depth += (from - to) * (cells[at] + cells[at + 1] * energyKeV);
    from = to;
  }
  return depth;
}
