/**
 * Everything in a problem that depends on materials, energies and physics but not on thicknesses or densities, kept
 * from one problem to the next: the points of a sweep mostly differ in what costs nothing to compile.
 *
 * Tables end at a step of half an octave above the highest source energy, so that an energy scan needs few of them.
 * The step follows from the setup alone: a problem has the same tables whatever was compiled before it.
 */
import { BoundedCache } from './bounded-cache.js';
import {
  makeChannels,
  makeDoppler,
  makeRadiation,
  makeScatteringTables,
  type Channels,
  type Doppler,
  type ScatteringTables,
} from './compile-physics.js';
import { compositionKey, gridOf, makeCells, type Slot } from './compile-slots.js';
import type { EnergyGrid } from './energy-grid.js';
import type { BremsstrahlungTables } from './physics/bremsstrahlung-tables.js';
import { makeLocalCutoffs, RADIATION_STEPS, type LocalCutoffs } from './local-cutoff.js';
import { CELL_LENGTH, sharedDoubles, sharedInts } from './problem.js';
import { MAX_ENERGY_KEV, type Physics } from './setup.js';

/**
 * A problem's tables take about 1 MB, half of it for radiation. A scan of all energies has 30 of them per material;
 * these bounds keep those of a few materials, and a sweep of very many below a third of its memory limit.
 */
const TABLES_BYTES = 48e6;
const RADIATION_BYTES = 48e6;

export interface Tables extends ScatteringTables, Doppler, Channels, LocalCutoffs {
  readonly grid: EnergyGrid;
  readonly cells: Float64Array;
  readonly bremsstrahlung: readonly (readonly BremsstrahlungTables[])[];
  readonly silent: Float64Array;
  readonly silentBase: Int32Array;
  readonly densityOfSlot: Float64Array;
}

type Radiation = Pick<Tables, 'bremsstrahlung' | 'silent' | 'silentBase'>;

type SharedTables = Omit<Tables, 'cells' | 'bremsstrahlung' | 'silent' | 'silentBase' | 'densityOfSlot'> & {
  /** Cells of materials of density 1. */
  readonly massCells: Float64Array;
  /** Those of the densities asked for last. */
  readonly last: { key: string; cells: Float64Array };
};

const sharedTables = new BoundedCache<SharedTables>(TABLES_BYTES);
const slotRadiation = new BoundedCache<readonly BremsstrahlungTables[]>(RADIATION_BYTES);
/** The same tables once more, with what is put together of those of all slots. */
const stackRadiation = new BoundedCache<Radiation>(RADIATION_BYTES);

/** The tables of slots up to `topKeV`. */
export function tablesOf(slots: readonly Slot[], topKeV: number, physics: Physics): Tables {
  const tableTopKeV = tableTop(topKeV);
  const compositions = slots.map(({ constituents }) => compositionKey(constituents)).join(';');
  const kind = `${tableTopKeV};${Object.values(physics).join()}`;
  const { massCells, last, ...shared } = sharedTables.get(`${kind};${compositions}`, () =>
    makeShared(slots, tableTopKeV, physics),
  );
  const densities = slots.map(({ densityGPerCm3 }) => densityGPerCm3);
  if (last.key !== densities.join()) {
    last.key = densities.join();
    last.cells = atDensities(massCells, densities);
  }
  return {
    ...shared,
    cells: last.cells,
    densityOfSlot: Float64Array.from(densities),
    ...stackRadiation.get(`${kind};${slots.map(({ key }) => key).join('|')}`, () => {
      const bremsstrahlung = slots.map((slot) =>
        slotRadiation.get(`${kind};${slot.key}`, () => makeRadiation(slot, tableTopKeV, physics)),
      );
      return { bremsstrahlung, ...joinSilent(bremsstrahlung) };
    }),
  };
}

/** The chances of silence of all bremsstrahlung tables in one array, for the history loop. */
function joinSilent(bremsstrahlung: Tables['bremsstrahlung']): Pick<Tables, 'silent' | 'silentBase'> {
  const silentBase = sharedInts(bremsstrahlung.length * RADIATION_STEPS);
  const parts: Float64Array[] = [];
  let length = 0;
  bremsstrahlung.forEach((tables, slot) => {
    for (let step = 0; step < RADIATION_STEPS && tables.length > 0; step++) {
      // The first settles most cases for all: none of the others may be surer of a photon, which rounding could make them.
      const silent =
        step > 0
          ? tables[Math.min(step, tables.length - 1)].silent
          : tables[0].silent.map((_, bucket) => Math.min(...tables.map((table) => table.silent[bucket])));
      const known = step < tables.length ? -1 : silentBase[slot * RADIATION_STEPS + tables.length - 1];
      silentBase[slot * RADIATION_STEPS + step] = known < 0 ? length : known;
      if (known >= 0) continue;
      parts.push(silent);
      length += silent.length;
    }
  });
  const silent = sharedDoubles(length);
  let at = 0;
  for (const part of parts) {
    silent.set(part, at);
    at += part.length;
  }
  return { silent, silentBase };
}

/** Half octaves: 1, 1.5, 2, 3, 4, 6 … keV. */
function tableTop(topKeV: number): number {
  const octave = 2 ** Math.floor(Math.log2(topKeV));
  const step = [1, 1.5, 2].find((part) => octave * part >= topKeV)!;
  return Math.min(MAX_ENERGY_KEV, octave * step);
}

function makeShared(slots: readonly Slot[], topKeV: number, physics: Physics): SharedTables {
  const grid = gridOf(slots, topKeV);
  const unit = slots.map((slot) => ({ ...slot, densityGPerCm3: 1 }));
  const massCells = makeCells(unit, grid, physics);
  return {
    grid,
    massCells,
    ...makeLocalCutoffs(massCells, grid, physics.cutoffKeV),
    ...makeScatteringTables(slots, topKeV, physics),
    ...makeDoppler(slots, physics),
    ...makeChannels(slots, grid, physics),
    last: { key: '', cells: new Float64Array(0) },
  };
}

/** Attenuation coefficients, the first line of each cell, times the densities of the slots. */
function atDensities(massCells: Float64Array, densities: readonly number[]): Float64Array {
  const cells = sharedDoubles(massCells.length);
  cells.set(massCells);
  const perSlot = massCells.length / densities.length;
  densities.forEach((densityGPerCm3, s) => {
    for (let i = s * perSlot; i < (s + 1) * perSlot; i += CELL_LENGTH) {
      cells[i] *= densityGPerCm3;
      cells[i + 1] *= densityGPerCm3;
    }
  });
  return cells;
}
