/**
 * Half- and tenth-value layers from a curve of dose behind a layer against its thickness. Between the middles of the
 * slices the curve is a straight line in ln dose; a mean over a slice is turned into the value at its middle as for an
 * exponential.
 */

/** One point of a curve. */
export interface CurvePoint {
  readonly thicknessCm: number;
  readonly dose: number;
  /** Relative standard error. */
  readonly relativeError: number;
}

/** A thickness with its standard error. */
export interface Thickness {
  readonly mean: number;
  readonly stdError: number;
}

/** Relative error above which a point says nothing about the slope. */
const USABLE_ERROR = 0.05;
/** The equilibrium value is taken over at most this factor of dose, at the deep end, and at least over that one. */
const EQUILIBRIUM_FACTOR = 10;
const LEAST_FACTOR = 2;

/**
 * The curve from means over slices of equal thickness.
 *
 * @param free dose at thickness 0; null where it is not known
 */
export function curveOf(
  sliceCm: number,
  means: readonly { readonly mean: number; readonly stdError: number }[],
  free: number | null,
): CurvePoint[] {
  const logs = means.map(({ mean }) => Math.log(mean));
  const points = means.map(({ mean, stdError }, i) => {
    const [a, b] = [Math.max(0, i - 1), Math.min(means.length - 1, i + 1)];
    const half = b > a ? (logs[a] - logs[b]) / (b - a) / 2 : 0;
    const bulge = Math.abs(half) < 1e-6 || !Number.isFinite(half) ? 1 : half / Math.sinh(half);
    return { thicknessCm: (i + 0.5) * sliceCm, dose: mean * bulge, relativeError: stdError / mean };
  });
  const start = free === null ? [] : [{ thicknessCm: 0, dose: free, relativeError: 0 }];
  return [...start, ...points.filter(({ dose }) => dose > 0)];
}

/** Thickness from which on the dose stays below `dose`; null where the curve does not fall to it, or begins below. */
export function thicknessFor(curve: readonly CurvePoint[], dose: number): Thickness | null {
  let i = curve.length - 1;
  while (i >= 0 && curve[i].dose < dose) i--;
  if (i < 0 || i === curve.length - 1) return null;
  const [above, below] = [curve[i], curve[i + 1]];
  const perCm = Math.log(above.dose / below.dose) / (below.thicknessCm - above.thicknessCm);
  const mean = above.thicknessCm + Math.log(above.dose / dose) / perCm;
  return { mean, stdError: Math.max(above.relativeError, below.relativeError) / perCm };
}

/** Difference of the thicknesses for two doses; errors are added as if independent, which is on the safe side. */
export function layerBetween(curve: readonly CurvePoint[], from: number, to: number): Thickness | null {
  const [first, second] = [thicknessFor(curve, from), thicknessFor(curve, to)];
  if (first === null || second === null) return null;
  return { mean: second.mean - first.mean, stdError: Math.hypot(first.stdError, second.stdError) };
}

/** Tenth-value layer at the deep end of the curve; null where it does not fall far enough there to tell. */
export function equilibriumTenth(curve: readonly CurvePoint[]): Thickness | null {
  const usable = curve.filter(({ relativeError }) => relativeError <= USABLE_ERROR);
  const last = usable.at(-1);
  if (!last) return null;
  const first = usable.find(({ dose }) => dose <= EQUILIBRIUM_FACTOR * last.dose);
  if (!first || first.dose < LEAST_FACTOR * last.dose) return null;
  const decades = Math.log10(first.dose / last.dose);
  const mean = (last.thicknessCm - first.thicknessCm) / decades;
  const error = Math.hypot(first.relativeError, last.relativeError) / Math.LN10;
  return { mean, stdError: (mean * error) / decades };
}
