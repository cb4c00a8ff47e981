/**
 * How far the error of a weighted figure can be relied on. Few histories may bring most of it, and then its standard
 * error is itself uncertain: the relative variance of the variance (VOV) tells, the square of the relative error of
 * the squared standard error.
 */
import { MOMENT_PLACES } from './dose-layout.js';
import type { Reliability } from './result.js';
import type { Sums } from './run-sums.js';
import type { TallyLayout } from './tally-layout.js';

/** Null for a figure whose moments are not kept. */
export function reliabilityOf(
  sums: Sums,
  layout: TallyLayout,
  figure: number,
  histories: number,
): Reliability | null {
  const place = layout.dose.leading.indexOf(figure);
  if (place < 0 || !(layout.weighted || figure >= layout.dose.farFigure)) return null;
  const at = layout.dose.momentFigure + MOMENT_PLACES * place;
  const contributing = sums.figureSum[at];
  const vov = varianceOfVariance(histories, {
    first: sums.figureSquare[at],
    second: sums.figureSum[at + 1],
    third: sums.figureSquare[at + 1],
    fourth: sums.figureSum[at + 2],
  });
  return { contributing, vov };
}

interface Moments {
  readonly first: number;
  readonly second: number;
  readonly third: number;
  readonly fourth: number;
}

/** Σ(x − x̄)⁴/(Σ(x − x̄)²)² − 1/n from the sums of powers; null where nothing varies. */
export function varianceOfVariance(n: number, { first, second, third, fourth }: Moments): number | null {
  const mean = first / n;
  const spread = second - n * mean * mean;
  if (!(spread > 0)) return null;
  const fourths = fourth - 4 * mean * third + 6 * mean * mean * second - 3 * n * mean ** 4;
  return Math.max(0, fourths / (spread * spread) - 1 / n);
}
