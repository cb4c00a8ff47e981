/** Slots of a problem and the coefficients each has on the energy grid. */
import {
  absorptionEdges,
  coefficientArrays,
  fillCoefficients,
  type Constituent,
} from '../materials/index.js';
import { makeEnergyGrid, type EnergyGrid } from './energy-grid.js';
import { CELL_LENGTH, sharedDoubles, sharedInts } from './problem.js';
import type { Layer, Physics } from './setup.js';

/** One material at one density; no constituents is vacuum. */
export interface Slot {
  readonly constituents: readonly Constituent[];
  readonly densityGPerCm3: number;
  /** Text that tells slots apart. */
  readonly key: string;
}

/** The slots of a stack, each once, and the slot of each layer. */
export function slotsOf(stack: readonly Layer[]): { slots: Slot[]; slotOfLayer: Int32Array } {
  const slots: Slot[] = [];
  const slotOfLayer = sharedInts(stack.length);
  stack.forEach(({ material }, l) => {
    const constituents = material?.constituents ?? [];
    const densityGPerCm3 = material?.densityGPerCm3 ?? 0;
    const key = `${densityGPerCm3};${compositionKey(constituents)}`;
    let slot = slots.findIndex((known) => known.key === key);
    if (slot < 0) slot = slots.push({ constituents, densityGPerCm3, key }) - 1;
    slotOfLayer[l] = slot;
  });
  return { slots, slotOfLayer };
}

/** Text that tells compositions apart. */
export function compositionKey(constituents: readonly Constituent[]): string {
  return constituents.map(({ z, massFraction }) => `${z}:${massFraction}`).join(',');
}

/** The grid up to `topKeV` with every absorption edge of every slot. */
export function gridOf(slots: readonly Slot[], topKeV: number): EnergyGrid {
  const elements = new Set(slots.flatMap(({ constituents }) => constituents.map(({ z }) => z)));
  return makeEnergyGrid(
    topKeV,
    [...elements].flatMap((z) => absorptionEdges(z).map((edge) => edge.energyKeV)),
  );
}

/** Lines a + b E through the values at the ends of each cell, written at `out[base + cell × stride]`. */
export function fillLines(
  nodesKeV: Float64Array,
  values: Float64Array,
  out: Float64Array,
  base: number,
  stride: number,
): void {
  for (let cell = 0; cell + 1 < nodesKeV.length; cell++) {
    const width = nodesKeV[cell + 1] - nodesKeV[cell];
    const slope = width > 0 ? (values[cell + 1] - values[cell]) / width : 0;
    out[base + cell * stride] = values[cell] - slope * nodesKeV[cell];
    out[base + cell * stride + 1] = slope;
  }
}

/** Evaluates at every node of the grid; the first of two nodes at one energy means "below the edge". */
export function atNodes(
  nodesKeV: Float64Array,
  fill: (side: 'above' | 'below') => Float64Array,
): Float64Array {
  const above = fill('above');
  const below = fill('below');
  return above.map((value, i) => (nodesKeV[i + 1] === nodesKeV[i] ? below[i] : value));
}

/** The cells of all slots: attenuation and cumulative shares of the processes that are on. */
export function makeCells(slots: readonly Slot[], grid: EnergyGrid, physics: Physics): Float64Array {
  const { nodesKeV } = grid;
  const cellCount = nodesKeV.length - 1;
  const cells = sharedDoubles(slots.length * cellCount * CELL_LENGTH);
  // The grid may end above the range of the tables; nothing ever flies there.
  const energiesKeV = nodesKeV.map((energy) => Math.min(energy, 20_000));
  slots.forEach((slot, s) => {
    if (slot.constituents.length === 0) return;
    const [above, below] = [coefficientArrays(nodesKeV.length), coefficientArrays(nodesKeV.length)];
    fillCoefficients(slot, energiesKeV, above, 'above');
    fillCoefficients(slot, energiesKeV, below, 'below');
    const column = (name: 'photoelectric' | 'incoherent' | 'coherent' | 'pair') =>
      atNodes(nodesKeV, (side) => (side === 'above' ? above : below)[name]);
    const photoelectric = column('photoelectric');
    const incoherent = column('incoherent');
    const coherent = physics.coherent ? column('coherent') : new Float64Array(nodesKeV.length);
    const pair = physics.pair ? column('pair') : new Float64Array(nodesKeV.length);
    const total = photoelectric.map((value, i) => value + incoherent[i] + coherent[i] + pair[i]);
    const base = s * cellCount * CELL_LENGTH;
    const put = (offset: number, value: (i: number) => number) =>
      fillLines(
        nodesKeV,
        total.map((_, i) => value(i)),
        cells,
        base + offset,
        CELL_LENGTH,
      );
    put(0, (i) => slot.densityGPerCm3 * total[i]);
    put(2, (i) => photoelectric[i] / total[i]);
    put(4, (i) => (photoelectric[i] + incoherent[i]) / total[i]);
    put(6, (i) => 1 - pair[i] / total[i]);
  });
  return cells;
}
