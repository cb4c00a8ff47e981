/** Values given on the command line. */
import { InvalidArgumentError } from 'commander';
import type { Shard } from '../engine/index.js';
import { Complaint } from './errors.js';
import { MAX_HISTORIES } from './setup/limits.js';
import { parseQuantity } from './units.js';

function wholeNumber(text: string, most: number): number {
  const value = /^\d+(\.\d+)?(e\+?\d+)?$/i.test(text) ? Number(text) : NaN;
  if (!Number.isInteger(value) || value < 1 || value > most) {
    throw new InvalidArgumentError(`must be a whole number from 1 to ${most}.`);
  }
  return value;
}

const MOST_THREADS = 256;
const MOST_COLUMNS = 1000;
const LONGEST_SEED = 500;
const MOST_SHARDS = 10_000;

/** `1000000` or `1e6`. */
export const parseHistories = (text: string): number => wholeNumber(text, MAX_HISTORIES);
export const parseThreads = (text: string): number => wholeNumber(text, MOST_THREADS);
export const parseColumns = (text: string): number => wholeNumber(text, MOST_COLUMNS);

export function parseSeed(text: string): string {
  if (text === '' || text.length > LONGEST_SEED) {
    throw new InvalidArgumentError(`must be a text of 1 to ${LONGEST_SEED} characters.`);
  }
  return text;
}

/** `10 min`, in seconds. */
export function parseTime(text: string): number {
  const time = parseQuantity(text, ['time']);
  if (time instanceof Complaint || time.value <= 0) {
    throw new InvalidArgumentError('must be a time with its unit, as in "30 s" or "10 min".');
  }
  return time.value;
}

export const parseShards = (text: string): number => wholeNumber(text, MOST_SHARDS);

/** `3/7`: part 3 of 7. */
export function parseShard(text: string): Shard {
  const [, index, count] = /^(\d+)\/(\d+)$/.exec(text) ?? [];
  const shard = { index: Number(index), count: Number(count) };
  if (!(shard.index >= 1 && shard.index <= shard.count && shard.count <= MOST_SHARDS)) {
    throw new InvalidArgumentError('must be a part and the number of parts, as in 1/4 to 4/4.');
  }
  return shard;
}

/** A text for the scheduler, which goes into a script: only what such texts are made of. */
function schedulerText(pattern: RegExp, example: string): (text: string) => string {
  return (text) => {
    if (!pattern.test(text)) throw new InvalidArgumentError(`must be as in ${example}.`);
    return text;
  };
}

export const parsePartition = schedulerText(/^[\w.,-]+$/, 'day or day,night');
export const parseJobTime = schedulerText(/^[\d:-]+$/, '30 (minutes), 2:00:00 or 1-12:00:00');
export const parseMemory = schedulerText(/^\d+[KMGT]?$/i, '500M or 4G');
