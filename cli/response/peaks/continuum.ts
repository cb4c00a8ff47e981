/** A pulse-height spectrum without its full-energy pulses: what escape peaks and edges are looked for in. */
import type { Spectrum } from '../../../engine/result.js';
import { valueOf, type Pulses, type Value } from '../pulses.js';

export class Continuum {
  readonly bins: number;
  private readonly mean: Float64Array;
  private readonly meanSquare: Float64Array;
  private readonly histories: number;

  constructor(
    readonly edgesKeV: Float64Array,
    { lowKeV, highKeV, mean, meanSquare, histories }: Pulses,
  ) {
    this.bins = edgesKeV.length - 1;
    this.mean = new Float64Array(this.bins);
    this.meanSquare = new Float64Array(this.bins);
    this.histories = histories;
    let bin = 0;
    lowKeV.forEach((low, part) => {
      if (low === highKeV[part]) return;
      // Parts that are bins come in the order of the bins.
      while (edgesKeV[bin] < low) bin++;
      this.mean[bin] = mean[part];
      this.meanSquare[bin] = meanSquare[part];
    });
  }

  /** Bin of an energy; the nearest one for energies outside. */
  binOf(energyKeV: number): number {
    const above = this.edgesKeV.findIndex((edge) => edge > energyKeV);
    return above < 0 ? this.bins - 1 : Math.max(0, above - 1);
  }

  widthKeV(bin: number): number {
    return this.edgesKeV[bin + 1] - this.edgesKeV[bin];
  }

  /** Sum of bins with weights; the error is exact, for a history is in one bin at most. */
  sum(terms: Iterable<readonly [bin: number, weight: number]>): Value {
    let sum = 0;
    let square = 0;
    for (const [bin, weight] of terms) {
      sum += weight * this.mean[bin];
      square += weight * weight * this.meanSquare[bin];
    }
    return valueOf(sum, square, this.histories);
  }

  /** Mean height per keV of the bins from `first` up to but not including `end`. */
  height(first: number, end: number): Value {
    const width = this.edgesKeV[end] - this.edgesKeV[first];
    return this.sum(range(first, end).map((bin) => [bin, 1 / width]));
  }
}

/** Edges of a spectrum's bins. */
export function edgesOf({ energyLowKeV, energyHighKeV }: Spectrum): Float64Array {
  return Float64Array.from([energyLowKeV[0], ...energyHighKeV]);
}

export function range(first: number, end: number): number[] {
  return Array.from({ length: Math.max(0, end - first) }, (_, i) => first + i);
}
