/** Means and standard errors from history-level sums. */

export interface Estimate {
  readonly mean: number;
  /** Standard error of the mean; null when no history scored, for then it is not known. */
  readonly stdError: number | null;
}

/**
 * Mean over histories and its standard error.
 *
 * @param sum sum of the histories' values
 * @param square sum of their squares
 * @param weight factor on every value
 */
export function estimate(sum: number, square: number, histories: number, weight = 1): Estimate {
  const mean = sum / histories;
  if (square === 0 || histories < 2) return { mean: weight * mean, stdError: null };
  const variance = Math.max(0, square / histories - mean * mean) / (histories - 1);
  return { mean: weight * mean, stdError: weight * Math.sqrt(variance) };
}

/**
 * Ratio of two figures of which the first counts a part of the histories of the second (indicators): the covariance
 * is then the first one's own sum of squares.
 */
export function partRatio(
  part: number,
  partSquare: number,
  whole: number,
  wholeSquare: number,
): Estimate | null {
  if (whole === 0) return null;
  const ratio = part / whole;
  if (partSquare === 0) return { mean: 0, stdError: null };
  const variance = Math.max(0, partSquare - 2 * ratio * partSquare + ratio * ratio * wholeSquare);
  return { mean: ratio, stdError: Math.sqrt(variance) / whole };
}

/** Sum and sum of squares of a figure over histories. */
export interface FigureSums {
  readonly sum: number;
  readonly square: number;
}

/**
 * Ratio of two figures of the same histories, `whole` not 0, with its standard error by first-order propagation.
 *
 * @param product sum over histories of the product of the two
 */
export function jointRatio(part: FigureSums, whole: FigureSums, product: number): Estimate {
  const ratio = part.sum / whole.sum;
  if (part.square === 0) return { mean: ratio, stdError: null };
  const variance = Math.max(0, part.square - 2 * ratio * product + ratio * ratio * whole.square);
  return { mean: ratio, stdError: Math.sqrt(variance) / whole.sum };
}
