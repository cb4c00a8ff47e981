/** The tables of the elements that the stopping of electrons needs, read on first use. */
import { dataTable, numberColumn } from './data-table.js';
import { elementOf } from './elements.js';

/** Electrons and binding energy of the subshells of one element. */
export interface Subshells {
  readonly electrons: Float64Array;
  readonly bindingEv: Float64Array;
}

/** Radiative stopping powers at the tabulated atomic numbers and energies, both ascending. */
export interface RadiativeTable {
  readonly z: Float64Array;
  readonly energyKeV: Float64Array;
  /** Row of `energyKeV.length` values per atomic number, MeV cm²/g. */
  readonly radiative: Float64Array;
}

let radiative: RadiativeTable | undefined;

/** Mean excitation energy (eV) of the element in its usual state: ICRU Report 37. */
export function elementMeanExcitationEv(z: number): number {
  return numberColumn(dataTable('electron-elements'), 'mean_excitation_eV')[elementOf(z).z - 1];
}

/** The occupied subshells of an element. */
export function subshells(z: number): Subshells {
  const table = dataTable('electron-shells');
  const rows = numberColumn(table, 'z') as ArrayLike<number>;
  let from = 0;
  while (rows[from] < z) from++;
  let to = from;
  while (to < rows.length && rows[to] === z) to++;
  return {
    electrons: numberColumn(table, 'electrons').slice(from, to),
    bindingEv: numberColumn(table, 'binding_keV')
      .slice(from, to)
      .map((keV) => 1000 * keV),
  };
}

/** The table of radiative stopping powers. */
export function radiativeTable(): RadiativeTable {
  if (!radiative) {
    const table = dataTable('electron-radiative');
    radiative = {
      z: Float64Array.from(new Set(numberColumn(table, 'z'))),
      energyKeV: Float64Array.from(new Set(numberColumn(table, 'energy_keV'))),
      radiative: numberColumn(table, 'radiative'),
    };
  }
  return radiative;
}
