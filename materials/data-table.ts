/**
 * Reading of the data tables in `data/`. They sit beside this module both in the sources and in the built
 * package, so that one relative address serves both.
 */
import { readFileSync } from 'node:fs';
import { tableFromIPC, type Table } from 'apache-arrow';

const cache = new Map<string, Table>();

/** The Arrow table `data/<name>.arrow`, read on first use and kept. */
export function dataTable(name: string): Table {
  let table = cache.get(name);
  if (!table) {
    table = tableFromIPC(readFileSync(new URL(`./data/${name}.arrow`, import.meta.url)));
    cache.set(name, table);
  }
  return table;
}

/** A column of 64-bit numbers as one typed array. */
export function numberColumn(table: Table, column: string): Float64Array {
  return presentColumn(table, column).toArray() as Float64Array;
}

/** Rows [from, to) of a column of texts, null where there is none. */
export function textColumn(table: Table, column: string, from: number, to: number): (string | null)[] {
  return [...presentColumn(table, column).slice(from, to)] as (string | null)[];
}

function presentColumn(table: Table, column: string) {
  const vector = table.getChild(column);
  if (!vector) throw new Error(`the data table has no column ${column}`);
  return vector;
}
