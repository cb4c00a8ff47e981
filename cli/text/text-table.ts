/** Rows of cells as aligned text columns. */
import { displayWidth, padEnd, padStart } from './display-width.js';
import type { FigureText } from './figure-format.js';

/** One line of text for each row of left-aligned cells; columns that are empty throughout are left out. */
export function renderTable(rows: readonly (readonly string[])[], indent = 2, gap = 2): string[] {
  const columns = rows.length === 0 ? 0 : Math.max(...rows.map((row) => row.length));
  const lines = rows.map(() => '');
  for (let column = 0; column < columns; column++) {
    const width = Math.max(...rows.map((row) => displayWidth(row[column] ?? '')));
    if (width > 0) {
      rows.forEach((row, at) => (lines[at] += padEnd(row[column] ?? '', width) + ' '.repeat(gap)));
    }
  }
  return lines.map((line) => (' '.repeat(indent) + line).trimEnd());
}

/** Cells of digits before the decimal point. */
function integerWidth(value: string): number {
  const end = value.search(/[.e]/);
  return displayWidth(end < 0 || !/\d/.test(value) ? value : value.slice(0, end));
}

/** Figures as `value ± error unit`, decimal points under each other; an empty value gives an empty cell. */
export function alignFigures(
  figures: readonly (FigureText & { unit: string })[],
  plusMinus: string,
): string[] {
  const before = Math.max(0, ...figures.map(({ value }) => integerWidth(value)));
  const values = figures.map(({ value }) => ' '.repeat(before - integerWidth(value)) + value);
  const width = Math.max(0, ...values.map(displayWidth));
  const cells = figures.map(({ value, error }, at) =>
    value === '' || error === '' ? values[at] : `${padEnd(values[at], width)} ${plusMinus} ${error}`,
  );
  const cellWidth = Math.max(0, ...cells.map(displayWidth));
  return figures.map(({ unit }, at) => (unit === '' ? cells[at] : `${padEnd(cells[at], cellWidth)} ${unit}`));
}

/** Texts of one column with their ends under each other. */
export function alignRight(cells: readonly string[]): string[] {
  const width = Math.max(0, ...cells.map(displayWidth));
  return cells.map((cell) => (cell === '' ? '' : padStart(cell, width)));
}

/** Text broken at spaces into lines of at most `width` cells. */
export function wrap(text: string, width: number): string[] {
  const lines: string[] = [];
  let line = '';
  for (const word of text.split(' ')) {
    if (line !== '' && displayWidth(line) + 1 + displayWidth(word) > width) {
      lines.push(line);
      line = word;
    } else {
      line = line === '' ? word : `${line} ${word}`;
    }
  }
  return [...lines, line];
}
