/**
 * Coherent scattering angles: dσ/dΩ ∝ F(x, Z)² (1 + cos² θ)/2.
 *
 * One table per material holds A(q) = ∫₀^q F² dq' over q = x², x = sin(θ/2)/λ in 1/Å, with F² summed over the atoms
 * of the mixture, so that the element struck is chosen by its share at each angle. A draw inverts A on [0, A(q_max)],
 * exactly at every energy, and keeps the angle with probability (1 + cos² θ)/2, which is 2/3 at the least.
 */
import { HC_KEV_ANGSTROM } from '../constants.js';
import { nextUniform, type StreamState } from '../random.js';

/** Nodes of q (even in log q), and guide entries (even in A) that start the search. */
export const COHERENT_NODES = 600;
export const COHERENT_GUIDE = 1024;
/** Steps of energy in the table of A(q_max): 2^6 to an octave, found from the bits of the energy, up to 2^15 keV. */
const TOP_BITS = 6;
export const TOP_SHIFT = 20 - TOP_BITS;
export const TOP_OFFSET = 1023 << TOP_BITS;
const TOPS = 15 << TOP_BITS;
/** Where the guide, the tops and the inverse step of log q stand in a material's numbers, after q and A at the nodes. */
export const GUIDE_PLACE = 2 * COHERENT_NODES;
export const TOP_PLACE = GUIDE_PLACE + COHERENT_GUIDE + 1;
export const STEP_PLACE = TOP_PLACE + TOPS + 1;
export const COHERENT_LENGTH = STEP_PLACE + 1;

const Q_FIRST = 1e-6;
const LOG_Q_FIRST = Math.log(Q_FIRST);

/** One element of the mixture: its atoms (relative number) and F(x). */
export interface CoherentScatterer {
  readonly atoms: number;
  readonly formFactorAt: (xPerAngstrom: number) => number;
}

/** Fills one material's table from `out[base]` on, up to backscatter at `topKeV`. */
export function fillCoherentTable(
  scatterers: readonly CoherentScatterer[],
  topKeV: number,
  out: Float64Array,
  base: number,
): void {
  const q = out.subarray(base, base + COHERENT_NODES);
  const a = out.subarray(base + COHERENT_NODES, base + 2 * COHERENT_NODES);
  const guide = out.subarray(base + GUIDE_PLACE, base + TOP_PLACE);
  // A step of the tops beyond, which is read for energies just below it.
  const qTop = ((topKeV * (1 + 2 ** -TOP_BITS)) / HC_KEV_ANGSTROM) ** 2 * 1.0001;
  const step = Math.log(qTop / Q_FIRST) / (COHERENT_NODES - 2);
  out[base + STEP_PLACE] = 1 / step;
  const squaredFactor = (at: number) => {
    const x = Math.sqrt(at);
    let sum = 0;
    for (const { atoms, formFactorAt } of scatterers) sum += atoms * formFactorAt(x) ** 2;
    return sum;
  };
  let left = squaredFactor(0);
  for (let i = 1; i < COHERENT_NODES; i++) {
    q[i] = Q_FIRST * Math.exp((i - 1) * step);
    const right = squaredFactor(q[i]);
    a[i] = a[i - 1] + ((q[i] - q[i - 1]) * (left + 4 * squaredFactor(0.5 * (q[i - 1] + q[i])) + right)) / 6;
    left = right;
  }
  const total = a[COHERENT_NODES - 1];
  let node = 0;
  for (let i = 0; i < COHERENT_NODES; i++) a[i] /= total;
  for (let i = 0; i <= COHERENT_GUIDE; i++) {
    while (node < COHERENT_NODES - 2 && a[node + 1] <= i / COHERENT_GUIDE) node++;
    guide[i] = node;
  }
  for (let i = 0; i <= TOPS; i++) {
    const energyKeV = 2 ** (i >> TOP_BITS) * (1 + (i & ((1 << TOP_BITS) - 1)) / (1 << TOP_BITS));
    out[base + TOP_PLACE + i] = cumulativeAt(out, base, Math.min(qTop, (energyKeV / HC_KEV_ANGSTROM) ** 2));
  }
}

/** Share of A below q. */
function cumulativeAt(table: Float64Array, base: number, q: number): number {
  const values = base + COHERENT_NODES;
  if (q <= table[base + 1]) return (table[values + 1] * q) / table[base + 1];
  const steps = (Math.log(q) - LOG_Q_FIRST) * table[base + STEP_PLACE];
  const i = Math.min(COHERENT_NODES - 2, 1 + Math.floor(steps));
  const part = (q - table[base + i]) / (table[base + i + 1] - table[base + i]);
  return table[values + i] + part * (table[values + i + 1] - table[values + i]);
}

const doubleView = new Float64Array(1);
const wordView = new Uint32Array(doubleView.buffer);

/**
 * v = (1 − cos θ)/2 of a coherent scattering. The loop of slab/kernel.ts has a copy of it.
 *
 * @param table tables of all materials
 * @param base first number of the material in `table`
 */
export function sampleCoherent(
  table: Float64Array,
  base: number,
  energyKeV: number,
  random: StreamState,
): number {
  doubleView[0] = energyKeV;
  const high = wordView[1];
  const row = base + TOP_PLACE + (high >>> TOP_SHIFT) - TOP_OFFSET;
  const betweenRows = (high & ((1 << TOP_SHIFT) - 1)) * (1 / (1 << TOP_SHIFT));
  const top = table[row] + betweenRows * (table[row + 1] - table[row]);
  const values = base + COHERENT_NODES;
  const perQ = (HC_KEV_ANGSTROM * HC_KEV_ANGSTROM) / (energyKeV * energyKeV);
  for (;;) {
    const a = nextUniform(random) * top;
    let i = table[base + GUIDE_PLACE + ((a * COHERENT_GUIDE) | 0)];
    while (a >= table[values + i + 1]) i++;
    const part = (a - table[values + i]) / (table[values + i + 1] - table[values + i]);
    const v = Math.min(1, (table[base + i] + part * (table[base + i + 1] - table[base + i])) * perQ);
    const cosine = 1 - 2 * v;
    if (2 * nextUniform(random) <= 1 + cosine * cosine) return v;
  }
}
