/** The known word that a mistyped one was probably meant to be. */

/** Case, spaces, hyphens and underscores do not count as mistakes. */
function plain(word: string): string {
  return word.toLowerCase().replace(/[\s_-]+/g, '');
}

/**
 * Number of letters to change, insert, remove or swap with a neighbour to get from `a` to `b` (optimal string
 * alignment distance).
 */
export function editDistance(a: string, b: string): number {
  let beforeLast: number[] = [];
  let last = Array.from({ length: b.length + 1 }, (_, column) => column);
  for (let row = 1; row <= a.length; row++) {
    const current = [row];
    for (let column = 1; column <= b.length; column++) {
      const same = a[row - 1] === b[column - 1];
      let best = Math.min(last[column] + 1, current[column - 1] + 1, last[column - 1] + (same ? 0 : 1));
      if (row > 1 && column > 1 && a[row - 1] === b[column - 2] && a[row - 2] === b[column - 1]) {
        best = Math.min(best, beforeLast[column - 2] + 1);
      }
      current.push(best);
    }
    beforeLast = last;
    last = current;
  }
  return last[b.length];
}

/** Longer words than any key or name; they are not compared. */
const LONGEST = 64;

/** The nearest known word, or null if none is near (more than a third of the letters wrong). */
export function nearestWord(word: string, known: Iterable<string>): string | null {
  const wanted = plain(word);
  if (wanted.length > LONGEST) return null;
  let nearest: string | null = null;
  let least = Math.max(1, Math.floor(wanted.length / 3)) + 1;
  for (const candidate of known) {
    const distance = editDistance(wanted, plain(candidate));
    if (distance < least) {
      least = distance;
      nearest = candidate;
    }
  }
  return nearest;
}
