/** What is said of each feature that a detector's spectrum may show. */
import { ELECTRON_REST_KEV } from '../../../engine/constants.js';

export type FeatureName =
  /** Counts, per source photon. */
  | 'full_energy'
  | 'single_escape'
  | 'double_escape'
  | 'x_ray_escape'
  | 'annihilation'
  /** Energies at which they are seen. */
  | 'backscatter'
  | 'compton_edge'
  /** A ratio. */
  | 'peak_to_compton';

/**
 * seen: more than 3 standard errors above nothing. absent: not so. unresolved: something else lies there, or there is no
 * room beside it, or it needs a width of peaks and there is none.
 */
export type FeatureStatus = 'seen' | 'absent' | 'unresolved';

export interface PeakRow {
  readonly feature: FeatureName;
  readonly layer: string;
  /** Source line it belongs to; null: to all together. */
  readonly lineKeV: number | null;
  /** X rays of an escape peak, as in "Te Ka". */
  readonly xRay: string | null;
  /** Where it must be by kinematics. */
  readonly energyKeV: number;
  readonly mean: number | null;
  readonly stdError: number | null;
  readonly unit: '1' | 'keV';
  readonly status: FeatureStatus;
}

/** Standard errors by which a feature must stand out to be seen: by chance once in 700 times (normal law, one side). */
export const SEEN_SIGMAS = 3;

/** Energy of a photon after it was scattered straight back (Compton's formula). */
export function backscatteredKeV(energyKeV: number): number {
  return energyKeV / (1 + (2 * energyKeV) / ELECTRON_REST_KEV);
}

/** Highest energy a free electron at rest gets from a photon. */
export function comptonEdgeKeV(energyKeV: number): number {
  return energyKeV - backscatteredKeV(energyKeV);
}
