/**
 * Chemical formulas: `Cd0.9Zn0.1Te`, `Ca(OH)2`, `Fe4[Fe(CN)6]3`, `CaSO4·2H2O`.
 *
 *     formula = part { ("·" | "*") part }        a part after the dot may start with its count: 2H2O
 *     part    = { (symbol | "(" part ")" | "[" part "]") [count] }
 *     count   = digits with an optional decimal part
 *
 * A full stop is always a decimal point, never the dot of a hydrate.
 */
import { elementBySymbol, unknownElement } from './elements.js';
import { MaterialError } from './errors.js';

const MAX_LENGTH = 200;
const MAX_DEPTH = 16;
const MAX_COUNT = 1e6;
const CLOSING: Readonly<Record<string, string>> = { '(': ')', '[': ']' };
const COUNT = /\d+(?:\.\d+)?/y;
const SYMBOL = /[A-Z][a-z]?/y;

/** Number of atoms of each element (by atomic number) in one unit of the formula. */
export type AtomCounts = ReadonlyMap<number, number>;

/**
 * Reads a formula.
 *
 * @throws MaterialError `bad_formula` or `unknown_element`
 */
export function parseFormula(formula: string): AtomCounts {
  const text = plainText(formula);
  if (text === '' || text.length > MAX_LENGTH) {
    throw badFormula(formula, `must be a chemical formula of 1 to ${MAX_LENGTH} characters`);
  }
  const hydrate = /^(.*[A-Za-z)\]]\d*)\.(\d*H2O)$/.exec(text);
  if (hydrate) {
    const suggestion = `${hydrate[1]}·${hydrate[2]}`;
    throw badFormula(formula, 'must have the water of a hydrate after "·" or "*", not after "."', suggestion);
  }
  const counts = new Map<number, number>();
  for (const part of text.split(/[·*]/)) {
    const lead = part === text ? null : match(COUNT, part, 0);
    const reader = new PartReader(formula, part, lead?.length ?? 0);
    reader.addTo(counts, lead === null ? 1 : reader.checkedCount(lead));
  }
  return counts;
}

/** Without surrounding blanks, with ₀–₉ as digits and the dots of hydrates as one character. */
function plainText(formula: string): string {
  return formula
    .trim()
    .replace(/[₀-₉]/g, (digit) => String(digit.charCodeAt(0) - '₀'.charCodeAt(0)))
    .replace(/[•∙⋅]/g, '·');
}

/** Reads one part of a formula from left to right. */
class PartReader {
  constructor(
    private readonly formula: string,
    private readonly text: string,
    private at: number,
  ) {}

  /** Adds the atoms of the whole part, `times` over. */
  addTo(counts: Map<number, number>, times: number): void {
    for (const [z, count] of this.readGroup(undefined, 0)) {
      counts.set(z, (counts.get(z) ?? 0) + count * times);
    }
  }

  checkedCount(digits: string): number {
    const count = Number(digits);
    if (count > 0 && count <= MAX_COUNT) return count;
    throw badFormula(this.formula, `must have counts above 0 and at most ${MAX_COUNT}`);
  }

  private readGroup(closing: string | undefined, depth: number): Map<number, number> {
    if (depth > MAX_DEPTH) throw badFormula(this.formula, `must not nest deeper than ${MAX_DEPTH} groups`);
    const counts = new Map<number, number>();
    while (this.at < this.text.length && this.text[this.at] !== closing) {
      const unit = this.readUnit(depth);
      const digits = match(COUNT, this.text, this.at);
      this.at += digits?.length ?? 0;
      const times = digits === null ? 1 : this.checkedCount(digits);
      for (const [z, count] of unit) counts.set(z, (counts.get(z) ?? 0) + count * times);
    }
    if (closing !== undefined && this.at === this.text.length) {
      throw badFormula(this.formula, `must close each group: a "${closing}" is missing`);
    }
    if (counts.size === 0) throw badFormula(this.formula, 'must have an element in each part and group');
    this.at += closing === undefined ? 0 : 1;
    return counts;
  }

  /** One element or one group in brackets. */
  private readUnit(depth: number): Map<number, number> {
    const character = this.text[this.at];
    if (Object.hasOwn(CLOSING, character)) {
      this.at += 1;
      return this.readGroup(CLOSING[character], depth + 1);
    }
    const symbol = match(SYMBOL, this.text, this.at);
    if (symbol === null) {
      throw badFormula(this.formula, `must have a symbol or "(" in place of "${this.text.slice(this.at)}"`);
    }
    const element = elementBySymbol(symbol);
    if (!element) throw unknownElement(symbol);
    this.at += symbol.length;
    return new Map([[element.z, 1]]);
  }
}

function match(pattern: RegExp, text: string, at: number): string | null {
  pattern.lastIndex = at;
  return pattern.exec(text)?.[0] ?? null;
}

function badFormula(formula: string, rule: string, suggestion: string | null = null): MaterialError {
  const shown = formula.length > 60 ? `${formula.slice(0, 60)}…` : formula;
  return new MaterialError({ code: 'bad_formula', value: JSON.stringify(shown), rule, suggestion });
}
