/** The one kind of error this folder throws for a value it was given; the words are made here and nowhere else. */

export type MaterialErrorCode =
  | 'bad_formula'
  | 'unknown_element'
  | 'unknown_material'
  | 'bad_density'
  | 'no_density'
  | 'bad_mass_fraction'
  | 'mass_fractions_sum'
  | 'bad_name'
  | 'energy_out_of_range'
  | 'element_out_of_range';

export interface MaterialErrorDetails {
  readonly code: MaterialErrorCode;
  /** What was given. */
  readonly value: string;
  /** What it must be, as the end of a sentence: "must be more than 0 g/cm3". */
  readonly rule: string;
  /** Nearest known name, or another way out; null where there is none. */
  readonly suggestion?: string | null;
}

/** A value that cannot be a material, an element or an energy; message, code, rule, value and way out apart. */
export class MaterialError extends Error {
  readonly code: MaterialErrorCode;
  readonly value: string;
  readonly rule: string;
  readonly suggestion: string | null;

  constructor({ code, value, rule, suggestion = null }: MaterialErrorDetails) {
    super(`${rule}, got ${value}${suggestion === null ? '' : ` (did you mean ${suggestion}?)`}`);
    this.name = 'MaterialError';
    this.code = code;
    this.value = value;
    this.rule = rule;
    this.suggestion = suggestion;
  }
}
