/**
 * An append-only file of records, each of which tells by itself whether it is whole:
 *
 *   marker (8 bytes) | length of body (u32) | length of JSON in it (u32) | SHA-256 of lengths and body, cut to 16 bytes
 *   | JSON | doubles
 *
 * What is appended is in the hands of the system at once, so a killed process loses nothing; it is flushed to the disk
 * every second, so a power cut costs the records of the last second. A record that was being written then is cut off
 * when the journal is opened again, one whose bytes have changed is left out: what it told is found out anew.
 */
import { createHash } from 'node:crypto';
import { disk, writeAll, type DiskCalls } from '../checkpoint/durable-file.js';

const MARKER = Buffer.from('\u0001record\n', 'latin1');
const HASH_BYTES = 16;
const HEAD_BYTES = MARKER.length + 8 + HASH_BYTES;
/** A power cut loses the records of this time at most. */
const FLUSH_MS = 1000;

export interface JournalRecord {
  readonly facts: unknown;
  readonly numbers: Float64Array;
}

export interface JournalContent {
  readonly records: readonly JournalRecord[];
  /** Bytes at the end that are no whole record: one was being written when the power went. */
  readonly tornBytes: number;
  /** Places of bytes before the last whole record that are no whole record. */
  readonly damagedAt: readonly number[];
}

/** One record as bytes. */
export function encodeRecord({ facts, numbers }: JournalRecord): Buffer {
  const json = Buffer.from(JSON.stringify(facts));
  const doubles = Buffer.from(numbers.buffer, numbers.byteOffset, numbers.byteLength);
  const lengths = Buffer.alloc(8);
  lengths.writeUInt32LE(json.length + doubles.length, 0);
  lengths.writeUInt32LE(json.length, 4);
  return Buffer.concat([MARKER, lengths, hashOf(lengths, json, doubles), json, doubles]);
}

function hashOf(...parts: readonly Uint8Array[]): Buffer {
  const hash = createHash('sha256');
  for (const part of parts) hash.update(part);
  return hash.digest().subarray(0, HASH_BYTES);
}

/** The records in the bytes of a journal. */
export function decodeJournal(bytes: Buffer): JournalContent {
  const records: JournalRecord[] = [];
  const damagedAt: number[] = [];
  let good = 0;
  for (let at = 0; at < bytes.length;) {
    const size = recordSize(bytes, at);
    if (size > 0) {
      if (at > good) damagedAt.push(good);
      records.push(readRecord(bytes, at, size));
      good = at += size;
    } else {
      const next = bytes.indexOf(MARKER, at + 1);
      at = next < 0 ? bytes.length : next;
    }
  }
  return { records, tornBytes: bytes.length - good, damagedAt };
}

/** True where a first record begins, whether it is whole or was cut short. */
export function beginsAsJournal(bytes: Buffer): boolean {
  const length = Math.min(bytes.length, MARKER.length);
  return MARKER.subarray(0, length).equals(bytes.subarray(0, length));
}

/** Bytes of the whole record at a place; 0 where there is none. */
function recordSize(bytes: Buffer, at: number): number {
  const head = at + MARKER.length;
  if (at + HEAD_BYTES > bytes.length || !MARKER.equals(bytes.subarray(at, head))) return 0;
  const size = HEAD_BYTES + bytes.readUInt32LE(head);
  if (at + size > bytes.length) return 0;
  const hash = hashOf(bytes.subarray(head, head + 8), bytes.subarray(at + HEAD_BYTES, at + size));
  return hash.equals(bytes.subarray(head + 8, at + HEAD_BYTES)) ? size : 0;
}

function readRecord(bytes: Buffer, at: number, size: number): JournalRecord {
  const body = at + HEAD_BYTES;
  const doublesAt = body + bytes.readUInt32LE(at + MARKER.length + 4);
  // A copy, for doubles in place would have to be aligned.
  const numbers = new Float64Array(new Uint8Array(bytes.subarray(doublesAt, at + size)).buffer);
  return { facts: JSON.parse(bytes.toString('utf8', body, doublesAt)), numbers };
}

/** A journal that is being written. */
export class Journal {
  private readonly file: number;
  private length: number;
  private flushedMs = performance.now();

  /** Creates the file, or opens it to go on after its first `length` bytes. */
  constructor(
    path: string,
    length: number,
    private readonly system: DiskCalls = disk,
  ) {
    this.file = system.openSync(path, length === 0 ? 'w' : 'r+');
    this.length = length;
    if (system.fstatSync(this.file).size > length) system.ftruncateSync(this.file, length);
  }

  /** @throws system errors; the journal then ends with the record before */
  append(record: JournalRecord): void {
    const bytes = encodeRecord(record);
    try {
      writeAll(this.file, bytes, this.system, this.length);
    } catch (cause) {
      this.system.ftruncateSync(this.file, this.length);
      throw cause;
    }
    this.length += bytes.length;
    if (performance.now() - this.flushedMs >= FLUSH_MS) this.flush();
  }

  flush(): void {
    this.system.fsyncSync(this.file);
    this.flushedMs = performance.now();
  }

  close(): void {
    this.system.closeSync(this.file);
  }
}
