/** Piecewise cubic curves through tabulated points, as polynomials that can be moved to other intervals. */

/** Interval i starts at x[i]; there the value is ((c3 t + c2) t + c1) t + c0, t = u − x[i], c at [4 i … 4 i + 3]. */
export interface PiecewiseCubic {
  readonly x: Float64Array;
  readonly coefficients: Float64Array;
}

/**
 * The natural cubic spline (second derivative 0 at both ends) through the points; two points give a line.
 *
 * @param x strictly ascending, at least two
 */
export function naturalSpline(x: Float64Array, y: Float64Array): PiecewiseCubic {
  const second = naturalSecondDerivatives(x, y);
  const coefficients = new Float64Array(4 * (x.length - 1));
  for (let i = 0; i < x.length - 1; i++) {
    const h = x[i + 1] - x[i];
    coefficients[4 * i] = y[i];
    coefficients[4 * i + 1] = (y[i + 1] - y[i]) / h - (h / 6) * (2 * second[i] + second[i + 1]);
    coefficients[4 * i + 2] = second[i] / 2;
    coefficients[4 * i + 3] = (second[i + 1] - second[i]) / (6 * h);
  }
  return { x, coefficients };
}

/** Second derivatives at the points: the tridiagonal system of continuous slopes, solved by elimination. */
function naturalSecondDerivatives(x: Float64Array, y: Float64Array): Float64Array {
  const last = x.length - 1;
  const second = new Float64Array(x.length);
  const upper = new Float64Array(x.length);
  for (let i = 1; i < last; i++) {
    const before = x[i] - x[i - 1];
    const after = x[i + 1] - x[i];
    const jump = (y[i + 1] - y[i]) / after - (y[i] - y[i - 1]) / before;
    const pivot = 2 * (before + after) - before * upper[i - 1];
    upper[i] = after / pivot;
    second[i] = (6 * jump - before * second[i - 1]) / pivot;
  }
  for (let i = last - 1; i > 0; i--) second[i] -= upper[i] * second[i + 1];
  return second;
}

/** Straight lines between the points. */
export function straightLines(x: Float64Array, y: Float64Array): PiecewiseCubic {
  const coefficients = new Float64Array(4 * (x.length - 1));
  for (let i = 0; i < x.length - 1; i++) {
    coefficients[4 * i] = y[i];
    coefficients[4 * i + 1] = (y[i + 1] - y[i]) / (x[i + 1] - x[i]);
  }
  return { x, coefficients };
}

/**
 * Writes to out[at … at + 3] the polynomial of the curve around u in powers of (its argument − u): that of the
 * interval u lies in. Below the first point the curve goes on as a straight line.
 */
export function polynomialAt(curve: PiecewiseCubic, u: number, out: Float64Array, at: number): void {
  const { x, coefficients } = curve;
  let interval = x.length - 2;
  while (interval > 0 && x[interval] > u) interval--;
  const [c0, c1, c2, c3] = coefficients.subarray(4 * interval, 4 * interval + 4);
  const d = u - x[interval];
  const cubic = d >= 0;
  out[at] = cubic ? ((c3 * d + c2) * d + c1) * d + c0 : c1 * d + c0;
  out[at + 1] = cubic ? (3 * c3 * d + 2 * c2) * d + c1 : c1;
  out[at + 2] = cubic ? 3 * c3 * d + c2 : 0;
  out[at + 3] = cubic ? c3 : 0;
}
