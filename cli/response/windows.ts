/** Counts in energy windows of a detector, gross and net. */
import type { EnergyWindow } from '../../engine/setup.js';
import { weightedSum, type Value } from './pulses.js';
import { shareBetween, type SmearedPulses } from './smear.js';

/** Width of the bands beside a window from which its continuum is taken, as a share of its width. */
const BAND_SHARE = 0.25;

export interface WindowCounts {
  readonly window: EnergyWindow;
  /** Registered pulses in the window. */
  readonly gross: Value;
  /** Without the continuum; null where a band has no room above the threshold. */
  readonly net: Value | null;
}

/**
 * Net counts take the continuum for a trapezoid: its height at either side is that of a band beside the window, a
 * quarter of the window wide (the practice of peak areas with side channels, D. F. Covell, Anal. Chem. 31 (1959)
 * 1785). Window and bands are sums over the same pulses, and the error of the difference is that of one sum.
 */
export function windowCounts(
  smeared: SmearedPulses,
  thresholdKeV: number,
  window: EnergyWindow,
): WindowCounts {
  const { pulses } = smeared;
  const { energyLowKeV: from, energyHighKeV: to } = window;
  const between = (part: number, low: number, high: number) =>
    high <= thresholdKeV ? 0 : shareBetween(smeared, part, Math.max(low, thresholdKeV), high);
  const gross = weightedSum(pulses, (part) => between(part, from, to));
  const band = BAND_SHARE * (to - from);
  if (from - band < thresholdKeV) return { window, gross, net: null };
  const net = weightedSum(pulses, (part) => {
    const beside = between(part, from - band, from) + between(part, to, to + band);
    return between(part, from, to) - (0.5 / BAND_SHARE) * beside;
  });
  return { window, gross, net };
}

/** Registered pulses of all energies. */
export function registeredCounts(smeared: SmearedPulses, thresholdKeV: number): Value {
  return weightedSum(smeared.pulses, (part) =>
    thresholdKeV > 0 ? shareBetween(smeared, part, thresholdKeV, Infinity) : 1,
  );
}
