/** The known word that a mistyped one was probably meant to be. */
import { distance } from 'fastest-levenshtein';

/** Case, spaces, hyphens and underscores do not count as mistakes. */
function plain(word: string): string {
  return word.toLowerCase().replace(/[\s_-]+/g, '');
}

/** Longer than any key or name; such words are not compared. */
const LONGEST = 64;

/** The nearest known word; null if none is near (two letters wrong, or a third of a long word; one of a short). */
export function nearestWord(word: string, known: Iterable<string>): string | null {
  const wanted = plain(word);
  if (wanted.length > LONGEST) return null;
  let nearest: string | null = null;
  let least = 1 + (wanted.length < 4 ? 1 : Math.max(2, Math.floor(wanted.length / 3)));
  for (const candidate of known) {
    const letters = distance(wanted, plain(candidate));
    if (letters < least) {
      least = letters;
      nearest = candidate;
    }
  }
  return nearest;
}
