/** The elements 1–100 by symbol, name or atomic number. */
import { MaterialError } from './errors.js';
import { nearestWord } from './nearest.js';
import { ELEMENT_ALIASES, ELEMENT_ROWS } from './tables/elements.js';

export interface Element {
  readonly z: number;
  readonly symbol: string;
  readonly name: string;
  /** Standard atomic weight in u, or the mass number of the longest-lived isotope. */
  readonly atomicWeight: number;
  /** At 20 °C and 101.325 kPa; null where no bulk density is known. */
  readonly densityGPerCm3: number | null;
}

const ELEMENTS: readonly Element[] = ELEMENT_ROWS.map(([symbol, name, atomicWeight, densityGPerCm3], i) => ({
  z: i + 1,
  symbol,
  name,
  atomicWeight,
  densityGPerCm3,
}));

const bySymbol = new Map(ELEMENTS.map((element) => [element.symbol, element]));
const byName = new Map(ELEMENTS.map((element) => [element.name, element]));
for (const [alias, symbol] of Object.entries(ELEMENT_ALIASES)) byName.set(alias, bySymbol.get(symbol)!);

/** All elements in order of atomic number. */
export function elements(): readonly Element[] {
  return ELEMENTS;
}

/** The element with an atomic number from 1 to 100. */
export function elementOf(z: number): Element {
  const element = ELEMENTS[z - 1];
  if (element) return element;
  throw new MaterialError({
    code: 'element_out_of_range',
    value: String(z),
    rule: `must be an atomic number from 1 to ${ELEMENTS.length}`,
  });
}

/** The element with this symbol, written as usual (`Pb`); undefined where there is none. */
export function elementBySymbol(symbol: string): Element | undefined {
  return bySymbol.get(symbol);
}

/**
 * The element with this name in any case (`Lead`, `aluminum`) or symbol. A symbol may also stand all in lower
 * case; all in upper case it might be a formula (`CO` is not cobalt).
 */
export function findElement(nameOrSymbol: string): Element | undefined {
  const text = nameOrSymbol.trim();
  const lower = text.toLowerCase();
  const capitalised = lower.charAt(0).toUpperCase() + lower.slice(1);
  return bySymbol.get(text) ?? byName.get(lower) ?? (text === lower ? bySymbol.get(capitalised) : undefined);
}

/** Other spellings and names of an element, the symbol first. */
export function elementAliases(element: Element): readonly string[] {
  const others = Object.entries(ELEMENT_ALIASES).filter(([, symbol]) => symbol === element.symbol);
  return [element.symbol, ...others.map(([alias]) => alias)];
}

/** The error for a symbol that is no element's. */
export function unknownElement(symbol: string): MaterialError {
  return new MaterialError({
    code: 'unknown_element',
    value: symbol,
    rule: 'must be the symbol of an element from H to Fm (upper and lower case as usual)',
    suggestion: nearestWord(symbol, bySymbol.keys()),
  });
}
