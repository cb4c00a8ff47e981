/** Values given on the command line. */
import { InvalidArgumentError } from 'commander';
import { MAX_HISTORIES } from './setup/limits.js';

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
