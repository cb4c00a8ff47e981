/** Values from untrusted files on their way to a terminal: short, on one line, without control characters. */

const LONGEST = 60;

/** Control characters and the marks that reverse the reading direction. */
// eslint-disable-next-line no-control-regex
const UNSAFE = /[\u0000-\u001f\u007f-\u009f\u2028-\u202e\u2066-\u2069\ufeff]/g;

/** True if the text holds characters that could disturb a terminal. */
export function hasUnsafeCharacters(text: string): boolean {
  return text.search(UNSAFE) >= 0;
}

/** The text with unsafe characters as `\u001b`, cut at `longest` characters. */
export function clip(text: string, longest: number = LONGEST): string {
  const short = text.length > longest ? `${text.slice(0, longest - 1)}…` : text;
  return short.replace(UNSAFE, (char) => `\\u${char.charCodeAt(0).toString(16).padStart(4, '0')}`);
}

/** The text in double quotes. */
export function show(text: string): string {
  return `"${clip(text)}"`;
}

/** A value as it stands behind "got". */
export function showValue(value: unknown): string {
  if (value === null || value === undefined) return 'nothing';
  if (typeof value === 'string') return value.trim() === '' ? 'an empty text' : clip(value);
  if (Array.isArray(value)) return value.length === 0 ? 'an empty list' : 'a list';
  if (typeof value === 'object') return 'a mapping';
  if (typeof value === 'number') return showNumber(value);
  return clip(String(value));
}

/** A number the short way: 0.005, 661.7, 1e6. */
export function showNumber(value: number): string {
  const size = Math.abs(value);
  const text = size !== 0 && (size >= 1e6 || size < 1e-3) ? value.toExponential() : String(value);
  return text.replace('e+', 'e');
}

/** Four figures are enough to recognise a number by. */
export function rounded(value: number): number {
  return Number(value.toPrecision(4));
}

/** A value as it may be written in a setup file: `{kind: beam, energy: 661.7 keV}`. */
export function showFlow(value: unknown): string {
  if (Array.isArray(value)) return `[${value.map(showFlow).join(', ')}]`;
  if (typeof value !== 'object' || value === null) return String(value);
  return `{${Object.entries(value)
    .map(([key, inner]) => `${key}: ${showFlow(inner)}`)
    .join(', ')}}`;
}

/** `a, b or c`. */
export function listOr(words: readonly string[]): string {
  if (words.length < 2) return words.join('');
  return `${words.slice(0, -1).join(', ')} or ${words.at(-1)}`;
}
