/**
 * Peak-to-Compton ratio: height of the full-energy peak over the mean height of the Compton region. The regions of
 * Cs-137 (358 to 382 keV) and of Co-60 at 1332.5 keV (1040 to 1096 keV) are those of IEEE Std 325; elsewhere it is the
 * same part of the way to the Compton edge as for Cs-137, from 75 to 80 %.
 */
import { weightedSum } from '../pulses.js';
import { fwhmKeV } from '../resolution.js';
import type { DetectorResponse } from '../respond.js';
import { shareBetween } from '../smear.js';
import { finding, UNRESOLVED } from './escape-peaks.js';
import { comptonEdgeKeV, type PeakRow } from './peak-row.js';

const STANDARD_REGIONS = [
  { lineKeV: 661.7, lowKeV: 358, highKeV: 382 },
  { lineKeV: 1332.5, lowKeV: 1040, highKeV: 1096 },
];
const STANDARD_WITHIN_KEV = 1;
const REGION_OF_EDGE = [0.75, 0.8];

/** The height of a peak is that of its middle, over this part of its width: 0.1 % below its top. */
const MIDDLE = 0.1;

export function comptonRegionKeV(lineKeV: number): [low: number, high: number] {
  const standard = STANDARD_REGIONS.find((found) => Math.abs(found.lineKeV - lineKeV) < STANDARD_WITHIN_KEV);
  if (standard) return [standard.lowKeV, standard.highKeV];
  const edge = comptonEdgeKeV(lineKeV);
  return [REGION_OF_EDGE[0] * edge, REGION_OF_EDGE[1] * edge];
}

/** Unresolved without a width, where a region lies under the threshold, or where another line is in the peak. */
export function peakToCompton(
  { smeared, resolution, thresholdKeV }: DetectorResponse,
  lineKeV: number,
  otherLinesKeV: readonly number[],
): Pick<PeakRow, 'mean' | 'stdError' | 'status'> {
  const width = resolution === null ? 0 : fwhmKeV(resolution, lineKeV);
  const [low, high] = comptonRegionKeV(lineKeV);
  const disturbed = otherLinesKeV.some((other) => Math.abs(other - lineKeV) < width);
  if (width === 0 || low < (thresholdKeV ?? 0) || disturbed) return UNRESOLVED;
  const half = 0.5 * MIDDLE * width;
  const peak = (part: number) => shareBetween(smeared, part, lineKeV - half, lineKeV + half) / (2 * half);
  const region = (part: number) => shareBetween(smeared, part, low, high) / (high - low);
  const { pulses } = smeared;
  const below = weightedSum(pulses, region);
  const { mean, stdError: error } = weightedSum(pulses, peak);
  if (below.mean === 0 || error === null || mean === 0) return finding({ mean: 0, stdError: null });
  const ratio = mean / below.mean;
  // To first order the ratio varies as the sum of peak − ratio × region does.
  const { stdError } = weightedSum(pulses, (part) => peak(part) - ratio * region(part));
  return finding({ mean: ratio, stdError: stdError === null ? null : stdError / below.mean });
}
