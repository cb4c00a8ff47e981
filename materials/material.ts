/** A homogeneous material: what it is made of and how dense it is. */

/** One element of a material with its share by mass. */
export interface Constituent {
  /** Atomic number, 1–100. */
  readonly z: number;
  /** Mass fraction; the fractions of a material add up to 1. */
  readonly massFraction: number;
}

export interface Material {
  readonly name: string;
  readonly densityGPerCm3: number;
  /** Ascending in z, each element once. */
  readonly constituents: readonly Constituent[];
}
