/** The journal of a sweep read back, also while another process writes it. */
import { join } from 'node:path';
import { readIfThere } from '../checkpoint/durable-file.js';
import { JOURNAL_NAME } from '../checkpoint/names.js';
import { errors } from '../errors.js';
import { decodeJournal, beginsAsJournal } from './journal.js';
import {
  readPoint,
  SWEEP_FORMAT,
  type AnyRecord,
  type BeginRecord,
  type EndRecord,
  type PointEntry,
  type RowLabel,
} from './records.js';

export interface SweepLog {
  readonly begin: BeginRecord;
  /** The last record of each point that has one. */
  readonly points: ReadonlyMap<number, PointEntry>;
  readonly end: EndRecord | null;
  /** Time the sweep has taken in all sessions. */
  readonly elapsedS: number;
  /** Bytes up to the end of the last whole record. */
  readonly length: number;
  readonly damagedAt: readonly number[];
}

/**
 * The log of a sweep folder; null where there is none.
 *
 * @throws ThicksetError result_damaged when what the sweep is cannot be read
 */
export function readSweepLog(folder: string): SweepLog | null {
  const path = join(folder, JOURNAL_NAME);
  const bytes = readIfThere(path);
  if (bytes === null) return null;
  const { records, tornBytes, damagedAt } = decodeJournal(bytes);
  // Nothing but a first record that was cut short: the sweep had not begun.
  if (records.length === 0 && beginsAsJournal(bytes)) return null;
  const begin = records[0]?.facts as AnyRecord | undefined;
  if (begin?.kind !== 'begin' || begin.format !== SWEEP_FORMAT) {
    throw errors.journalDamaged(path);
  }
  const rows = new Map<string, readonly RowLabel[]>();
  const points = new Map<number, PointEntry>();
  let end: EndRecord | null = null;
  let elapsedS = 0;
  for (const { facts, numbers } of records) {
    const record = facts as AnyRecord;
    if (record.kind === 'rows') rows.set(record.id, record.rows);
    if (record.kind === 'end') end = record;
    if (record.kind === 'point') {
      end = null;
      const entry = readPoint(record, numbers, (id) => rows.get(id));
      if (entry !== null) points.set(record.point, entry);
    }
    if (record.kind === 'point' || record.kind === 'end') elapsedS = Math.max(elapsedS, record.elapsedS);
  }
  return { begin, points, end, elapsedS, length: bytes.length - tornBytes, damagedAt };
}
