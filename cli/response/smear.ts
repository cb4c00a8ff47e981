/**
 * Pulses as a detector of finite resolution gives them: each spread by a normal law. Shares of bins are exact
 * integrals: a bin's content is uniform between its edges, a line's stands at its energy.
 */
import type { Resolution } from '../../engine/setup.js';
import { normalBelow, normalBelowIntegral } from './normal.js';
import type { Pulses } from './pulses.js';
import { fwhmKeV, FWHM_PER_SIGMA } from './resolution.js';

/** Beyond so many standard deviations a share is 0: what is cut off is 2e-15. */
export const REACH = 8;

/** The pulses with the standard deviation of each part. */
export interface SmearedPulses {
  readonly pulses: Pulses;
  readonly sigmaKeV: Float64Array;
}

export function smear(pulses: Pulses, resolution: Resolution | null): SmearedPulses {
  const sigmaKeV = pulses.lowKeV.map((low, part) =>
    resolution === null ? 0 : fwhmKeV(resolution, 0.5 * (low + pulses.highKeV[part])) / FWHM_PER_SIGMA,
  );
  return { pulses, sigmaKeV };
}

/** Share of a part's pulses that are given below an energy. */
export function shareBelow({ pulses, sigmaKeV }: SmearedPulses, part: number, energyKeV: number): number {
  const low = pulses.lowKeV[part];
  const high = pulses.highKeV[part];
  const sigma = sigmaKeV[part];
  if (energyKeV <= low - REACH * sigma) return 0;
  if (energyKeV > high + REACH * sigma) return 1;
  if (low === high) return normalBelow((energyKeV - low) / sigma);
  if (sigma === 0) return (energyKeV - low) / (high - low);
  const integral =
    normalBelowIntegral((energyKeV - low) / sigma) - normalBelowIntegral((energyKeV - high) / sigma);
  // Far from the bin the difference of two long integrals has the rounding of each.
  return Math.min(1, Math.max(0, (sigma * integral) / (high - low)));
}

/** Share of a part's pulses between two energies. */
export function shareBetween(smeared: SmearedPulses, part: number, lowKeV: number, highKeV: number): number {
  return shareBelow(smeared, part, highKeV) - shareBelow(smeared, part, lowKeV);
}
