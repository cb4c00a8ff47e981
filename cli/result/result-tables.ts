/** The tables of a result: which columns they have, what those mean, and how rows turn into columns and back. */
import type { DepthRow, QuantityRow, Spectrum, SpectrumTally } from '../../engine/result.js';
import { decodeTable, encodeTable, type ColumnLabel, type TextColumn } from './arrow-file.js';

const PER_PHOTON = 'per source photon';

const LABELS = {
  quantity: { name: 'quantity', unit: '', description: 'Name of the figure' },
  figureLayer: { name: 'layer', unit: '', description: 'Layer or dose point; null: the whole stack' },
  line: { name: 'line_keV', unit: 'keV', description: 'Source line; null: all lines together' },
  figureMean: {
    name: 'mean',
    unit: 'as in column unit',
    description: `Estimate ${PER_PHOTON}; null: unknown`,
  },
  figureError: {
    name: 'std_error',
    unit: 'as in column unit',
    description: 'Standard error of the mean; null: unknown',
  },
  unit: { name: 'unit', unit: '', description: 'Unit of mean and std_error; 1: a pure number' },
  tally: { name: 'tally', unit: '', description: 'What is counted' },
  layer: { name: 'layer', unit: '', description: 'Layer; null: the whole stack' },
  low: { name: 'energy_low_keV', unit: 'keV', description: 'Lower edge of the energy bin' },
  high: { name: 'energy_high_keV', unit: 'keV', description: 'Upper edge of the energy bin' },
  depthLow: {
    name: 'depth_low_cm',
    unit: 'cm',
    description: 'Near side of the slice, from the face of the layer towards the source',
  },
  depthHigh: { name: 'depth_high_cm', unit: 'cm', description: 'Far side of the slice' },
  depthLayer: { name: 'layer', unit: '', description: 'Layer' },
  depthQuantity: {
    name: 'quantity',
    unit: '',
    description: 'Dose in the slice; …_behind: dose behind a stack that ends in the slice; deposited_energy',
  },
  binMean: {
    name: 'mean',
    unit: '1',
    description: `Content of the bin ${PER_PHOTON} (tally deposited: keV, by what one history left in the layer); null: unknown`,
  },
  binError: {
    name: 'std_error',
    unit: '1',
    description: 'Standard error of the mean, in its unit; null: unknown',
  },
} satisfies Record<string, ColumnLabel>;

/** Codes for texts in order of their first appearance. */
function toTextColumn(texts: readonly (string | null)[], repeats?: readonly number[]): TextColumn {
  const words: string[] = [];
  const codeOf = new Map<string, number>();
  const codes = new Int32Array(repeats ? repeats.reduce((sum, n) => sum + n, 0) : texts.length).fill(-1);
  let row = 0;
  texts.forEach((text, at) => {
    const next = row + (repeats?.[at] ?? 1);
    if (text !== null) {
      if (!codeOf.has(text)) {
        codeOf.set(text, words.push(text) - 1);
      }
      codes.fill(codeOf.get(text) as number, row, next);
    }
    row = next;
  });
  return { words, codes };
}

function toNumbers(values: readonly (number | null)[]): Float64Array {
  return Float64Array.from(values, (value) => value ?? NaN);
}

function concatenate(parts: readonly Float64Array[]): Float64Array {
  const whole = new Float64Array(parts.reduce((sum, part) => sum + part.length, 0));
  let at = 0;
  for (const part of parts) {
    whole.set(part, at);
    at += part.length;
  }
  return whole;
}

/** totals.arrow */
export function encodeTotals(rows: readonly QuantityRow[]): Uint8Array {
  return encodeTable('Figures of a run with their standard errors', [
    { ...LABELS.quantity, values: toTextColumn(rows.map((row) => row.quantity)) },
    { ...LABELS.figureLayer, values: toTextColumn(rows.map((row) => row.layer)) },
    { ...LABELS.line, values: toNumbers(rows.map((row) => row.lineKeV)) },
    { ...LABELS.figureMean, values: toNumbers(rows.map((row) => row.mean)) },
    { ...LABELS.figureError, values: toNumbers(rows.map((row) => row.stdError)) },
    { ...LABELS.unit, values: toTextColumn(rows.map((row) => row.unit)) },
  ]);
}

/** spectra.arrow: every bin of every spectrum, empty ones too, spectrum after spectrum. */
export function encodeSpectra(spectra: readonly Spectrum[]): Uint8Array {
  const bins = spectra.map((spectrum) => spectrum.mean.length);
  return encodeTable('Energy spectra of a run with the standard error of every bin', [
    {
      ...LABELS.tally,
      values: toTextColumn(
        spectra.map((spectrum) => spectrum.tally),
        bins,
      ),
    },
    {
      ...LABELS.layer,
      values: toTextColumn(
        spectra.map((spectrum) => spectrum.layer),
        bins,
      ),
    },
    { ...LABELS.low, values: concatenate(spectra.map((spectrum) => spectrum.energyLowKeV)) },
    { ...LABELS.high, values: concatenate(spectra.map((spectrum) => spectrum.energyHighKeV)) },
    { ...LABELS.binMean, values: concatenate(spectra.map((spectrum) => spectrum.mean)) },
    { ...LABELS.binError, values: concatenate(spectra.map((spectrum) => spectrum.stdError)) },
  ]);
}

