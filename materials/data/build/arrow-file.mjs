// Writes one Arrow IPC file from plain columns; every column carries its unit and description as metadata.
import { writeFileSync } from 'node:fs';
import {
  Field,
  RecordBatch,
  Schema,
  Struct,
  Table,
  makeData,
  tableToIPC,
  vectorFromArray,
} from 'apache-arrow';

/**
 * @param {string | URL} path
 * @param {{name: string, type: import('apache-arrow').DataType, unit: string, description: string,
 *   values: readonly unknown[], nullable?: boolean}[]} columns
 * @param {Record<string, string>} metadata about the whole file: source, licence, credit
 */
export function writeArrowFile(path, columns, metadata) {
  const length = columns[0].values.length;
  const fields = columns.map(
    ({ name, type, unit, description, nullable = false }) =>
      new Field(name, type, nullable, new Map(Object.entries({ unit, description }))),
  );
  const children = columns.map(({ name, type, values }) => {
    if (values.length !== length)
      throw new Error(`column ${name}: ${values.length} rows, expected ${length}`);
    return vectorFromArray(values, type).data[0];
  });
  const schema = new Schema(fields, new Map(Object.entries(metadata)));
  const data = makeData({ type: new Struct(fields), length, nullCount: 0, children });
  const table = new Table(schema, [new RecordBatch(schema, data)]);
  writeFileSync(path, tableToIPC(table, 'file'));
}
