/**
 * What a run gives back: every figure with its standard error, every spectrum, the conservation check and how
 * long it took. Everything is per source photon unless a unit says otherwise. Unknown is null, never 0.
 */
import type { Shard } from './batch-plan.js';
import type { RunState } from './run-sums.js';
import type { Setup } from './setup.js';

/** One figure; the columns of totals.arrow. */
export interface QuantityRow {
  readonly quantity: string;
  /** Layer (or dose point) the figure belongs to; null for the whole stack. */
  readonly layer: string | null;
  /** Source line the figure belongs to; null for all lines together. */
  readonly lineKeV: number | null;
  readonly mean: number | null;
  readonly stdError: number | null;
  readonly unit: string;
  /** How far the error can be relied on, of weighted figures whose higher moments are kept. */
  readonly reliability?: Reliability;
}

/** See reliability.ts. */
export interface Reliability {
  /** Histories that contributed. */
  readonly contributing: number;
  /** Relative variance of the variance; null where nothing varies. */
  readonly vov: number | null;
}

export type SpectrumTally =
  | 'transmitted'
  | 'reflected'
  | 'side_escape'
  | 'deposited'
  | 'pulse_height'
  | 'anticoincidence'
  | 'coincidence'
  | 'pulse_height_sum';

export interface Spectrum {
  readonly tally: SpectrumTally;
  readonly layer: string | null;
  readonly energyLowKeV: Float64Array;
  readonly energyHighKeV: Float64Array;
  readonly mean: Float64Array;
  readonly stdError: Float64Array;
}

/** One slice of a depth profile; the columns of depth.arrow. */
export interface DepthRow {
  readonly layer: string;
  /** From the layer's face on the source side. */
  readonly depthLowCm: number;
  readonly depthHighCm: number;
  readonly quantity: string;
  readonly mean: number | null;
  readonly stdError: number | null;
  readonly unit: string;
}

/** The lines of one series of one element, strongest first; their shares add up to 1. */
export interface XRayGroup {
  readonly element: string;
  readonly series: 'Ka' | 'Kb';
  /** Photons below it set none of these free. */
  readonly edgeKeV: number;
  readonly lines: readonly { readonly energyKeV: number; readonly share: number }[];
}

/** The K X rays of a detector layer. */
export interface DetectorXRays {
  readonly layer: string;
  readonly groups: readonly XRayGroup[];
}

/** One warning of the closed vocabulary in warnings.ts, with how often it occurred. */
export interface Warning {
  readonly code: string;
  readonly message: string;
  readonly count: number;
}

/** Energy and photon book-keeping of the whole run (sums over histories, source weight included). */
export interface Balance {
  readonly energyInKeV: number;
  readonly energyDepositedKeV: number;
  readonly energyOutKeV: number;
  /** |in − deposited − out| / in; a run fails above 1e-9, but for weighted transport, whose books close on the mean. */
  readonly relativeError: number;
  /** Standard error of that in weighted transport. */
  readonly relativeStdError?: number;
}

export interface Timings {
  /** From the call to the result. */
  readonly wallS: number;
  /** Sum over workers of the time inside batches. */
  readonly workerS: number;
  /** Histories over the time inside workers from first to last history, all workers together. */
  readonly historiesPerSecond: number;
}

export type StopReason = 'histories' | 'until' | 'time_limit' | 'interrupted';

export interface RunResult {
  readonly setup: Setup;
  readonly histories: number;
  readonly batches: number;
  readonly totals: readonly QuantityRow[];
  readonly spectra: readonly Spectrum[];
  /** K X rays of the detectors that have any. */
  readonly xRays?: readonly DetectorXRays[];
  /** Depth profile; absent or empty where none is scored. */
  readonly depth?: readonly DepthRow[];
  readonly balance: Balance;
  readonly warnings: readonly Warning[];
  readonly timings: Timings;
  readonly stopped: StopReason;
}

/** State of a run in progress, at a batch boundary. */
export interface Progress {
  readonly histories: number;
  readonly historiesPlanned: number;
  readonly elapsedS: number;
  /** Expected remaining time; null while unknown. */
  readonly remainingS: number | null;
  /** The figure `until` watches, or the leading figure of the setup. */
  readonly figure: QuantityRow | null;
}

/** Where and how often the state of a run is put into safety. */
export interface Checkpointing {
  readonly everyS: number;
  /** Called at a batch boundary, and at the end of a run that is not complete. Must be done with the state on return. */
  readonly save: (state: RunState) => void;
}

export interface SimulateOptions {
  /** Worker threads; default: the cores of the machine. */
  readonly threads?: number;
  readonly onProgress?: (progress: Progress) => void;
  /** Aborting finishes the batches in hand and returns what there is (`stopped: 'interrupted'`). */
  readonly signal?: AbortSignal;
  /** Goes on from the saved state of a run of the same setup and shard. */
  readonly from?: RunState | null;
  /** Plays one part of the run only, to be merged with the others; not with `until` or a time limit. */
  readonly shard?: Shard | null;
  readonly checkpoint?: Checkpointing | null;
}
