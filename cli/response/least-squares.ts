/** Linear least squares with known errors, by QR decomposition. */
import { inverse, Matrix, QrDecomposition } from 'ml-matrix';

export interface Fit {
  readonly coefficients: readonly number[];
  /** Covariance of the coefficients that follows from the errors given. */
  readonly covariance: readonly (readonly number[])[];
  readonly chiSquare: number;
}

/**
 * Fits y = Σ c_k f_k to points with standard errors.
 *
 * @param functions values of the functions f_k at each point
 */
export function leastSquares(
  functions: readonly (readonly number[])[],
  y: readonly number[],
  stdError: readonly number[],
): Fit {
  const design = new Matrix(functions.map((row, i) => row.map((value) => value / stdError[i])));
  const scaled = y.map((value, i) => value / stdError[i]);
  // Columns of equal length keep the condition number near its least.
  const lengths = design
    .transpose()
    .to2DArray()
    .map((column) => Math.hypot(...column));
  lengths.forEach((length, k) => design.mulColumn(k, 1 / length));
  const decomposition = new QrDecomposition(design);
  const solution = decomposition.solve(Matrix.columnVector(scaled)).to1DArray();
  const inverseR = inverse(decomposition.upperTriangularMatrix);
  const covariance = inverseR.mmul(inverseR.transpose()).to2DArray();
  const residuals = design.mmul(Matrix.columnVector(solution)).to1DArray();
  return {
    coefficients: solution.map((value, k) => value / lengths[k]),
    covariance: covariance.map((row, k) => row.map((value, l) => value / (lengths[k] * lengths[l]))),
    chiSquare: residuals.reduce((sum, value, i) => sum + (scaled[i] - value) ** 2, 0),
  };
}
