/** The shape of a row in the tables of named materials, and the sources that many rows share. */

export interface MaterialRow {
  readonly name: string;
  readonly aliases: readonly string[];
  readonly description: string;
  readonly densityGPerCm3: number;
  readonly densitySource: string;
  /** A formula, or mass fractions of elements, formulas or other named materials. */
  readonly composition: string | Readonly<Record<string, number>>;
  readonly compositionSource: string;
}

/** Densities that NIST gives with its photon tables. */
export const NISTIR = 'NISTIR 5632 (Hubbell and Seltzer 1995), Table 2 (value from memory)';
/** Compositions that NIST gives with its photon tables, which they reproduce. */
export const NISTIR_MIX =
  'NISTIR 5632 (Hubbell and Seltzer 1995), Table 2 (from memory; gives its attenuation coefficients within 0.1 %)';
/** The list of 180 compounds of NIST's electron tables, after ICRU Reports 37 and 49. */
export const NIST_LIST = 'NIST list of compounds (ICRU Reports 37 and 49), as in the xraylib data package';
/** Read off a formula. */
export const FORMULA = 'chemical formula';
export const PNNL = 'PNNL-15870 Rev. 1 (value from memory)';
export const MAKER = 'data sheets of crystal makers (value from memory)';
export const CRC = 'CRC Handbook of Chemistry and Physics (value from memory)';
export const COMMON = 'common practice (value from memory)';
