/** The spectrum that a multichannel analyser shows: pulses smeared, those below the threshold left out. */
import type { Spectrum, SpectrumTally } from '../../engine/result.js';
import { valueOf } from './pulses.js';
import { REACH, shareBelow, type SmearedPulses } from './smear.js';

/**
 * Bins of a smeared spectrum: those of the tally, and above them bins of the last one's width, or wider ones where these
 * would be too many, as far as the highest pulses reach. What smearing takes below 0 goes to the first bin, so that no count is lost.
 */
export function registeredEdges(
  { energyLowKeV, energyHighKeV }: Pick<Spectrum, 'energyLowKeV' | 'energyHighKeV'>,
  { pulses, sigmaKeV }: SmearedPulses,
): Float64Array {
  const last = energyHighKeV.length - 1;
  const width = energyHighKeV[last] - energyLowKeV[last];
  const reach = pulses.highKeV.reduce((top, high, i) => Math.max(top, high + REACH * sigmaKeV[i]), 0);
  const over = Math.max(0, reach - energyHighKeV[last]);
  // A last bin much narrower than the peaks would make more bins than there were.
  const more = Math.min(Math.ceil(over / width), last + 1);
  const step = Math.max(width, over / more);
  const above = Array.from({ length: more }, (_, i) => energyHighKeV[last] + (i + 1) * step);
  return Float64Array.from([energyLowKeV[0], ...energyHighKeV, ...above]);
}

/** The registered spectrum with the standard error of each bin; NaN where nothing can be in it. */
export function registeredSpectrum(
  { tally, layer }: { readonly tally: SpectrumTally; readonly layer: string | null },
  edgesKeV: Float64Array,
  smeared: SmearedPulses,
  thresholdKeV: number,
): Spectrum {
  const grouped = groupFineBins(smeared);
  const { pulses, sigmaKeV } = grouped;
  const bins = edgesKeV.length - 1;
  const mean = new Float64Array(bins);
  const meanSquare = new Float64Array(bins);
  for (let part = 0; part < pulses.mean.length; part++) {
    const reach = REACH * sigmaKeV[part];
    const first = Math.max(0, firstAbove(edgesKeV, pulses.lowKeV[part] - reach) - 1);
    const end = Math.min(bins, firstAbove(edgesKeV, pulses.highKeV[part] + reach));
    const lowest = Math.max(thresholdKeV, edgesKeV[first]);
    let below = first === 0 && thresholdKeV <= edgesKeV[0] ? 0 : shareBelow(grouped, part, lowest);
    for (let bin = first; bin < end; bin++) {
      if (edgesKeV[bin + 1] <= thresholdKeV) continue;
      // The last bin that a part reaches takes the rest, so that shares add up to 1 to the last bit or two.
      const next = bin === end - 1 ? 1 : shareBelow(grouped, part, edgesKeV[bin + 1]);
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

/** Bins narrower than this part of a standard deviation look alike through it: within 1/24 of its square, 7e-5. */
const FINE = 1 / 25;

/** Neighbouring fine bins as one, so that the work goes with the resolution and not with its square. */
function groupFineBins(smeared: SmearedPulses): SmearedPulses {
  const { pulses, sigmaKeV } = smeared;
  const starts: number[] = [];
  pulses.lowKeV.forEach((low, part) => {
    const start = starts.at(-1);
    const joins =
      start !== undefined &&
      pulses.highKeV[part - 1] === low &&
      pulses.lowKeV[start] < pulses.highKeV[start] &&
      low < pulses.highKeV[part] &&
      pulses.highKeV[part] - pulses.lowKeV[start] <= FINE * sigmaKeV[start];
    if (!joins) starts.push(part);
  });
  const sums = (values: Float64Array) =>
    Float64Array.from(starts, (start, i) =>
      values.subarray(start, starts[i + 1]).reduce((sum, value) => sum + value, 0),
    );
  return {
    pulses: {
      lowKeV: Float64Array.from(starts, (start) => pulses.lowKeV[start]),
      highKeV: Float64Array.from(
        starts,
        (_, i) => pulses.highKeV[(starts[i + 1] ?? pulses.highKeV.length) - 1],
      ),
      mean: sums(pulses.mean),
      meanSquare: sums(pulses.meanSquare),
      histories: pulses.histories,
    },
    sigmaKeV: Float64Array.from(starts, (start) => sigmaKeV[start]),
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
