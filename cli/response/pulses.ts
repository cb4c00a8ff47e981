/**
 * What a pulse-height spectrum is made of, for sums over it with exact errors. A history makes one pulse at most in a
 * detector, so parts of the spectrum exclude one another and their errors hang together in a known way: for any weights
 * w of the parts, the sum Σ w x has over histories the mean Σ w p and the mean square Σ w² q, where p and q are mean
 * and mean square of the part.
 */
import type { QuantityRow, Spectrum } from '../../engine/result.js';

/** Parts between two energies; low = high for pulses of one energy. */
export interface Pulses {
  readonly lowKeV: Float64Array;
  readonly highKeV: Float64Array;
  readonly mean: Float64Array;
  readonly meanSquare: Float64Array;
  readonly histories: number;
}

/** A figure with its standard error; null where no history contributed. */
export interface Value {
  readonly mean: number;
  readonly stdError: number | null;
}

/** A source line whose pulses are known to have its energy. */
export type FullEnergyPulses = Pick<QuantityRow, 'lineKeV' | 'mean' | 'stdError'>;

/**
 * The bins of a spectrum in which anything was counted, and the full-energy pulses, which are taken out of their bins.
 */
export function pulsesOf(
  { energyLowKeV, energyHighKeV, mean, stdError }: Spectrum,
  fullEnergy: readonly FullEnergyPulses[],
  histories: number,
): Pulses {
  const parts: { low: number; high: number; mean: number; meanSquare: number }[] = [];
  const squareOf = (value: number, error: number) => error * error * (histories - 1) + value * value;
  const lines = fullEnergy.flatMap(({ lineKeV, mean: value, stdError: error }) =>
    lineKeV === null || !value ? [] : [{ lineKeV, mean: value, meanSquare: squareOf(value, error ?? 0) }],
  );
  for (const line of lines) {
    parts.push({ low: line.lineKeV, high: line.lineKeV, mean: line.mean, meanSquare: line.meanSquare });
  }
  for (let bin = 0; bin < mean.length; bin++) {
    if (!(mean[bin] > 0)) continue;
    const [low, high] = [energyLowKeV[bin], energyHighKeV[bin]];
    const taken = lines.filter(({ lineKeV }) => lineKeV >= low && lineKeV < high);
    const all = squareOf(mean[bin], stdError[bin] || 0);
    const left = taken.reduce((rest, line) => rest - line.mean, mean[bin]);
    const leftSquare = taken.reduce((rest, line) => rest - line.meanSquare, all);
    // What is left after exact parts is nothing where it is rounding.
    if (left > 1e-12 * mean[bin]) parts.push({ low, high, mean: left, meanSquare: Math.max(0, leftSquare) });
  }
  return {
    lowKeV: Float64Array.from(parts, ({ low }) => low),
    highKeV: Float64Array.from(parts, ({ high }) => high),
    mean: Float64Array.from(parts, (part) => part.mean),
    meanSquare: Float64Array.from(parts, (part) => part.meanSquare),
    histories,
  };
}

/** Mean and standard error of the sum over the parts with these weights. */
export function weightedSum(pulses: Pulses, weightOf: (part: number) => number): Value {
  let sum = 0;
  let square = 0;
  for (let part = 0; part < pulses.mean.length; part++) {
    const weight = weightOf(part);
    sum += weight * pulses.mean[part];
    square += weight * weight * pulses.meanSquare[part];
  }
  return valueOf(sum, square, pulses.histories);
}

/** From mean and mean square over histories. */
export function valueOf(mean: number, meanSquare: number, histories: number): Value {
  if (meanSquare === 0 || histories < 2) return { mean, stdError: null };
  return { mean, stdError: Math.sqrt(Math.max(0, meanSquare - mean * mean) / (histories - 1)) };
}
