/**
 * The state of a run as bytes that tell by themselves whether they are whole.
 *
 *   "thickset state 1\n" | length of header (u32) | header (JSON) | arrays of doubles | SHA-256 of all that
 *
 * Numbers stand in the byte order of the machine; the header says which, for it matters only where states travel.
 */
import { createHash } from 'node:crypto';
import { endianness } from 'node:os';
import { EngineError } from './errors.js';
import { ODDITIES, SUM_ARRAYS, type Oddities, type RunState, type Sums } from './run-sums.js';

const MAGIC = Buffer.from('thickset state 1\n');
const HASH_BYTES = 32;
/** Doubles must be aligned when they are read in place. */
const ALIGNMENT = 8;

interface Header {
  /** What the caller needs to know the run by. */
  readonly identity: string;
  readonly byteOrder: string;
  readonly histories: number;
  readonly batches: number;
  readonly oddities: Oddities;
  readonly cells: number;
  readonly figures: number;
  readonly closed: number;
}

/** @param identity whatever tells this run from others; `decodeState` gives it back */
export function encodeState(state: RunState, identity: string): Uint8Array {
  const { histories, batches, oddities, closed, block } = state;
  const header: Header = {
    identity,
    byteOrder: endianness(),
    histories,
    batches,
    oddities,
    cells: block.cellSum.length,
    figures: block.figureSum.length,
    closed: closed.length,
  };
  const json = Buffer.from(JSON.stringify(header));
  const start = MAGIC.length + 4 + json.length;
  const padding = Buffer.alloc(Math.ceil(start / ALIGNMENT) * ALIGNMENT - start);
  const length = Buffer.alloc(4);
  length.writeUInt32LE(json.length);
  const arrays = [...closed, block].flatMap((sums) => SUM_ARRAYS.map((name) => bytesOf(sums[name])));
  const parts = [MAGIC, length, json, padding, ...arrays];
  const hash = createHash('sha256');
  for (const part of parts) hash.update(part);
  return Buffer.concat([...parts, hash.digest()]);
}

/** @throws EngineError when the bytes are not whole, or not such a state */
export function decodeState(bytes: Uint8Array): { identity: string; state: RunState } {
  const end = bytes.length - HASH_BYTES;
  if (end < MAGIC.length + 4 || !MAGIC.equals(bytes.subarray(0, MAGIC.length))) {
    throw new EngineError('checkpoint', 'it is no state of a run');
  }
  const hash = createHash('sha256').update(bytes.subarray(0, end)).digest();
  if (!hash.equals(bytes.subarray(end))) throw new EngineError('checkpoint', 'its checksum does not fit');
  const view = Buffer.from(bytes.buffer, bytes.byteOffset, end);
  const start = MAGIC.length + 4 + view.readUInt32LE(MAGIC.length);
  const header = JSON.parse(view.toString('utf8', MAGIC.length + 4, start)) as Header;
  if (header.byteOrder !== endianness()) {
    throw new EngineError('checkpoint', `it was written on a machine of byte order ${header.byteOrder}`);
  }
  // A copy: the bytes may stand at any place of a larger buffer.
  const doubles = new Float64Array(
    new Uint8Array(bytes.subarray(Math.ceil(start / ALIGNMENT) * ALIGNMENT, end)).buffer,
  );
  const all = readSums(doubles, header);
  const oddities = Object.fromEntries(ODDITIES.map((name) => [name, header.oddities[name] ?? 0])) as Oddities;
  const { histories, batches } = header;
  return {
    identity: header.identity,
    state: { histories, batches, oddities, closed: all.slice(0, -1), block: all[header.closed] },
  };
}

function bytesOf(array: Float64Array): Uint8Array {
  return new Uint8Array(array.buffer, array.byteOffset, array.byteLength);
}

function readSums(doubles: Float64Array, { cells, figures, closed }: Header): Sums[] {
  let at = 0;
  const next = (length: number) => doubles.subarray(at, (at += length));
  return Array.from({ length: closed + 1 }, () => ({
    cellSum: next(cells),
    cellSquare: next(cells),
    figureSum: next(figures),
    figureSquare: next(figures),
  }));
}
