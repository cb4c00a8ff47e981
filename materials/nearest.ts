/** The known name nearest to a mistyped one, for "did you mean". */
import { distance } from 'fastest-levenshtein';

/**
 * The candidate with the smallest edit distance, case aside; undefined where even that is further away than a
 * typing error would be (a third of the letters, and at least one).
 */
export function nearest(text: string, candidates: Iterable<string>): string | undefined {
  const wanted = text.trim().toLowerCase();
  const allowed = Math.max(1, Math.floor(wanted.length / 3));
  let best: string | undefined;
  let bestDistance = allowed + 1;
  for (const candidate of candidates) {
    const d = distance(wanted, candidate.toLowerCase());
    if (d < bestDistance) [best, bestDistance] = [candidate, d];
  }
  return best;
}
