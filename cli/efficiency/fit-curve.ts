/**
 * Fits of an efficiency curve. Above a K edge of what the photons have to cross efficiencies jump, and no polynomial
 * follows that: the curve is cut there and each part fitted by itself.
 */
import type { Setup } from '../../engine/setup.js';
import { relaxation } from '../../materials/index.js';
import { FITTED_QUANTITIES, type CurveRow, type FittedQuantity } from './curve-rows.js';
import { efficiencyAt, fitLogPolynomial, type LogPolynomial } from './log-polynomial.js';

export interface CurveFit extends LogPolynomial {
  readonly quantity: FittedQuantity;
  readonly layer: string;
  /** From the lowest to the highest energy fitted; it holds nowhere else. */
  readonly energyLowKeV: number;
  readonly energyHighKeV: number;
  readonly points: number;
  /** Largest |efficiency / fit − 1| of the points. */
  readonly worstDeviation: number;
}

/** An element with less of the mass makes no jump to speak of. */
const LEAST_MASS_FRACTION = 0.01;

/** The fits of both efficiencies in every detector, part by part; parts of fewer than 3 points have none. */
export function fitCurves({ stack }: Pick<Setup, 'stack'>, rows: readonly CurveRow[]): CurveFit[] {
  return stack.flatMap(({ name, detector }, at) => {
    if (detector === null) return [];
    const own = rows.filter(({ layer }) => layer === name);
    const edges = edgesOf(stack.slice(0, at + 1));
    return FITTED_QUANTITIES.flatMap((quantity) =>
      partsOf(own, edges).flatMap((part) => fitPart(quantity, name, part) ?? []),
    );
  });
}

/** K edges of the layers up to and with the detector, ascending. */
function edgesOf(stack: Setup['stack']): number[] {
  const edges = stack.flatMap(({ material }) =>
    (material?.constituents ?? [])
      .filter(({ massFraction }) => massFraction >= LEAST_MASS_FRACTION)
      .flatMap(({ z }) => relaxation(z).shells.filter(({ name }) => name === 'K'))
      .map(({ bindingKeV }) => bindingKeV),
  );
  return [...new Set(edges)].sort((a, b) => a - b);
}

/** Rows between one edge and the next, ascending in energy. */
function partsOf(rows: readonly CurveRow[], edges: readonly number[]): CurveRow[][] {
  const bounds = [0, ...edges, Infinity];
  return bounds
    .slice(1)
    .map((high, i) => rows.filter(({ energyKeV }) => energyKeV > bounds[i] && energyKeV <= high))
    .filter((part) => part.length > 0);
}

function fitPart(quantity: FittedQuantity, layer: string, rows: readonly CurveRow[]): CurveFit | null {
  const points = rows.flatMap(({ energyKeV, histories, [quantity]: { mean, stdError } }) =>
    // Where every history scores there is no spread; what is known is no better than one in all of them.
    mean === null || mean <= 0
      ? []
      : [{ energyKeV, mean, stdError: Math.max(stdError ?? 0, mean / histories) }],
  );
  const fit = fitLogPolynomial(points);
  if (fit === null) return null;
  const deviations = points.map(({ energyKeV, mean }) =>
    Math.abs(mean / efficiencyAt(fit, energyKeV).mean - 1),
  );
  return {
    quantity,
    layer,
    energyLowKeV: points[0].energyKeV,
    energyHighKeV: points[points.length - 1].energyKeV,
    points: points.length,
    ...fit,
    worstDeviation: Math.max(...deviations),
  };
}
