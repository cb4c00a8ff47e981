/** Reads the tables of published values that stand beside this file. */
import { readFileSync } from 'node:fs';

/** Rows of `<name>.csv` as objects keyed by the header; quoted fields may hold commas. */
export function publishedRows(name: string): Record<string, string>[] {
  const text = readFileSync(new URL(`./${name}.csv`, import.meta.url), 'utf8');
  const [header, ...lines] = text.trim().split('\n').map(fields);
  return lines.map((values) => Object.fromEntries(header.map((key, i) => [key, values[i]])));
}

function fields(line: string): string[] {
  return [...line.matchAll(/("(?:[^"]|"")*"|[^,]*)(?:,|$)/g)]
    .slice(0, -1)
    .map(([, field]) => (field.startsWith('"') ? field.slice(1, -1).replaceAll('""', '"') : field));
}
