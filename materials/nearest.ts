/** The known name nearest to a mistyped one, for "did you mean". */
import { distance } from 'fastest-levenshtein';

/** Longer than any name; such words are not compared. */
const LONGEST = 100;

/** A name without what does not count as a difference: case, spaces, hyphens, underscores. */
export function plain(name: string): string {
  return name.toLowerCase().replace(/[\s_-]+/g, '');
}

/**
 * The candidate with the smallest edit distance; null where even that is further away than typing errors
 * would be: one letter in a short word, two in a longer one, a third of a long one.
 */
export function nearestWord(word: string, candidates: Iterable<string>): string | null {
  const wanted = plain(word);
  if (wanted.length > LONGEST) return null;
  const allowed = wanted.length < 4 ? 1 : Math.max(2, Math.floor(wanted.length / 3));
  let best: string | null = null;
  let bestDistance = allowed + 1;
  for (const candidate of candidates) {
    const letters = distance(wanted, plain(candidate));
    if (letters < bestDistance) [best, bestDistance] = [candidate, letters];
  }
  return best;
}
