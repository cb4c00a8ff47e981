/**
 * In which shell a photoelectric absorption leaves its vacancy: shares of K, L1, L2, L3 and all others.
 *
 * Each shell's curve runs straight in ln–ln between tabulated energies. A shell takes part from its binding energy
 * on, which is XCOM's absorption edge: EPDL97 has the edge a few eV beside it, so its curve is cut there or goes
 * on down to it along its first line. Above the table's end (484–502 keV) shares stay as they are there.
 */
import { dataTable, numberColumn } from './data-table.js';
import { relaxation } from './relaxation.js';

/** Shells in the order of the shares: 0 K, 1 L1, 2 L2, 3 L3, 4 all others. */
export const SUBSHELL_COUNT = 5;
const OTHERS = 4;

interface Curve {
  /** Below it the shell takes no part. */
  readonly edgeKeV: number;
  readonly logEnergy: Float64Array;
  readonly logValue: Float64Array;
}

const cache = new Map<number, readonly (Curve | null)[]>();

/**
 * Shares of the photoelectric coefficient of element z (1–100) by shell, in the order K, L1, L2, L3, others;
 * they add up to 1. Written into `out` (5 numbers) where given.
 * Source: EPDL97; see data/README.md.
 * @throws MaterialError for another z
 */
export function subshellShares(
  z: number,
  energyKeV: number,
  out = new Float64Array(SUBSHELL_COUNT),
): Float64Array {
  const curves = subshellCurves(z);
  let total = 0;
  for (let shell = 0; shell < SUBSHELL_COUNT; shell++) {
    const curve = curves[shell];
    out[shell] = curve && energyKeV >= curve.edgeKeV ? valueAt(curve, Math.log(energyKeV)) : 0;
    total += out[shell];
  }
  // Below the lowest followed edge nothing is tabulated: all absorptions are in outer shells.
  if (total === 0) {
    out[OTHERS] = 1;
    return out;
  }
  for (let shell = 0; shell < SUBSHELL_COUNT; shell++) out[shell] /= total;
  return out;
}

function valueAt({ logEnergy, logValue }: Curve, at: number): number {
  const last = logEnergy.length - 1;
  const x = Math.min(at, logEnergy[last]);
  let low = 0;
  let high = last;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (logEnergy[middle] > x) high = middle;
    else low = middle;
  }
  const t = (x - logEnergy[low]) / (logEnergy[high] - logEnergy[low]);
  return Math.exp(logValue[low] + t * (logValue[high] - logValue[low]));
}

function subshellCurves(z: number): readonly (Curve | null)[] {
  let curves = cache.get(z);
  if (!curves) {
    curves = readCurves(z);
    cache.set(z, curves);
  }
  return curves;
}

function readCurves(z: number): readonly (Curve | null)[] {
  const { shells } = relaxation(z);
  const table = dataTable('subshell-photoelectric');
  const numbers = table.getChild('z')!.toArray() as Uint8Array;
  const shellColumn = table.getChild('shell')!.toArray() as Uint8Array;
  const energy = numberColumn(table, 'energy_keV');
  const value = numberColumn(table, 'photoelectric');
  return Array.from({ length: SUBSHELL_COUNT }, (_, shell) => {
    const rows: number[] = [];
    for (let row = numbers.indexOf(z); numbers[row] === z; row++)
      if (shellColumn[row] === shell) rows.push(row);
    const known = shell === OTHERS || shell < shells.length;
    if (rows.length === 0 || !known) return null;
    return {
      edgeKeV: shell === OTHERS ? 0 : shells[shell].bindingKeV,
      logEnergy: Float64Array.from(rows, (row) => Math.log(energy[row])),
      logValue: Float64Array.from(rows, (row) => Math.log(value[row])),
    };
  });
}
