/**
 * Atomic form factors and incoherent scattering functions: how the electrons of an atom, bound as they are, share
 * a momentum transfer. x = sin(θ/2)/λ in 1/Å, that is E/(12.39842 keV Å) · sin(θ/2).
 *
 * Between nodes both run straight in ln–ln; below the first node after 0 they keep their quadratic law,
 * Z − F ∝ x² and S ∝ x²; beyond the last node F keeps its power law and S stays.
 */
import { dataTable } from './data-table.js';
import { elementOf } from './elements.js';

/** Planck's constant times the speed of light in keV·Å (CODATA 2018); x = E sin(θ/2) / it. */
export const HC_KEV_ANGSTROM = 12.398419843320026;

const MAX_Z = 100;

export interface FormFactor {
  /** Momentum transfer in 1/Å, ascending from 0 to 2000 (20 MeV straight back is 1613). */
  readonly x: Float64Array;
  /** Form factor F(x, Z); Z at x = 0. */
  readonly f: Float64Array;
}

export interface IncoherentFunction {
  /** Momentum transfer in 1/Å, ascending from 0 to 2000. */
  readonly x: Float64Array;
  /** Incoherent scattering function S(x, Z); 0 at x = 0, never falling, Z at the end. */
  readonly s: Float64Array;
}

interface ScatteringFactors {
  readonly x: Float64Array;
  readonly f: Float64Array;
  readonly s: Float64Array;
}

const cache = new Map<number, ScatteringFactors>();

/**
 * The tabulated form factor of element z (1–100) for coherent scattering.
 * Source: Hubbell et al. 1975 and Hubbell & Øverbø 1979; see data/README.md.
 * @throws MaterialError for another z
 */
export function formFactor(z: number): FormFactor {
  const { x, f } = scatteringFactors(z);
  return { x, f };
}

/**
 * The tabulated incoherent scattering function of element z (1–100).
 * Source: Hubbell et al. 1975; see data/README.md.
 * @throws MaterialError for another z
 */
export function incoherentFunction(z: number): IncoherentFunction {
  const { x, s } = scatteringFactors(z);
  return { x, s };
}

/** Form factor F of element z at momentum transfer x (1/Å). */
export function formFactorAt(z: number, x: number): number {
  const { x: nodes, f } = scatteringFactors(z);
  if (x < nodes[1]) return z - (z - f[1]) * (x / nodes[1]) ** 2;
  return logLog(nodes, f, x);
}

/** Incoherent scattering function S of element z at momentum transfer x (1/Å). */
export function incoherentFunctionAt(z: number, x: number): number {
  const { x: nodes, s } = scatteringFactors(z);
  if (x < nodes[1]) return s[1] * (x / nodes[1]) ** 2;
  return Math.min(z, logLog(nodes, s, x));
}

/** Straight line in ln–ln through the nodes around `at`; beyond the last node the last line goes on. */
function logLog(x: Float64Array, y: Float64Array, at: number): number {
  let low = 1;
  let high = x.length - 1;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (x[middle] > at) high = middle;
    else low = middle;
  }
  return y[low] * (y[high] / y[low]) ** (Math.log(at / x[low]) / Math.log(x[high] / x[low]));
}

function scatteringFactors(z: number): ScatteringFactors {
  let factors = cache.get(z);
  if (!factors) {
    factors = readFactors(z);
    cache.set(z, factors);
  }
  return factors;
}

function readFactors(z: number): ScatteringFactors {
  elementOf(z); // refuses any other z
  const table = dataTable('scattering-factors');
  const rowsPerElement = table.numRows / MAX_Z;
  const column = (name: string) =>
    Float64Array.from(
      (table.getChild(name)!.toArray() as Float64Array).subarray(
        (z - 1) * rowsPerElement,
        z * rowsPerElement,
      ),
    );
  return { x: column('x'), f: column('form_factor'), s: column('incoherent_function') };
}
