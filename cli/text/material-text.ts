/** A material on one screen: what it is, its coefficients, its narrow-beam thicknesses. */
import type { MaterialEdge, MaterialFacts } from '../material-facts.js';
import { clip } from '../show.js';
import { NARROW_BEAM_CAUTION } from './caution.js';
import { displayWidth } from './display-width.js';
import { exponentOf, formatNumber } from './figure-format.js';
import type { Style } from './style.js';
import { alignFigures, alignRight, renderTable, wrap } from './text-table.js';

/** Columns taken by the labels of the first block and the gap behind them. */
const LABEL_WIDTH = 13;

/** All lines of the screen. */
export function materialLines(facts: MaterialFacts, style: Style): string[] {
  return [
    style.heading(clip(facts.name, 100)),
    ...describe(facts, style),
    '',
    style.heading('Mass attenuation coefficients, cm2/g'),
    ...coefficientTable(facts, style),
    '',
    style.heading('Narrow beam'),
    ...thicknessTable(facts, style),
    '',
    ...wrap(NARROW_BEAM_CAUTION, style.width).map(style.note),
  ];
}

function describe(facts: MaterialFacts, style: Style): string[] {
  const elements = facts.elements.map(
    ({ symbol, massFraction }) => `${symbol} ${formatNumber(100 * massFraction)} %`,
  );
  return [
    ...labelled('is', facts.description ?? '', style),
    ...labelled('also called', facts.aliases.join(', '), style),
    ...labelled('density', `${formatNumber(facts.densityGPerCm3, 6)} g/cm3 (${facts.densitySource})`, style),
    ...labelled('by mass', elements.join(', '), style),
    ...labelled('', `(${facts.compositionSource})`, style),
    ...labelled('edges', edgesText(facts.edges), style),
  ];
}

/** A label with a text that goes on under itself; nothing for an empty text. */
function labelled(label: string, text: string, style: Style): string[] {
  if (text === '') return [];
  return wrap(text, style.width - LABEL_WIDTH - 2).map((line, i) => {
    const shown = i === 0 ? label : '';
    return `  ${style.note(shown)}${' '.repeat(LABEL_WIDTH - displayWidth(shown))}${line}`;
  });
}

function edgesText(edges: readonly MaterialEdge[]): string {
  if (edges.length === 0) return '';
  const texts = edges.map(
    ({ symbol, shell, energyKeV }) => `${symbol} ${shell} ${formatNumber(energyKeV, 5)}`,
  );
  return `${texts.join(', ')} keV`;
}

function coefficientTable({ attenuation }: MaterialFacts, style: Style): string[] {
  const column = (pick: (row: MaterialFacts['attenuation'][number]) => number) =>
    attenuation.map((row) => scientific(pick(row)));
  return columns(style, [
    ['keV', energies(attenuation)],
    ['photoelectric', column(({ coefficients }) => coefficients.photoelectric)],
    ['incoherent', column(({ coefficients }) => coefficients.incoherent)],
    ['coherent', column(({ coefficients }) => coefficients.coherent)],
    ['pair', column(({ coefficients }) => coefficients.pair)],
    ['total', column(({ coefficients }) => coefficients.total)],
  ]);
}

function thicknessTable({ attenuation }: MaterialFacts, style: Style): string[] {
  const lengths = (pick: (row: MaterialFacts['attenuation'][number]) => number) =>
    decimals(attenuation.map((row) => fourFigures(pick(row))));
  return columns(style, [
    ['keV', energies(attenuation)],
    ['linear, 1/cm', attenuation.map(({ linear }) => scientific(linear))],
    ['mean free path, cm', lengths(({ meanFreePathCm }) => meanFreePathCm)],
    ['half value, cm', lengths(({ halfValueCm }) => halfValueCm)],
    ['tenth value, cm', lengths(({ tenthValueCm }) => tenthValueCm)],
  ]);
}

function energies(attenuation: MaterialFacts['attenuation']): string[] {
  return decimals(attenuation.map(({ energyKeV }) => formatNumber(energyKeV, 6)));
}

/** Numbers with their decimal points under each other, all equally wide. */
function decimals(values: readonly string[]): string[] {
  const aligned = alignFigures(
    values.map((value) => ({ value, error: '', unit: '' })),
    '',
  );
  const width = Math.max(...aligned.map(displayWidth));
  return aligned.map((text) => text.padEnd(width));
}

/** Four significant figures, trailing zeros kept; a power of ten outside 0.001 to 99 999. */
function fourFigures(value: number): string {
  const exponent = exponentOf(Number(value.toPrecision(4)));
  if (exponent < -3 || exponent > 4) return scientific(value);
  return value.toFixed(Math.max(0, 3 - exponent));
}

/** Four significant figures with a power of ten: 4.337e-2; a plain 0 where there is nothing. */
function scientific(value: number): string {
  return value === 0 ? '0' : value.toExponential(3).replace('e+', 'e');
}

/** Right-aligned columns under their titles. */
function columns(style: Style, content: readonly (readonly [string, readonly string[]])[]): string[] {
  const aligned = content.map(([title, cells]) => alignRight([title, ...cells]));
  const rows = aligned[0].map((_, row) => aligned.map((column) => column[row]));
  const [titles, ...lines] = renderTable(rows);
  return [style.note(titles), ...lines];
}
