/**
 * Photons per sr that the samplers of incoherent and coherent scattering send under an angle: the densities of their own
 * tables, so that scoring a direction and drawing it agree to the last digit.
 */
import { ELECTRON_REST_KEV, HC_KEV_ANGSTROM } from '../constants.js';
import { COHERENT_NODES, STEP_PLACE } from './coherent.js';
import { COLUMNS, rowEnergyKeV, ROW_LENGTH, ROW_OFFSET, ROW_SHIFT } from './incoherent.js';

const doubleView = new Float64Array(1);
const wordView = new Uint32Array(doubleView.buffer);

/**
 * Incoherent scattering to v = (1 − cos θ)/2, per sr: dΩ = 4π dv.
 *
 * @param base first number of the material in `table`
 */
export function incoherentDensity(table: Float64Array, base: number, energyKeV: number, v: number): number {
  doubleView[0] = energyKeV;
  const high = wordView[1];
  const part = (high & ((1 << ROW_SHIFT) - 1)) * (1 / (1 << ROW_SHIFT));
  const lower = base + ((high >>> ROW_SHIFT) - ROW_OFFSET) * ROW_LENGTH;
  const upper = lower + ROW_LENGTH;
  const scale = 1 + energyKeV * (1 / ELECTRON_REST_KEV);
  const s = v * scale;
  const at = (column: number) =>
    table[lower + column] + part * (table[upper + column] - table[lower + column]);
  let low = 0;
  let top = COLUMNS;
  while (top - low > 1) {
    const middle = (low + top) >> 1;
    if (at(middle) > s) top = middle;
    else low = middle;
  }
  const below = at(low);
  const step = at(top) - below;
  if (!(step > 0) || s > below + step) return 0;
  // u = t², t a straight line in s between columns: du/dv = 2 t dt/ds ds/dv
  const t = (low + (s - below) / step) / COLUMNS;
  return ((2 * t) / (COLUMNS * step)) * (scale / (4 * Math.PI));
}

/** Steps of energy in a row of norms: 16 to an octave, as the rows of incoherent angles. */
export { incoherentRows as coherentRows } from './incoherent.js';

/** ∫ F² (1 + cos² θ)/2 dq up to backscatter, by row of energy, for one material's table. */
export function coherentNorms(table: Float64Array, base: number, rows: number): Float64Array {
  return Float64Array.from({ length: rows }, (_, row) => {
    const top = (rowEnergyKeV(row) / HC_KEV_ANGSTROM) ** 2;
    let sum = 0;
    for (let i = 0; i + 1 < COHERENT_NODES; i++) {
      const [low, high] = [table[base + i], table[base + i + 1]];
      if (low >= top) break;
      const slope = slopeAt(table, base, i);
      sum += slope * top * (dipoleIntegral(Math.min(1, high / top)) - dipoleIntegral(low / top));
    }
    return sum;
  });
}

/** ∫ (1 + (1 − 2 v)²)/2 dv. */
function dipoleIntegral(v: number): number {
  return v - v * v + (2 / 3) * v * v * v;
}

function slopeAt(table: Float64Array, base: number, i: number): number {
  const values = base + COHERENT_NODES;
  return (table[values + i + 1] - table[values + i]) / (table[base + i + 1] - table[base + i]);
}

/**
 * Coherent scattering to v, per sr.
 *
 * @param base first number of the material in `table`
 * @param norms those of the material
 */
export function coherentDensity(
  table: Float64Array,
  base: number,
  norms: Float64Array,
  normBase: number,
  energyKeV: number,
  v: number,
): number {
  doubleView[0] = energyKeV;
  const high = wordView[1];
  const part = (high & ((1 << ROW_SHIFT) - 1)) * (1 / (1 << ROW_SHIFT));
  const row = normBase + (high >>> ROW_SHIFT) - ROW_OFFSET;
  const norm = norms[row] + part * (norms[row + 1] - norms[row]);
  const top = (energyKeV / HC_KEV_ANGSTROM) ** 2;
  const q = v * top;
  let i = 0;
  if (q > table[base + 1]) {
    const steps = Math.log(q / table[base + 1]) * table[base + STEP_PLACE];
    i = Math.min(COHERENT_NODES - 2, 1 + Math.floor(steps));
  }
  const cosine = 1 - 2 * v;
  return (slopeAt(table, base, i) * top * 0.5 * (1 + cosine * cosine)) / (norm * 4 * Math.PI);
}
