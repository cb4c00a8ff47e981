/** What the journal of a sweep holds: what the sweep is, the rows of figures, the points one by one, the end. */
import { createHash } from 'node:crypto';
import type { QuantityRow, RunState, Shard, StopReason, Sums, Warning } from '../../engine/index.js';
import type { JournalRecord } from './journal.js';

export const SWEEP_FORMAT = 'thickset sweep 1';

/** What must be the same for the results to be the same. */
export type SweepIdentity = Readonly<Record<string, unknown>>;

export interface ParameterFacts {
  readonly name: string;
  /** Of all its values; null where they are texts. */
  readonly unit: string | null;
  /** One for each point. */
  readonly values: readonly (number | string)[];
}

export interface BeginRecord {
  readonly kind: 'begin';
  readonly format: typeof SWEEP_FORMAT;
  readonly version: string;
  readonly title: string;
  readonly seed: string;
  /** The sweep file, and the base where that is another file. */
  readonly text: string;
  readonly baseText: string | null;
  readonly identity: SweepIdentity;
  readonly shard: Shard | null;
  readonly spectra: boolean;
  readonly timeLimitS: number | null;
  readonly points: number;
  readonly parameters: readonly ParameterFacts[];
  readonly seeds: readonly string[];
}

/** What the figures of a point are: many points share one such list. */
export type RowLabel = Pick<QuantityRow, 'quantity' | 'layer' | 'lineKeV' | 'unit'>;

interface RowsRecord {
  readonly kind: 'rows';
  readonly id: string;
  readonly rows: readonly RowLabel[];
}

/** done: its histories are played or its precision is reached; playing: it can be gone on with. */
export type PointStatus = 'done' | 'playing' | 'failed';

interface PointFacts {
  readonly point: number;
  readonly status: PointStatus;
  readonly histories: number;
  readonly batches: number;
  /** Batches until all its histories are played. */
  readonly batchesPlanned: number;
  readonly stopped: StopReason | null;
  /** Why a point failed. */
  readonly error: string | null;
  readonly warnings: readonly Warning[];
  /** Position of the figure that tells how precise the point is. */
  readonly watched: number | null;
  /** Time inside batches, of all sessions. */
  readonly workerS: number;
  /** Time the sweep had taken then, all sessions together. */
  readonly elapsedS: number;
}

/** Facts that say how the numbers of a record are cut. */
interface StateFacts {
  readonly closed: number;
  readonly figures: number;
  readonly oddities: RunState['oddities'];
}

interface PointRecord extends PointFacts {
  readonly kind: 'point';
  readonly rows: string | null;
  readonly state: StateFacts | null;
}

/** A point as it stood when it was recorded. */
export interface PointEntry extends PointFacts {
  readonly rows: readonly RowLabel[];
  /** Mean and standard error of each row; NaN where unknown. */
  readonly figures: Float64Array;
  /** Sums of the figures, for going on; null where there is nothing to go on with, or it is in a file of its own. */
  readonly state: RunState | null;
}

export interface EndRecord {
  readonly kind: 'end';
  readonly reason: 'complete' | 'time_limit';
  readonly elapsedS: number;
}

export type AnyRecord = BeginRecord | RowsRecord | PointRecord | EndRecord;

const NO_NUMBERS = new Float64Array(0);

/** Facts alone as a record. */
export function plainRecord(facts: BeginRecord | EndRecord): JournalRecord {
  return { facts, numbers: NO_NUMBERS };
}

/** Turns points into records; lists of rows are recorded once each. */
export class PointWriter {
  private readonly known = new Set<string>();

  /** The records of a point: one, or two when its rows are new. */
  recordsOf(entry: PointEntry): JournalRecord[] {
    const { rows, figures, state, ...facts } = entry;
    const records: JournalRecord[] = [];
    const id = rows.length === 0 ? null : idOf(rows);
    if (id !== null && !this.known.has(id)) {
      this.known.add(id);
      records.push({ facts: { kind: 'rows', id, rows } satisfies RowsRecord, numbers: NO_NUMBERS });
    }
    const stateFacts = state && {
      closed: state.closed.length,
      figures: state.block.figureSum.length,
      oddities: state.oddities,
    };
    records.push({
      facts: { kind: 'point', ...facts, rows: id, state: stateFacts } satisfies PointRecord,
      numbers: concatenate([figures, ...(state ? numbersOf(state) : [])]),
    });
    return records;
  }
}

/** The same for the same rows in every session, so that no list can be taken for another. */
function idOf(rows: readonly RowLabel[]): string {
  return createHash('sha256').update(JSON.stringify(rows)).digest('hex').slice(0, 16);
}

function numbersOf({ closed, block }: RunState): Float64Array[] {
  return [...closed, block].flatMap(({ figureSum, figureSquare }) => [figureSum, figureSquare]);
}

function concatenate(parts: readonly Float64Array[]): Float64Array {
  if (parts.length === 1) return parts[0];
  const whole = new Float64Array(parts.reduce((sum, { length }) => sum + length, 0));
  let at = 0;
  for (const part of parts) {
    whole.set(part, at);
    at += part.length;
  }
  return whole;
}

/** A point from its record; `rowsOf` gives back lists of rows, undefined for one that is lost. */
export function readPoint(
  record: PointRecord,
  numbers: Float64Array,
  rowsOf: (id: string) => readonly RowLabel[] | undefined,
): PointEntry | null {
  const { rows: id, state, ...facts } = record;
  const rows = id === null ? [] : rowsOf(id);
  if (rows === undefined) return null;
  const figures = numbers.subarray(0, 2 * rows.length);
  return {
    ...facts,
    rows,
    figures,
    state: state && readState(facts, state, numbers.subarray(figures.length)),
  };
}

function readState({ histories, batches }: PointFacts, facts: StateFacts, numbers: Float64Array): RunState {
  let at = 0;
  const next = () => numbers.subarray(at, (at += facts.figures));
  const all = Array.from({ length: facts.closed + 1 }, (): Sums => {
    const [figureSum, figureSquare] = [next(), next()];
    return { cellSum: NO_NUMBERS, cellSquare: NO_NUMBERS, figureSum, figureSquare };
  });
  const { oddities } = facts;
  return { histories, batches, oddities, closed: all.slice(0, -1), block: all[facts.closed] };
}
