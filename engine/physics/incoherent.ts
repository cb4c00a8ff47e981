/**
 * Incoherent scattering angles by a tabulated inverse cumulative: the Klein–Nishina law, times the incoherent
 * function S(x, Z) of the element struck where binding is on.
 *
 * The table has a row per energy (16 to an octave, found from the bits of the energy) and columns at equal steps of
 * t = √u: near u = 0 the inverse cumulative goes as u (free electron) or √u (bound), both smooth in √u. An entry is
 * s = v (1 + k), v = (1 − cos θ)/2, k = E / m c²; the factor takes out the forward narrowing with energy, so that
 * linear steps between rows are enough. For a compound the elements are mixed by their shares of the tabulated total.
 */
import { ELECTRON_REST_KEV, HC_KEV_ANGSTROM } from '../constants.js';
import { kleinNishinaShape } from './klein-nishina.js';
import { logPlace, valueAtPlace, type LogGrid } from './log-sampled.js';

/** 2^4 rows per octave. */
export const ROW_BITS = 4;
export const ROW_SHIFT = 20 - ROW_BITS;
export const ROW_OFFSET = 1023 << ROW_BITS;
/** Steps of √u in a row, and numbers per row. */
export const COLUMNS = 128;
export const ROW_LENGTH = COLUMNS + 1;

/** Momentum transfers x (1/Å) at which binding is sampled. */
export const BINDING_GRID: LogGrid = { low: 1e-3, high: 2000, nodes: 900 };

/** One element of the mixture that scatters. */
export interface Scatterer {
  /** Share of the mixture's incoherent cross section at an energy, not normalised. */
  readonly shareAt: (energyKeV: number) => number;
  /** S(x) / Z at the nodes of BINDING_GRID, or null for free electrons. */
  readonly binding: Float64Array | null;
}

/** Rows needed so that energies up to `topKeV` have a row above them. */
export function incoherentRows(topKeV: number): number {
  return Math.floor(Math.log2(topKeV)) * 2 ** ROW_BITS + 2 ** ROW_BITS + 1;
}

/** Energy of a row in keV. */
export function rowEnergyKeV(row: number): number {
  const parts = 1 << ROW_BITS;
  return 2 ** Math.floor(row / parts) * (1 + (row % parts) / parts);
}

/** Fills `rows` rows of the inverse cumulative from `out[0]` on. */
export function fillIncoherentTable(scatterers: readonly Scatterer[], rows: number, out: Float64Array): void {
  for (let row = 0; row < rows; row++) {
    const energyKeV = rowEnergyKeV(row);
    const v = angleNodes(energyKeV);
    const cumulative = mixedCumulative(scatterers, energyKeV, v);
    const scale = 1 + energyKeV / ELECTRON_REST_KEV;
    let i = 0;
    for (let column = 0; column <= COLUMNS; column++) {
      const u = (column / COLUMNS) ** 2;
      while (i < v.length - 2 && cumulative[i + 1] < u) i++;
      const step = cumulative[i + 1] - cumulative[i];
      const part = step > 0 ? Math.min(1, (u - cumulative[i]) / step) : 0;
      out[row * ROW_LENGTH + column] = scale * (v[i] + part * (v[i + 1] - v[i]));
    }
  }
}

/** Integration nodes in v, ascending from 0 to 1: even in log(1 + 2 k v) and in log x, where the two factors turn. */
function angleNodes(energyKeV: number): Float64Array {
  const k = energyKeV / ELECTRON_REST_KEV;
  const fineness = 200;
  const nodes = [0];
  for (let i = 1; i <= fineness; i++) nodes.push(Math.expm1((i / fineness) * Math.log1p(2 * k)) / (2 * k));
  const xTop = energyKeV / HC_KEV_ANGSTROM;
  for (let logX = Math.log(2e-3); logX < Math.log(Math.min(xTop, 60)); logX += 0.06) {
    nodes.push((Math.exp(logX) / xTop) ** 2);
  }
  nodes[fineness] = 1;
  return Float64Array.from(nodes).sort();
}

/** Cumulative of the mixture at the nodes, normalised to 1. */
function mixedCumulative(scatterers: readonly Scatterer[], energyKeV: number, v: Float64Array): Float64Array {
  // Densities at the nodes and half-way between them, for Simpson's rule; what all elements share is found once.
  const points = Float64Array.from({ length: 2 * v.length - 1 }, (_, i) =>
    i % 2 === 0 ? v[i / 2] : 0.5 * (v[(i - 1) / 2] + v[(i + 1) / 2]),
  );
  const free = points.map((at) => kleinNishinaShape(energyKeV, at));
  const xTop = energyKeV / HC_KEV_ANGSTROM;
  const places = points.map((at) => logPlace(BINDING_GRID, xTop * Math.sqrt(at)));
  const mixed = new Float64Array(v.length);
  const own = new Float64Array(v.length);
  for (const { shareAt, binding } of scatterers) {
    const density = (i: number) => (binding ? free[i] * valueAtPlace(binding, places[i]) : free[i]);
    let left = density(0);
    for (let i = 1; i < v.length; i++) {
      const right = density(2 * i);
      own[i] = own[i - 1] + ((v[i] - v[i - 1]) * (left + 4 * density(2 * i - 1) + right)) / 6;
      left = right;
    }
    const share = shareAt(energyKeV) / own[v.length - 1];
    for (let i = 0; i < v.length; i++) mixed[i] += share * own[i];
  }
  const total = mixed[v.length - 1];
  return mixed.map((value) => value / total);
}

const doubleView = new Float64Array(1);
const wordView = new Uint32Array(doubleView.buffer);

/**
 * v = (1 − cos θ)/2 of an incoherent scattering.
 *
 * @param table inverse cumulatives of all materials
 * @param base first number of the material in `table`
 * @param u uniform in [0, 1)
 */
export function sampleIncoherent(table: Float64Array, base: number, energyKeV: number, u: number): number {
  doubleView[0] = energyKeV;
  const high = wordView[1];
  const betweenRows = (high & ((1 << ROW_SHIFT) - 1)) * (1 / (1 << ROW_SHIFT));
  let t = Math.sqrt(u) * COLUMNS;
  const column = t | 0;
  t -= column;
  const lower = base + ((high >>> ROW_SHIFT) - ROW_OFFSET) * ROW_LENGTH + column;
  const upper = lower + ROW_LENGTH;
  const low = table[lower] + t * (table[lower + 1] - table[lower]);
  const up = table[upper] + t * (table[upper + 1] - table[upper]);
  return (low + betweenRows * (up - low)) / (1 + energyKeV * (1 / ELECTRON_REST_KEV));
}
