import * as fs from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { disk, type DiskCalls } from '../../cli/checkpoint/durable-file.js';
import { decodeJournal, encodeRecord, Journal, type JournalRecord } from '../../cli/sweep/journal.js';

let folder: string;
const path = () => join(folder, 'journal.bin');
beforeEach(() => {
  folder = fs.mkdtempSync(join(tmpdir(), 'thickset-journal-'));
});
afterEach(() => fs.rmSync(folder, { recursive: true }));

const RECORDS: readonly JournalRecord[] = [
  { facts: { kind: 'begin', title: 'März ☀' }, numbers: new Float64Array(0) },
  { facts: { point: 1 }, numbers: Float64Array.of(1.5, -0, NaN, 5e-324) },
  { facts: { point: 2, note: 'x'.repeat(33) }, numbers: Float64Array.of(Math.PI) },
];

function written(records: readonly JournalRecord[] = RECORDS): Buffer {
  return Buffer.concat(records.map(encodeRecord));
}

test('records come back with the very bits of their numbers', () => {
  const { records, tornBytes, damagedAt } = decodeJournal(written());
  expect({ tornBytes, damagedAt }).toEqual({ tornBytes: 0, damagedAt: [] });
  expect(records).toHaveLength(3);
  records.forEach(({ facts, numbers }, at) => {
    expect(facts).toEqual(RECORDS[at].facts);
    expect(Buffer.from(numbers.buffer)).toEqual(Buffer.from(RECORDS[at].numbers.buffer));
  });
});

test('a journal torn at any byte of its last record keeps all others, and goes on from there', () => {
  const whole = written();
  const good = written(RECORDS.slice(0, 2)).length;
  for (let length = good; length < whole.length; length++) {
    fs.writeFileSync(path(), whole.subarray(0, length));
    const { records, tornBytes, damagedAt } = decodeJournal(fs.readFileSync(path()));
    expect({ records: records.length, tornBytes, damagedAt }).toEqual({
      records: 2,
      tornBytes: length - good,
      damagedAt: [],
    });
    const journal = new Journal(path(), length - tornBytes);
    journal.append(RECORDS[2]);
    journal.close();
    expect(fs.readFileSync(path()).equals(whole), `torn after ${length} bytes`).toBe(true);
  }
});

test('a flipped bit anywhere costs the record it is in, is told, and costs no other record', () => {
  const whole = written();
  const starts = [0, 1, 2, 3].map((count) => written(RECORDS.slice(0, count)).length);
  for (let at = 0; at < whole.length; at++) {
    const flipped = Buffer.from(whole);
    flipped[at] ^= 1 << (at % 8);
    const { records, tornBytes, damagedAt } = decodeJournal(flipped);
    const hit = starts.findIndex((start, i) => at >= start && at < starts[i + 1]);
    expect(
      records.map(({ facts }) => facts),
      `byte ${at}`,
    ).toEqual(RECORDS.filter((_, i) => i !== hit).map(({ facts }) => facts));
    // The last record cannot be told from one that was cut short.
    if (hit === 2) expect(tornBytes).toBe(whole.length - starts[2]);
    else expect(damagedAt).toEqual([starts[hit]]);
  }
});

test('a length that points beyond the file does not hide what follows', () => {
  const bytes = written();
  bytes.writeUInt32LE(0xffffffff, 8);
  expect(decodeJournal(bytes)).toMatchObject({ records: RECORDS.slice(1), damagedAt: [0] });
});

describe('on a full disk', () => {
  /** The real disk, on which no more than so many bytes find room. */
  function small(room: number): DiskCalls {
    let left = room;
    return {
      ...disk,
      writeSync: ((file: number, bytes: Uint8Array, offset: number, length: number, position: number) => {
        if (left === 0) throw Object.assign(new Error('ENOSPC: no space left'), { code: 'ENOSPC' });
        const count = fs.writeSync(file, bytes, offset, Math.min(length, left), position);
        left -= count;
        return count;
      }) as DiskCalls['writeSync'],
    };
  }

  test('the record that finds no room is taken back, those before it stay, and space found later is used', () => {
    const [first, second] = RECORDS.map((record) => encodeRecord(record).length);
    for (const room of [first, first + 1, first + second - 1]) {
      const journal = new Journal(path(), 0, small(room));
      journal.append(RECORDS[0]);
      expect(() => journal.append(RECORDS[1])).toThrow('ENOSPC');
      journal.close();
      expect(fs.readFileSync(path()).equals(written(RECORDS.slice(0, 1)))).toBe(true);
      const later = new Journal(path(), first);
      later.append(RECORDS[1]);
      later.append(RECORDS[2]);
      later.close();
      expect(fs.readFileSync(path()).equals(written())).toBe(true);
    }
  });
});

test('records are flushed to the disk once a second at least, and when asked', () => {
  let flushes = 0;
  const journal = new Journal(path(), 0, { ...disk, fsyncSync: () => void flushes++ });
  for (let i = 0; i < 50; i++) journal.append(RECORDS[1]);
  expect(flushes).toBe(0);
  const endMs = performance.now() + 1050;
  while (performance.now() < endMs) journal.append(RECORDS[1]);
  expect(flushes).toBe(1);
  journal.flush();
  expect(flushes).toBe(2);
  journal.close();
});
