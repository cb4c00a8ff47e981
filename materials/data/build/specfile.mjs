// Reads the "specfile" text tables of the fisx data package: blocks that start with `#S number title`.
import { readFileSync } from 'node:fs';

/**
 * @param {string} path
 * @returns {{number: number, title: string, labels: string[], rows: number[][]}[]}
 */
export function readSpecFile(path) {
  const blocks = [];
  for (const line of readFileSync(path, 'utf8').split(/\r?\n/)) {
    const header = /^#S\s+(\d+)\s*(.*)$/.exec(line);
    const block = blocks.at(-1);
    if (header) {
      blocks.push({ number: Number(header[1]), title: header[2].trim(), labels: [], rows: [] });
    } else if (block && line.startsWith('#L')) {
      block.labels = line.slice(2).trim().split(/\s+/);
    } else if (block && line.trim() !== '' && !line.startsWith('#')) {
      const row = line.trim().split(/\s+/).map(Number);
      if (row.some(Number.isNaN)) throw new Error(`${path}: not a row of numbers: ${line}`);
      block.rows.push(row);
    }
  }
  return blocks;
}
