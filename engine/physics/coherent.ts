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
/** Numbers per material: q, A at the nodes, guide, inverse step of log q. */
export const COHERENT_LENGTH = 2 * COHERENT_NODES + COHERENT_GUIDE + 2;

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
  const guide = out.subarray(base + 2 * COHERENT_NODES, base + COHERENT_LENGTH - 1);
  const qTop = (topKeV / HC_KEV_ANGSTROM) ** 2 * 1.0001;
  const step = Math.log(qTop / Q_FIRST) / (COHERENT_NODES - 2);
  out[base + COHERENT_LENGTH - 1] = 1 / step;
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
}

/** Share of A below q. */
function cumulativeAt(table: Float64Array, base: number, q: number): number {
  const values = base + COHERENT_NODES;
  if (q <= table[base + 1]) return (table[values + 1] * q) / table[base + 1];
  const steps = (Math.log(q) - LOG_Q_FIRST) * table[base + COHERENT_LENGTH - 1];
  const i = Math.min(COHERENT_NODES - 2, 1 + Math.floor(steps));
  const part = (q - table[base + i]) / (table[base + i + 1] - table[base + i]);
  return table[values + i] + part * (table[values + i + 1] - table[values + i]);
}

/**
 * v = (1 − cos θ)/2 of a coherent scattering.
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
  const values = base + COHERENT_NODES;
  const guide = values + COHERENT_NODES;
  const qMax = (energyKeV / HC_KEV_ANGSTROM) ** 2;
  const top = cumulativeAt(table, base, qMax);
  for (;;) {
    const a = nextUniform(random) * top;
    let i = table[guide + ((a * COHERENT_GUIDE) | 0)];
    while (i < COHERENT_NODES - 2 && table[values + i + 1] <= a) i++;
    const part = (a - table[values + i]) / (table[values + i + 1] - table[values + i]);
    const v = Math.min(1, (table[base + i] + part * (table[base + i + 1] - table[base + i])) / qMax);
    const cosine = 1 - 2 * v;
    if (2 * nextUniform(random) <= 1 + cosine * cosine) return v;
  }
}