/** depth.arrow: slice after slice, quantity after quantity. */
export function encodeDepth(rows: readonly DepthRow[]): Uint8Array {
  return encodeTable('Depth profile of a layer with its standard errors', [
    { ...LABELS.depthLayer, values: toTextColumn(rows.map((row) => row.layer)) },
    { ...LABELS.depthLow, values: toNumbers(rows.map((row) => row.depthLowCm)) },
    { ...LABELS.depthHigh, values: toNumbers(rows.map((row) => row.depthHighCm)) },
    { ...LABELS.depthQuantity, values: toTextColumn(rows.map((row) => row.quantity)) },
    { ...LABELS.figureMean, values: toNumbers(rows.map((row) => row.mean)) },
    { ...LABELS.figureError, values: toNumbers(rows.map((row) => row.stdError)) },
    { ...LABELS.unit, values: toTextColumn(rows.map((row) => row.unit)) },
  ]);
}

type Columns = ReturnType<typeof decodeTable>;

function textOf(columns: Columns, label: ColumnLabel): (row: number) => string | null {
  const column = columns.get(label.name);
  if (column === undefined || column instanceof Float64Array) {
    throw new Error(`column ${label.name} of text is missing`);
  }
  return (row) => (column.codes[row] < 0 ? null : column.words[column.codes[row]]);
}

function numbersOf(columns: Columns, label: ColumnLabel): Float64Array {
  const column = columns.get(label.name);
  if (!(column instanceof Float64Array)) {
    throw new Error(`column ${label.name} of numbers is missing`);
  }
  return column;
}

function known(value: number): number | null {
  return Number.isNaN(value) ? null : value;
}

/** The rows of totals.arrow. @throws Error when the bytes are no such table */
export function decodeTotals(bytes: Uint8Array): QuantityRow[] {
  const columns = decodeTable(bytes);
  const quantity = textOf(columns, LABELS.quantity);
  const layer = textOf(columns, LABELS.figureLayer);
  const unit = textOf(columns, LABELS.unit);
  const line = numbersOf(columns, LABELS.line);
  const mean = numbersOf(columns, LABELS.figureMean);
  const stdError = numbersOf(columns, LABELS.figureError);
  return Array.from(mean, (value, row) => ({
    quantity: quantity(row) ?? '',
    layer: layer(row),
    lineKeV: known(line[row]),
    mean: known(value),
    stdError: known(stdError[row]),
    unit: unit(row) ?? '',
  }));
}

/** The spectra of spectra.arrow; an unknown bin is NaN. @throws Error when the bytes are no such table */
export function decodeSpectra(bytes: Uint8Array): Spectrum[] {
  const columns = decodeTable(bytes);
  const tally = textOf(columns, LABELS.tally);
  const layer = textOf(columns, LABELS.layer);
  const low = numbersOf(columns, LABELS.low);
  const high = numbersOf(columns, LABELS.high);
  const mean = numbersOf(columns, LABELS.binMean);
  const stdError = numbersOf(columns, LABELS.binError);
  const spectra: Spectrum[] = [];
  let start = 0;
  for (let row = 1; row <= mean.length; row++) {
    if (row < mean.length && tally(row) === tally(start) && layer(row) === layer(start)) {
      continue;
    }
    spectra.push({
      tally: tally(start) as SpectrumTally,
      layer: layer(start),
      energyLowKeV: low.subarray(start, row),
      energyHighKeV: high.subarray(start, row),
      mean: mean.subarray(start, row),
      stdError: stdError.subarray(start, row),
    });
    start = row;
  }
  return spectra;
}

/** The rows of depth.arrow. @throws Error when the bytes are no such table */
export function decodeDepth(bytes: Uint8Array): DepthRow[] {
  const columns = decodeTable(bytes);
  const layer = textOf(columns, LABELS.depthLayer);
  const quantity = textOf(columns, LABELS.depthQuantity);
  const unit = textOf(columns, LABELS.unit);
  const low = numbersOf(columns, LABELS.depthLow);
  const high = numbersOf(columns, LABELS.depthHigh);
  const mean = numbersOf(columns, LABELS.figureMean);
  const stdError = numbersOf(columns, LABELS.figureError);
  return Array.from(mean, (value, row) => ({
    layer: layer(row) ?? '',
    depthLowCm: low[row],
    depthHighCm: high[row],
    quantity: quantity(row) ?? '',
    mean: known(value),
    stdError: known(stdError[row]),
    unit: unit(row) ?? '',
  }));
}
