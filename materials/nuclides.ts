/**
 * Radionuclides: half-lives and the photons they emit, each with the evaluation it comes from, and decay chains in
 * equilibrium. Lines below 5 keV or with fewer than 0.5 photons per 100 decays are not in the data. Annihilation
 * quanta count as lines: the source is taken to stop its positrons.
 */
import type { Table } from 'apache-arrow';
import { dataTable } from './data-table.js';
import { elementBySymbol, findElement } from './elements.js';
import { nearestWord } from './nearest.js';
import { CHAINS, NUCLIDE_ALIASES, NUCLIDE_NOTES } from './tables/nuclide-chains.js';

export type LineKind = 'gamma' | 'x_ray' | 'annihilation';

export interface NuclideLine {
  readonly energyKeV: number;
  /** Standard uncertainty; null where the evaluation gives none (X rays, means of groups). */
  readonly energyUncertaintyKeV: number | null;
  /** Photons per decay of the nuclide, of the head in a chain. */
  readonly perDecay: number;
  readonly perDecayUncertainty: number | null;
  readonly kind: LineKind;
  /** Code of the evaluation: g, g511, XKa1, XK'b1, XL … */
  readonly transition: string;
  /** The nuclide whose decay it is: in a chain one of the members. */
  readonly emitter: string;
  /** Nuclide or atom the photon comes from: the daughter of the decay. */
  readonly origin: string;
  readonly source: string;
}

export interface ChainMember {
  readonly nuclide: string;
  /** Decays per decay of the head; taken as exact in the uncertainties of the lines. */
  readonly perDecay: number;
}

export interface Nuclide {
  readonly name: string;
  readonly aliases: readonly string[];
  /** That of the head in a chain. */
  readonly halfLifeS: number;
  /** Where its data come from; one for each member of a chain. */
  readonly evaluations: readonly string[];
  /** What is included, what is left out; null where there is nothing to say. */
  readonly note: string | null;
  /** The nuclides whose decays make the lines; the nuclide alone unless it is a chain. */
  readonly members: readonly ChainMember[];
  /** Ascending in energy. */
  readonly lines: readonly NuclideLine[];
}

let all: readonly Nuclide[] | undefined;
let byKey: Map<string, Nuclide> | undefined;

/** All nuclides and chains, in order of their names. */
export function nuclides(): readonly Nuclide[] {
  all ??= readNuclides();
  return all;
}

/**
 * The nuclide or chain of this name; undefined where there is none. Spelling is free: `Cs-137`, `cs137`, `137Cs`,
 * `caesium-137`; `99mTc`, `Tc-99m`; chains in equilibrium carry a plus (`Ra-226+`, `Th-232+`).
 */
export function findNuclide(name: string): Nuclide | undefined {
  if (!byKey) {
    byKey = new Map();
    for (const nuclide of nuclides()) {
      for (const known of [nuclide.name, ...nuclide.aliases]) byKey.set(keyOf(known), nuclide);
    }
  }
  return byKey.get(keyOf(name));
}

/**
 * Name of the nuclide a mistyped or unknown one may have been meant to be: of the same element the one nearest in
 * mass, else the nearest in letters; undefined where none is near.
 */
export function nearestNuclideName(name: string): string | undefined {
  const wanted = spelled(name);
  const [, symbol, mass] = /^([A-Z][a-z]?)-(\d+)/.exec(wanted) ?? [];
  const isotopes = nuclides().filter((nuclide) => nuclide.name.startsWith(`${symbol}-`));
  if (isotopes.length > 0) {
    const away = (nuclide: Nuclide) => Math.abs(Number(/\d+/.exec(nuclide.name)?.[0]) - Number(mass));
    return isotopes.reduce((best, nuclide) => (away(nuclide) < away(best) ? nuclide : best)).name;
  }
  const near = nearestWord(
    wanted,
    nuclides().flatMap((nuclide) => [nuclide.name, ...nuclide.aliases]),
  );
  return near === null ? undefined : findNuclide(near)?.name;
}

/** The lines of a nuclide with at least so many photons per decay and at least so much energy. */
export function nuclideLines(
  nuclide: Nuclide,
  { minimumYield = 0, minimumEnergyKeV = 0 }: { minimumYield?: number; minimumEnergyKeV?: number } = {},
): readonly NuclideLine[] {
  return nuclide.lines.filter((line) => line.perDecay >= minimumYield && line.energyKeV >= minimumEnergyKeV);
}

function keyOf(name: string): string {
  return spelled(name).toLowerCase().replaceAll(/[\s-]/g, '');
}

