// Reads a small CSV table with a header; quoted fields may hold commas.
import { readFileSync } from 'node:fs';

/** @returns {Record<string, string>[]} rows keyed by the header */
export function readCsv(url) {
  const [header, ...lines] = readFileSync(url, 'utf8').trim().split(/\r?\n/).map(fields);
  return lines.map((values) => Object.fromEntries(header.map((key, i) => [key, values[i]])));
}

function fields(line) {
  return [...line.matchAll(/("(?:[^"]|"")*"|[^,]*)(?:,|$)/g)]
    .slice(0, -1)
    .map(([, field]) => (field.startsWith('"') ? field.slice(1, -1).replaceAll('""', '"') : field));
}
