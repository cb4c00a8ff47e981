/** Mean and standard error of a figure of a run. */
import { estimate, type Estimate } from './statistics.js';
import type { RunFigures } from './totals.js';

/**
 * Spread of single histories, relative to the mean, below which it is the rounding of sums of squares: of figures that
 * weighted transport knows exactly.
 */
const ROUNDING = 1e-6;

/** As `estimate`, for the figure at a place of the layout. */
export function figureEstimate(
  { sums, layout, histories, historyWeight }: RunFigures,
  figure: number,
): Estimate {
  const value = estimate(sums.figureSum[figure], sums.figureSquare[figure], histories, historyWeight);
  const { mean, stdError } = value;
  if (!layout.weighted || stdError === null) return value;
  return stdError * Math.sqrt(histories) <= ROUNDING * Math.abs(mean) ? { mean, stdError: 0 } : value;
}