/** Brings 137Cs, cs137 and caesium 137 into the form Cs-137; other texts stay as they are. */
function spelled(name: string): string {
  const text = name.trim();
  const massLast = /^([a-z]+)[\s-]*(\d+)\s*(m?)(.*)$/i.exec(text);
  const massFirst = /^(\d+)\s*(m?)[\s-]*([a-z]+)(.*)$/i.exec(text);
  if (massLast) return joined(text, massLast[1], massLast[2], massLast[3], massLast[4]);
  if (!massFirst) return text;
  const [, mass, m, word, rest] = massFirst;
  // 110mag is 110m-Ag, 55mn is Mn-55: the m belongs to the element where only that makes a symbol.
  const whole = m + word;
  const metastable = m !== '' && !symbolOf(whole);
  return joined(text, metastable || m === '' ? word : whole, mass, metastable ? m : '', rest);
}

function joined(text: string, word: string, mass: string, m: string, rest: string): string {
  const symbol = symbolOf(word);
  return symbol === undefined ? text : `${symbol}-${mass}${m.toLowerCase()}${rest}`;
}

function symbolOf(word: string): string | undefined {
  const capitalised = word.charAt(0).toUpperCase() + word.slice(1).toLowerCase();
  return elementBySymbol(capitalised)?.symbol ?? findElement(word)?.symbol;
}

function readNuclides(): readonly Nuclide[] {
  const single = readSingleNuclides();
  const chains = CHAINS.map(({ name, aliases, members, note }): Nuclide => {
    const parts = members.map(({ nuclide, perDecay }) => ({ part: single.get(nuclide)!, perDecay }));
    const lines = parts.flatMap(({ part, perDecay }) => part.lines.map((line) => scaled(line, perDecay)));
    return {
      name,
      aliases,
      halfLifeS: parts[0].part.halfLifeS,
      evaluations: parts.map(({ part }) => `${part.name}: ${part.evaluations[0]}`),
      note,
      members: members.map(({ nuclide, perDecay }) => ({ nuclide: single.get(nuclide)!.name, perDecay })),
      lines: lines.sort((a, b) => a.energyKeV - b.energyKeV),
    };
  });
  return [...single.values(), ...chains].sort((a, b) => compareNames(a.name, b.name));
}

function scaled(line: NuclideLine, factor: number): NuclideLine {
  const { perDecayUncertainty: uncertainty } = line;
  return {
    ...line,
    perDecay: line.perDecay * factor,
    perDecayUncertainty: uncertainty === null ? null : uncertainty * factor,
  };
}

/** By symbol, then by mass, the bare nuclide before its chain. */
function compareNames(a: string, b: string): number {
  return a.localeCompare(b, 'en', { numeric: true });
}

/** The nuclides of the data by the name they have there. */
function readSingleNuclides(): Map<string, Nuclide> {
  const linesOf = readLines(dataTable('nuclide-lines'));
  const single = new Map<string, Nuclide>();
  const withProgeny = new Set([...CHAINS.map(({ name }) => name), ...Object.values(NUCLIDE_ALIASES).flat()]);
  for (const row of dataTable('nuclides')) {
    const inData = row.nuclide as string;
    const [name, ...aliases] = namesOf(inData);
    single.set(inData, {
      name,
      aliases,
      halfLifeS: row.half_life_s as number,
      evaluations: [`DDEP evaluation, ${row.evaluation as string}`],
      note:
        NUCLIDE_NOTES[inData] ??
        (withProgeny.has(`${inData}+`) ? `without progeny; ${inData}+ has them` : null),
      members: [{ nuclide: name, perDecay: 1 }],
      lines: (linesOf.get(inData) ?? []).map((line) => ({ ...line, emitter: name })),
    });
  }
  return single;
}

/** A chain of the data takes its short name; the name in the data stays as an alias. */
function namesOf(inData: string): string[] {
  const aliases = NUCLIDE_ALIASES[inData] ?? [];
  return inData.endsWith('+progeny') ? [aliases[0], inData, ...aliases.slice(1)] : [inData, ...aliases];
}

function readLines(table: Table): Map<string, NuclideLine[]> {
  const linesOf = new Map<string, NuclideLine[]>();
  for (const row of table) {
    const emitter = row.nuclide as string;
    const lines = linesOf.get(emitter) ?? [];
    linesOf.set(emitter, lines);
    lines.push({
      energyKeV: row.energy_keV as number,
      energyUncertaintyKeV: row.energy_uncertainty_keV as number | null,
      perDecay: row.per_decay as number,
      perDecayUncertainty: row.per_decay_uncertainty as number | null,
      kind: row.kind as LineKind,
      transition: row.transition as string,
      emitter,
      origin: row.origin as string,
      source: row.source as string,
    });
  }
  for (const lines of linesOf.values()) lines.sort((a, b) => a.energyKeV - b.energyKeV);
  return linesOf;
}
