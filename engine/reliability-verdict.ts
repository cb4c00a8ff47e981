/** When the error of a weighted figure must not be relied on. */
import type { Reliability } from './result.js';

/** Relative variance of the variance above which an error counts as unreliable (common practice). */
export const VOV_LIMIT = 0.1;
/** Histories that must contribute at least (common practice). */
export const LEAST_CONTRIBUTING = 50;

export function isUnreliable({ contributing, vov }: Reliability): boolean {
  return contributing < LEAST_CONTRIBUTING || vov === null || vov > VOV_LIMIT;
}
