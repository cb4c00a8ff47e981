/**
 * How many terminal cells a text takes. Text of our own is counted directly; names a user wrote may hold wide or
 * combining characters, for which string-width is loaded, only then: it takes 40 ms, a tenth of a whole summary.
 */

let measure: ((text: string) => number) | null = null;

/** True where every character takes one cell: printable Latin, Greek, punctuation, box and block drawing. */
function isSimple(text: string): boolean {
  return /^[\x20-\x7e\u00a0-\u02ff\u0370-\u03ff\u2010-\u2027\u2030-\u205e\u2070-\u209c\u2190-\u21ff\u2200-\u22ff\u2500-\u259f]*$/.test(
    text,
  );
}

/** Loads what the given texts need; without it wide characters would be counted as one cell. */
export async function prepareWidths(texts: readonly string[]): Promise<void> {
  if (measure === null && !texts.every(isSimple)) {
    measure = (await import('string-width')).default;
  }
}

/** Cells taken by a text; colour sequences take none. */
export function displayWidth(text: string): number {
  // eslint-disable-next-line no-control-regex -- ESC starts a colour sequence
  const plain = text.replace(/\x1b\[[0-9;]*m/g, '');
  if (isSimple(plain) || measure === null) {
    return [...plain].length;
  }
  return measure(plain);
}

export function padEnd(text: string, width: number): string {
  return text + ' '.repeat(Math.max(0, width - displayWidth(text)));
}

export function padStart(text: string, width: number): string {
  return ' '.repeat(Math.max(0, width - displayWidth(text))) + text;
}

/** Cuts a text so that it takes at most `width` cells. */
export function truncate(text: string, width: number): string {
  if (displayWidth(text) <= width) {
    return text;
  }
  const kept: string[] = [];
  let used = 0;
  for (const character of text) {
    used += displayWidth(character);
    if (used > width) {
      break;
    }
    kept.push(character);
  }
  return kept.join('');
}
