/**
 * The compiled problem: everything a worker needs, as typed arrays in shared memory, made once per run from the setup.
 * Layers refer to slots; a slot is one material at one density. Vacuum is a slot whose coefficients are 0.
 */
import type { BremsstrahlungTables } from './physics/bremsstrahlung-tables.js';
import type { DopplerTables } from './physics/doppler.js';
import type { RelaxationTables } from './physics/relaxation.js';
import type { EnergyGrid } from './energy-grid.js';
import type { EmissionTable } from './emission.js';
import type { TallyLayout } from './tally-layout.js';
import type { SourceShape } from './setup.js';
import type { DeepProblem } from './deep/choice.js';
import type { Constants } from './uncollided.js';
import type { SolidProblem } from './solid/source.js';

/**
 * Numbers per cell and slot, each a straight line a + b E over the cell: linear attenuation coefficient (1/cm), then
 * the cumulative shares of photoelectric, + incoherent, + coherent (the rest is pair). One cache line.
 */
export const CELL_LENGTH = 8;

/** Numbers per cell and dose quantity in `doseLines`: the line a + b E. */
export const DOSE_LINE = 2;

/** Which history loop plays the problem: chosen once per run, so that infinite stacks pay nothing for finite ones. */
export type Kernel = 'slab' | 'solid' | 'deep';

export interface Problem {
  readonly kernel: Kernel;
  readonly seed: string;
  readonly grid: EnergyGrid;
  readonly cellCount: number;
  readonly cells: Float64Array;

  readonly layers: number;
  /** Layer l lies between boundaries l and l + 1, cm from the front face. */
  readonly boundariesCm: Float64Array;
  readonly slotOfLayer: Int32Array;

  readonly source: SourceShape;
  /** Direction cosine of a beam; layer number of an embedded source. */
  readonly beamCosine: number;
  readonly sourceLayer: number;
  readonly emission: EmissionTable;
  /** Every history starts with it; 1 unless directions are chosen from a part of the sphere. */
  readonly historyWeight: number;

  readonly cutoffKeV: number;
  /** No process beyond photoelectric absorption and free-electron scattering is on. */
  readonly plain: boolean;

  readonly incoherent: Float64Array;
  readonly incoherentBase: Int32Array;
  readonly coherent: Float64Array;
  readonly coherentBase: Int32Array;

  readonly dopplerTopKeV: number;
  readonly doppler: DopplerTables;
  readonly dopplerBase: Int32Array;
  readonly dopplerCount: Int32Array;

  /** Shells whose vacancies are followed, per slot; the cumulative share of each is a line over each cell. */
  readonly channelBase: Int32Array;
  readonly channelCount: Int32Array;
  readonly channelShell: Int32Array;
  /** Highest binding energy among the followed shells a photon can reach, by slot and cell; 0 without any. */
  readonly reachableKeV: Float64Array;
  readonly channelTable: Float64Array;
  readonly channelTableBase: Int32Array;
  readonly relaxation: RelaxationTables;

  /** Per slot, one table per emission cutoff of local-cutoff.ts; empty where nothing radiates. */
  readonly bremsstrahlung: readonly (readonly BremsstrahlungTables[])[];

  /** Chances that an electron radiates nothing, of all tables by energy bucket; where each table's start. */
  readonly silent: Float64Array;
  readonly silentBase: Int32Array;

  readonly densityOfSlot: Float64Array;
  readonly localCutoffKeV: Float64Array;
  readonly radiationStep: Int32Array;

  /** Only where layers have edges. */
  readonly solid: SolidProblem | null;

  /** Dose per fluence; see dose-lines.ts. */
  readonly doseLines: Float64Array;
  /** Uncollided dose at the faces of an endless stack in analog transport; null where none is asked for. */
  readonly faceDose: Constants | null;
  /** What steers deep transport; null in analog. */
  readonly deep: DeepProblem | null;

  readonly tally: TallyLayout;
}

/** A Float64Array that all workers share. */
export function sharedDoubles(length: number): Float64Array {
  return new Float64Array(new SharedArrayBuffer(8 * length));
}

/** An Int32Array that all workers share. */
export function sharedInts(length: number): Int32Array {
  return new Int32Array(new SharedArrayBuffer(4 * length));
}
