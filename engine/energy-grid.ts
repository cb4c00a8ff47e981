/**
 * The energy grid all tables of a problem share, made so that a cell is found without a logarithm: the exponent and
 * the top bits of the mantissa of the energy, read as an integer, are the index of a bucket (every octave is cut into
 * equal parts), and a bucket points to its first cell. A bucket holds one cell, more where absorption edges cut it.
 * An edge is two nodes at one energy (values below and above), so discontinuities stay discontinuities.
 */

/** 2^7 buckets per octave: a linear cell is then within 1e-4 of a power law E^-3. */
export const BUCKET_BITS = 7;
export const BUCKET_SHIFT = 20 - BUCKET_BITS;
/** Bucket of 1 keV, the lowest energy of the grid: exponent bias of a double. */
export const BUCKET_OFFSET = 1023 << BUCKET_BITS;

export interface EnergyGrid {
  /** Node energies in keV, ascending; an edge stands twice. */
  readonly nodesKeV: Float64Array;
  /** First cell of each bucket; cell i spans nodes i and i + 1. */
  readonly firstCell: Int32Array;
}

const doubleView = new Float64Array(1);
const wordView = new Uint32Array(doubleView.buffer);
const HIGH_WORD = new Uint8Array(new Uint32Array([1]).buffer)[0] === 1 ? 1 : 0;

/** Bucket of an energy (keV, at least 1). */
export function bucketOf(energyKeV: number): number {
  doubleView[0] = energyKeV;
  return (wordView[HIGH_WORD] >>> BUCKET_SHIFT) - BUCKET_OFFSET;
}

/** Lower bound in keV of bucket i. */
export function bucketStartKeV(bucket: number): number {
  const parts = 1 << BUCKET_BITS;
  return 2 ** Math.floor(bucket / parts) * (1 + (bucket % parts) / parts);
}

/** The grid from 1 keV to the first bucket bound above `topKeV`, with `edgesKeV` as double nodes. */
export function makeEnergyGrid(topKeV: number, edgesKeV: readonly number[]): EnergyGrid {
  const buckets = bucketOf(topKeV) + 1;
  const edges = [...new Set(edgesKeV)]
    .filter((e) => e >= 1 && e <= bucketStartKeV(buckets))
    .sort((a, b) => a - b);
  const nodes: number[] = [];
  const firstCell = new Int32Array(new SharedArrayBuffer(4 * (buckets + 1)));
  let next = 0;
  for (let bucket = 0; bucket <= buckets; bucket++) {
    const start = bucketStartKeV(bucket);
    while (next < edges.length && edges[next] < start) nodes.push(edges[next], edges[next++]);
    if (next < edges.length && edges[next] === start) nodes.push(edges[next++]);
    firstCell[bucket] = nodes.length;
    nodes.push(start);
  }
  const nodesKeV = new Float64Array(new SharedArrayBuffer(8 * nodes.length));
  nodesKeV.set(nodes);
  return { nodesKeV, firstCell };
}

/** Cell of the grid that holds an energy; at an edge the cell above it. */
export function cellOf(grid: EnergyGrid, energyKeV: number): number {
  let cell = grid.firstCell[bucketOf(energyKeV)];
  while (energyKeV >= grid.nodesKeV[cell + 1]) cell++;
  return cell;
}
