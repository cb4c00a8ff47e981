/**
 * Tables to and from the Arrow IPC file format. The bytes depend on the content alone: dictionary numbers are given
 * by column position (the library would count them up over the life of the process), and nothing like a date goes in.
 */
import {
  Dictionary,
  Field,
  Float64,
  Int32,
  makeData,
  RecordBatch,
  Schema,
  Struct,
  Table,
  tableFromIPC,
  tableToIPC,
  Utf8,
  vectorFromArray,
  type Data,
  type Vector,
} from 'apache-arrow';

/** Text by code: row i holds `words[codes[i]]`, or nothing where the code is -1. */
export interface TextColumn {
  readonly words: readonly string[];
  readonly codes: Int32Array;
}

/** What a column is called and means; both go into the file. */
export interface ColumnLabel {
  readonly name: string;
  readonly unit: string;
  readonly description: string;
}

/** A column: numbers (NaN stands for unknown and is written as null) or text. */
export interface ColumnContent extends ColumnLabel {
  readonly values: Float64Array | TextColumn;
}

function validityBits(
  length: number,
  isKnown: (row: number) => boolean,
): { bits: Uint8Array; nullCount: number } {
  const bits = new Uint8Array(Math.ceil(length / 64) * 8);
  let nullCount = 0;
  for (let row = 0; row < length; row++) {
    if (isKnown(row)) {
      bits[row >> 3] |= 1 << (row & 7);
    } else {
      nullCount++;
    }
  }
  return { bits, nullCount };
}

function numberData(values: Float64Array): Data {
  const { bits, nullCount } = validityBits(values.length, (row) => Number.isFinite(values[row]));
  const data = nullCount === 0 ? values : values.map((value) => (Number.isFinite(value) ? value : 0));
  return makeData({ type: new Float64(), length: values.length, nullCount, nullBitmap: bits, data });
}

function textData({ words, codes }: TextColumn, dictionaryId: number): Data {
  const { bits, nullCount } = validityBits(codes.length, (row) => codes[row] >= 0);
  return makeData({
    type: new Dictionary(new Utf8(), new Int32(), dictionaryId, false),
    length: codes.length,
    nullCount,
    nullBitmap: bits,
    data: codes.map((code) => Math.max(0, code)),
    dictionary: vectorFromArray([...words], new Utf8()),
  });
}

/** The bytes of one table in the Arrow IPC file format; all columns have the same length. */
export function encodeTable(description: string, columns: readonly ColumnContent[]): Uint8Array {
  const children = columns.map(({ values }, at) =>
    values instanceof Float64Array ? numberData(values) : textData(values, at),
  );
  const fields = columns.map(
    ({ name, unit, description: meaning }, at) =>
      new Field(
        name,
        children[at].type,
        true,
        new Map([
          ['unit', unit],
          ['description', meaning],
        ]),
      ),
  );
  const schema = new Schema(fields, new Map([['description', description]]));
  const length = children[0].length;
  const struct = makeData({ type: new Struct(fields), length, nullCount: 0, children });
  return tableToIPC(new Table(schema, [new RecordBatch(schema, struct)]), 'file');
}

function readNumbers(vector: Vector): Float64Array {
  const values = Float64Array.from(vector.toArray() as Float64Array);
  if (vector.nullCount > 0) {
    for (let row = 0; row < values.length; row++) {
      if (!vector.isValid(row)) {
        values[row] = NaN;
      }
    }
  }
  return values;
}

function readText(vector: Vector): TextColumn {
  const words: string[] = [];
  const codeOf = new Map<string, number>();
  const codes = new Int32Array(vector.length);
  let row = 0;
  for (const data of vector.data) {
    const own = data.dictionary as Vector<Utf8>;
    const mapped = Array.from({ length: own.length }, (_, code) => {
      const word = own.get(code) ?? '';
      if (!codeOf.has(word)) {
        codeOf.set(word, words.push(word) - 1);
      }
      return codeOf.get(word) as number;
    });
    for (let at = 0; at < data.length; at++, row++) {
      codes[row] = data.getValid(at) ? mapped[(data.values as Int32Array)[at]] : -1;
    }
  }
  return { words, codes };
}

/**
 * The columns of a table written by `encodeTable`, by name.
 * @throws Error when the bytes are no such table
 */
export function decodeTable(bytes: Uint8Array): ReadonlyMap<string, Float64Array | TextColumn> {
  const table = tableFromIPC(bytes);
  const columns = new Map<string, Float64Array | TextColumn>();
  for (const field of table.schema.fields) {
    const vector = table.getChild(field.name) as Vector;
    columns.set(field.name, vector.type instanceof Dictionary ? readText(vector) : readNumbers(vector));
  }
  return columns;
}
