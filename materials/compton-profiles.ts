/**
 * Compton profiles: the distribution of an electron's momentum along the momentum transfer, shell by shell, for
 * the Doppler broadening of the scattered energy in the impulse approximation.
 */
import { dataTable } from './data-table.js';
import { elementOf } from './elements.js';

export interface ShellProfile {
  /** K, L1, … Q1. */
  readonly name: string;
  readonly electrons: number;
  /** Binding energy (Larkins 1977, EADL97 where he gives none); that of K to M5 is XCOM's absorption edge. */
  readonly bindingKeV: number;
  /** Profile per electron at `pz`, in 1/atomic unit; even in pz, its integral from −∞ to ∞ is 1. */
  readonly j: Float64Array;
}

export interface ComptonProfiles {
  /** Momentum in atomic units (ħ/a₀; m c is 137.036 of them), ascending from 0 to 1000. */
  readonly pz: Float64Array;
  /** From K outwards; the electrons add up to Z. */
  readonly shells: readonly ShellProfile[];
}

let momenta: Float64Array | undefined;
const cache = new Map<number, ComptonProfiles>();

/**
 * Compton profiles of every occupied shell of element z (1–100).
 * Source: Biggs, Mendelsohn & Mann 1975; see data/README.md.
 * @throws MaterialError for another z
 */
export function comptonProfiles(z: number): ComptonProfiles {
  let profiles = cache.get(z);
  if (!profiles) {
    profiles = readProfiles(z);
    cache.set(z, profiles);
  }
  return profiles;
}

function readProfiles(z: number): ComptonProfiles {
  elementOf(z); // refuses any other z
  const table = dataTable('compton-profiles');
  momenta ??= Float64Array.from(JSON.parse(table.schema.metadata.get('momentum_atomic_units')!) as number[]);
  const numbers = table.getChild('z')!.toArray() as Uint8Array;
  const shells: ShellProfile[] = [];
  for (let row = numbers.indexOf(z); numbers[row] === z; row++) {
    const value = (name: string) => table.getChild(name)!.get(row) as unknown;
    shells.push({
      name: value('shell') as string,
      electrons: value('electrons') as number,
      bindingKeV: value('binding_keV') as number,
      j: Float64Array.from(value('profile') as Iterable<number>),
    });
  }
  return { pz: momenta, shells };
}
