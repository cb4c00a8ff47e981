/**
 * The plain, checked description of one run, in fixed units (cm, keV, g/cm³, Bq, s). The setup-file reader
 * makes it from YAML, a program may build it by hand, the compiler turns it into typed arrays.
 */
import type { Material } from '../materials/index.js';

/** A line the source emits; `perDecay` is its weight (photons per decay where a nuclide is given). */
export interface SourceLine {
  readonly energyKeV: number;
  readonly perDecay: number;
}

/** One bin of a continuous source spectrum; photons are uniform in energy inside a bin. */
export interface SpectrumBin {
  readonly energyLowKeV: number;
  readonly energyHighKeV: number;
  readonly relativePhotons: number;
}

/** What energies the source emits. Exactly one of the two lists is non-empty. */
export interface Emission {
  readonly lines: readonly SourceLine[];
  readonly continuum: readonly SpectrumBin[];
  /** Photons emitted per decay: the sum of `perDecay` for `lines` and nuclides, null where no decay is meant. */
  readonly photonsPerDecay: number | null;
  readonly nuclide: string | null;
}

/** Where and in which direction photons start. z runs from the front face (0) into the stack. */
export type SourceShape =
  | { readonly kind: 'beam'; readonly angleDeg: number; readonly diameterCm: number }
  | { readonly kind: 'diffuse'; readonly law: 'isotropic' | 'uniform_solid_angle' }
  | { readonly kind: 'point'; readonly distanceCm: number; readonly offsetCm: number }
  | { readonly kind: 'disc'; readonly distanceCm: number; readonly radiusCm: number }
  | { readonly kind: 'embedded'; readonly layer: string };

export interface Source {
  readonly shape: SourceShape;
  readonly emission: Emission;
  readonly activityBq: number | null;
  /** Counting time for counts in a measurement; null when not asked. */
  readonly liveTimeS: number | null;
}

/** Full width at half maximum of a detector against energy (applied to the tallied spectrum, never to transport). */
export type Resolution =
  | { readonly kind: 'at_energy'; readonly fwhmKeV: number; readonly atKeV: number } // scales as sqrt(E)
  | { readonly kind: 'formula'; readonly a: number; readonly b: number; readonly c: number } // a + b sqrt(E + c E^2), keV
  | { readonly kind: 'table'; readonly energyKeV: readonly number[]; readonly fwhmKeV: readonly number[] };

export interface EnergyWindow {
  readonly name: string;
  readonly energyLowKeV: number;
  readonly energyHighKeV: number;
}

export interface Detector {
  readonly resolution: Resolution | null;
  /** Pulses below it are not registered (applied to the tallied spectrum). */
  readonly thresholdKeV: number | null;
  readonly windows: readonly EnergyWindow[];
}

export interface Layer {
  readonly name: string;
  /** null is vacuum. */
  readonly material: Material | null;
  readonly thicknessCm: number;
  /** Own lateral radius; null: that of the extent, or infinite. */
  readonly radiusCm: number | null;
  readonly detector: Detector | null;
}

export type Extent =
  | { readonly kind: 'radius'; readonly radiusCm: number }
  | { readonly kind: 'rectangle'; readonly widthCm: number; readonly heightCm: number };

export type DoseQuantity = 'air_kerma' | 'ambient_dose' | 'effective_dose_ap';

/** A place outside the stack where dose is scored by next events. */
export interface DosePoint {
  readonly name: string;
  /** Along the axis from the front face; negative is on the source side. */
  readonly zCm: number;
  readonly offsetCm: number;
}

export interface DepthProfile {
  readonly layer: string;
  readonly bins: number;
}

export interface Tally {
  /** Ascending edges from 0 to above the highest source energy. */
  readonly energyEdgesKeV: Float64Array;
  readonly dose: readonly DoseQuantity[];
  readonly dosePoints: readonly DosePoint[];
  readonly depthProfile: DepthProfile | null;
  /** Detectors are held against one another: lone pulses, coincidences, sums. */
  readonly coincidence?: boolean;
}

export interface Physics {
  readonly coherent: boolean;
  readonly boundIncoherent: boolean;
  readonly doppler: boolean;
  readonly fluorescence: boolean;
  readonly pair: boolean;
  readonly bremsstrahlung: boolean;
  /** Photons below it deposit on the spot. */
  readonly cutoffKeV: number;
}

/** A quantity of the totals and the relative standard error at which the run may stop. */
export interface Until {
  readonly quantity: string;
  /** Layer the quantity is taken in; null: the first layer that has it. */
  readonly layer: string | null;
  readonly relativeError: number;
}

export type Transport = 'auto' | 'analog' | 'deep';

export interface RunOptions {
  readonly histories: number;
  readonly until: Until | null;
  readonly timeLimitS: number | null;
  readonly transport: Transport;
}

export interface Setup {
  readonly title: string;
  readonly seed: string;
  readonly source: Source;
  /** From the source side outwards. */
  readonly stack: readonly Layer[];
  readonly extent: Extent | null;
  readonly tally: Tally;
  readonly physics: Physics;
  readonly run: RunOptions;
  /**
   * Energies of an efficiency curve, ascending: each is to be run by itself in place of the source's one line, which
   * is the highest of them. Null or absent: an ordinary run.
   */
  readonly energyGridKeV?: readonly number[] | null;
}

export const MAX_LAYERS = 64;
export const MIN_ENERGY_KEV = 1;
export const MAX_ENERGY_KEV = 20_000;
