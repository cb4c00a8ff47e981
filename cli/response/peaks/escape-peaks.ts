/**
 * Peaks of one energy below the full-energy peak: photons that leave the crystal take a fixed energy with them. In the
 * spectrum as tallied such a peak is a bin or a few, so its counts are what stands above the straight line between the
 * bins on both sides.
 */
import type { ManifestLayer, ManifestSource } from '../../result/manifest.js';
import { ELECTRON_REST_KEV } from '../../../engine/constants.js';
import type { Value } from '../pulses.js';
import { range, type Continuum } from './continuum.js';
import { SEEN_SIGMAS, type FeatureName, type FeatureStatus, type PeakRow } from './peak-row.js';

/** A peak that may be there, from its lowest to its highest energy. */
export interface Expected {
  readonly feature: FeatureName;
  readonly lineKeV: number | null;
  readonly xRay: string | null;
  readonly energyKeV: number;
  readonly lowKeV: number;
  readonly highKeV: number;
  /** Photons per decay of the lines it comes from: how much it can matter to another peak. */
  readonly photons: number;
}

/** Deposits are sums of many terms. */
const ROUNDING_KEV = 1e-6;
/** Bins on each side that the continuum is taken from, at least and at most. */
const [LEAST_SIDE, MOST_SIDE] = [3, 12];
/** Peaks of lines with a smaller share of photons disturb no other. */
const DISTURBING = 0.05;

/** The peaks that the lines of a source may have in a layer, beside those of full energy. */
export function expectedPeaks({ lines }: ManifestSource, { x_rays: xRays = [] }: ManifestLayer): Expected[] {
  const pairs = lines.filter(({ energy_keV: energy }) => energy > 2 * ELECTRON_REST_KEV);
  const peaks = lines.flatMap(({ energy_keV: line, per_decay: photons }) => [
    ...(line > 2 * ELECTRON_REST_KEV
      ? ([1, 2] as const).map((quanta) =>
          single(
            quanta === 1 ? 'single_escape' : 'double_escape',
            line,
            line - quanta * ELECTRON_REST_KEV,
            photons,
          ),
        )
      : []),
    ...xRays
      .filter(({ edge_keV: edge }) => line > edge)
      .map(({ element, series, lines: emitted }): Expected => {
        const energies = emitted.map(({ energy_keV: energy }) => line - energy);
        const mean = emitted.reduce((sum, { energy_keV: energy, share }) => sum + share * energy, 0);
        return {
          feature: 'x_ray_escape',
          lineKeV: line,
          xRay: `${element} ${series}`,
          energyKeV: line - mean,
          lowKeV: Math.min(...energies),
          highKeV: Math.max(...energies),
          photons,
        };
      }),
  ]);
  if (pairs.length > 0) {
    const photons = pairs.reduce((sum, { per_decay: share }) => sum + share, 0);
    peaks.push({ ...single('annihilation', 0, ELECTRON_REST_KEV, photons), lineKeV: null });
  }
  return peaks;
}

function single(feature: FeatureName, lineKeV: number, energyKeV: number, photons: number): Expected {
  return { feature, lineKeV, xRay: null, energyKeV, lowKeV: energyKeV, highKeV: energyKeV, photons };
}

/** Bins from first up to but not including end. */
export interface Bins {
  readonly first: number;
  readonly end: number;
}

/** The bins a peak can be in. */
export function binsOf(continuum: Continuum, { lowKeV, highKeV }: Expected): Bins {
  return {
    first: continuum.binOf(lowKeV - ROUNDING_KEV),
    end: continuum.binOf(highKeV + ROUNDING_KEV) + 1,
  };
}

/** The net counts of every expected peak. */
export function escapePeaks(continuum: Continuum, layer: string, expected: readonly Expected[]): PeakRow[] {
  const places = expected.map((peak) => binsOf(continuum, peak));
  return expected.map((peak, i) => {
    const others = places.filter((_, k) => k !== i && expected[k].photons >= DISTURBING * peak.photons);
    const { feature, lineKeV, xRay, energyKeV } = peak;
    return {
      feature,
      layer,
      lineKeV,
      xRay,
      energyKeV,
      unit: '1',
      ...netCounts(continuum, places[i], others, energyKeV),
    };
  });
}

type Finding = Pick<PeakRow, 'mean' | 'stdError' | 'status'>;

export const UNRESOLVED: Finding = { mean: null, stdError: null, status: 'unresolved' };

/** A value that is worth telling, or null. */
export function finding({ mean, stdError }: Value): Finding {
  const status: FeatureStatus = stdError !== null && mean > SEEN_SIGMAS * stdError ? 'seen' : 'absent';
  return status === 'seen' ? { mean, stdError, status } : { mean: null, stdError: null, status };
}

function netCounts(continuum: Continuum, peak: Bins, others: readonly Bins[], energyKeV: number): Finding {
  const taken = (bin: number) => others.some(({ first, end }) => bin >= first && bin < end);
  if (energyKeV <= 0 || range(peak.first, peak.end).some(taken)) return UNRESOLVED;
  const size = Math.max(LEAST_SIDE, Math.min(MOST_SIDE, peak.end - peak.first));
  const free = (bins: number[]) => bins.filter((bin) => bin > 0 && bin < continuum.bins && !taken(bin));
  // Twice as many are looked through, so that a neighbour does not take all of them.
  const below = free(range(peak.first - 2 * size, peak.first)).slice(-size);
  const above = free(range(peak.end, peak.end + 2 * size)).slice(0, size);
  if (below.length < size || above.length < size) return UNRESOLVED;
  return finding(continuum.sum(netWeights(continuum, peak, below, above)));
}

/** Peak bins count as they are; from them goes the straight line through the mean heights of the two sides. */
function netWeights(
  continuum: Continuum,
  peak: Bins,
  below: readonly number[],
  above: readonly number[],
): [number, number][] {
  const { edgesKeV } = continuum;
  const widthOf = (bins: readonly number[]) => bins.reduce((sum, bin) => sum + continuum.widthKeV(bin), 0);
  const centreOf = (bins: readonly number[]) =>
    bins.reduce((sum, bin) => sum + 0.5 * (edgesKeV[bin] + edgesKeV[bin + 1]) * continuum.widthKeV(bin), 0) /
    widthOf(bins);
  const width = edgesKeV[peak.end] - edgesKeV[peak.first];
  const centre = 0.5 * (edgesKeV[peak.end] + edgesKeV[peak.first]);
  const share = (centre - centreOf(below)) / (centreOf(above) - centreOf(below));
  return [
    ...range(peak.first, peak.end).map((bin): [number, number] => [bin, 1]),
    ...below.map((bin): [number, number] => [bin, (-width * (1 - share)) / widthOf(below)]),
    ...above.map((bin): [number, number] => [bin, (-width * share) / widthOf(above)]),
  ];
}
