/** Natural cubic splines as polynomial coefficients per interval, for tables that are read very often. */

/**
 * Writes the coefficients of the natural cubic spline through (x, y) into `out`: interval i (from x[i] to
 * x[i + 1]) is ((c3 t + c2) t + c1) t + c0 with t = u − x[i], c0 at `out[offset + i * stride]` and c1, c2, c3
 * after it. Two points give a straight line.
 *
 * @param x strictly ascending abscissas, at least two
 * @param y ordinates, as many
 */
export function naturalSpline(
  x: ArrayLike<number>,
  y: ArrayLike<number>,
  out: Float64Array,
  offset: number,
  stride: number,
): void {
  const second = naturalSecondDerivatives(x, y);
  for (let i = 0; i < x.length - 1; i++) {
    const h = x[i + 1] - x[i];
    const at = offset + i * stride;
    out[at] = y[i];
    out[at + 1] = (y[i + 1] - y[i]) / h - (h / 6) * (2 * second[i] + second[i + 1]);
    out[at + 2] = second[i] / 2;
    out[at + 3] = (second[i + 1] - second[i]) / (6 * h);
  }
}

/** Second derivatives at the points, 0 at both ends: the tridiagonal system, solved by elimination. */
function naturalSecondDerivatives(x: ArrayLike<number>, y: ArrayLike<number>): Float64Array {
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

/** The same layout as {@link naturalSpline} with straight lines between the points. */
export function straightLines(
  x: ArrayLike<number>,
  y: ArrayLike<number>,
  out: Float64Array,
  offset: number,
  stride: number,
): void {
  for (let i = 0; i < x.length - 1; i++) {
    const at = offset + i * stride;
    out[at] = y[i];
    out[at + 1] = (y[i + 1] - y[i]) / (x[i + 1] - x[i]);
    out[at + 2] = 0;
    out[at + 3] = 0;
  }
}
