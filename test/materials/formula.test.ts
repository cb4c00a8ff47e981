import { describe, expect, it } from 'vitest';
import { elementOf, MaterialError, parseFormula } from '../../materials/index.js';

/** Counts by symbol, as one text. */
function counts(formula: string): string {
  const entries = [...parseFormula(formula)].sort(([a], [b]) => a - b);
  return entries.map(([z, count]) => `${elementOf(z).symbol}${Number(count.toPrecision(12))}`).join(' ');
}

describe('parseFormula', () => {
  it.each([
    ['NaI', 'Na1 I1'],
    ['H2O', 'H2 O1'],
    [' PbWO4 ', 'O4 W1 Pb1'],
    ['Cd0.9Zn0.1Te', 'Zn0.1 Cd0.9 Te1'],
    ['CH1.212', 'H1.212 C1'],
    ['Ca(OH)2', 'H2 O2 Ca1'],
    ['Ca5(PO4)3(OH)', 'H1 O13 P3 Ca5'],
    ['Fe4[Fe(CN)6]3', 'C18 N18 Fe7'],
    ['((CH2)2O)3', 'H12 C6 O3'],
    ['Ar0.9(CH4)0.1', 'H0.4 C0.1 Ar0.9'],
    ['CaSO4·2H2O', 'H4 O6 S1 Ca1'],
    ['CaSO4*2H2O', 'H4 O6 S1 Ca1'],
    ['CaSO4•0.5H2O', 'H1 O4.5 S1 Ca1'],
    ['2H2O·NaCl', 'H4 O2 Na1 Cl1'],
    ['Gd₃Al₂Ga₃O₁₂', 'O12 Al2 Ga3 Gd3'],
    ['CO', 'C1 O1'],
    ['Co', 'Co1'],
    ['HHHH', 'H4'],
  ])('reads %s as %s', (formula, expected) => {
    expect(counts(formula)).toBe(expected);
  });

  it.each([
    ['', 'bad_formula', 'must be a chemical formula of 1 to 200 characters, got ""'],
    ['H2O)', 'bad_formula', 'must have a symbol or "(" in place of ")", got "H2O)"'],
    ['Ca(OH2', 'bad_formula', 'must close each group: a ")" is missing, got "Ca(OH2"'],
    ['Ca(OH]2', 'bad_formula', 'must have a symbol or "(" in place of "]2", got "Ca(OH]2"'],
    ['Ca()2', 'bad_formula', 'must have an element in each part and group, got "Ca()2"'],
    ['2H2O', 'bad_formula', 'must have a symbol or "(" in place of "2H2O", got "2H2O"'],
    ['H0O', 'bad_formula', 'must have counts above 0 and at most 1000000, got "H0O"'],
    ['H9999999', 'bad_formula', 'must have counts above 0 and at most 1000000, got "H9999999"'],
    ['H-2', 'bad_formula', 'must have a symbol or "(" in place of "-2", got "H-2"'],
    ['NaCl·', 'bad_formula', 'must have an element in each part and group, got "NaCl·"'],
    [
      'CaSO4.2H2O',
      'bad_formula',
      'must have the water of a hydrate after "·" or "*", not after ".", got "CaSO4.2H2O" ' +
        '(did you mean CaSO4·2H2O?)',
    ],
    [
      'NaX',
      'unknown_element',
      'must be the symbol of an element from H to Fm (upper and lower case as usual), got X ' +
        '(did you mean H?)',
    ],
    ['water', 'bad_formula', 'must have a symbol or "(" in place of "water", got "water"'],
  ])('refuses %j', (formula, code, message) => {
    expect(() => parseFormula(formula)).toThrowError(MaterialError);
    expect(() => parseFormula(formula)).toThrowError(expect.objectContaining({ code, message }));
  });

  it('refuses what is nested too deeply or too long, and says so briefly', () => {
    expect(() => parseFormula('('.repeat(50) + 'H' + ')'.repeat(50))).toThrowError(/nest deeper than 16/);
    expect(() => parseFormula('H'.repeat(10_000))).toThrowError(/^.{0,160}$/);
  });
});
