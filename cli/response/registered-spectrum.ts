/** The spectrum that a multichannel analyser shows: pulses smeared, those below the threshold left out. */
import type { Spectrum, SpectrumTally } from '../../engine/result.js';
import { valueOf } from './pulses.js';
import { REACH, shareBelow, type SmearedPulses } from './smear.js';

/**
 * Bins of a smeared spectrum: those of the tally, and above them as many of the last one's width as the highest pulses
 * reach into. What smearing takes below 0 goes to the first bin, so that no count is lost.
 */
export function registeredEdges(
  { energyLowKeV, energyHighKeV }: Pick<Spectrum, 'energyLowKeV' | 'energyHighKeV'>,
  { pulses, sigmaKeV }: SmearedPulses,
): Float64Array {
  const last = energyHighKeV.length - 1;
  const width = energyHighKeV[last] - energyLowKeV[last];
  const reach = pulses.highKeV.reduce((top, high, i) => Math.max(top, high + REACH * sigmaKeV[i]), 0);
  const more = Math.max(0, Math.ceil((reach - energyHighKeV[last]) / width));
  const above = Array.from({ length: more }, (_, i) => energyHighKeV[last] + (i + 1) * width);
  return Float64Array.from([energyLowKeV[0], ...energyHighKeV, ...above]);
}

/** The registered spectrum with the standard error of each bin; NaN where nothing can be in it. */
export function registeredSpectrum(
  { tally, layer }: { readonly tally: SpectrumTally; readonly layer: string | null },
  edgesKeV: Float64Array,
  smeared: SmearedPulses,
  thresholdKeV: number,
): Spectrum {
  const { pulses, sigmaKeV } = smeared;
  const bins = edgesKeV.length - 1;
  const mean = new Float64Array(bins);
  const meanSquare = new Float64Array(bins);
  for (let part = 0; part < pulses.mean.length; part++) {
    const reach = REACH * sigmaKeV[part];
    const first = Math.max(0, firstAbove(edgesKeV, pulses.lowKeV[part] - reach) - 1);
    const end = Math.min(bins, firstAbove(edgesKeV, pulses.highKeV[part] + reach));
    const lowest = Math.max(thresholdKeV, edgesKeV[first]);
    let below = first === 0 && thresholdKeV <= edgesKeV[0] ? 0 : shareBelow(smeared, part, lowest);
    for (let bin = first; bin < end; bin++) {
      if (edgesKeV[bin + 1] <= thresholdKeV) continue;
      // The last bin that a part reaches takes the rest, so that shares add up to 1 to the last bit or two.
      const next = bin === end - 1 ? 1 : shareBelow(smeared, part, edgesKeV[bin + 1]);
      const share = Math.max(0, next - below);
      below = Math.max(below, next);
      mean[bin] += share * pulses.mean[part];
      meanSquare[bin] += share * share * pulses.meanSquare[part];
    }
  }
  const stdError = mean.map(
    (value, bin) => valueOf(value, meanSquare[bin], pulses.histories).stdError ?? NaN,
  );
  return {
    tally,
    layer,
    energyLowKeV: edgesKeV.slice(0, bins),
    energyHighKeV: edgesKeV.slice(1),
    mean,
    stdError,
  };
}

/** Index of the first edge above an energy; the number of edges where there is none. */
function firstAbove(edgesKeV: Float64Array, energyKeV: number): number {
  let [low, high] = [0, edgesKeV.length];
  while (low < high) {
    const middle = (low + high) >> 1;
    if (edgesKeV[middle] > energyKeV) high = middle;
    else low = middle + 1;
  }
  return low;
}
