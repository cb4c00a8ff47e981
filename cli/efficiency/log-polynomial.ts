/**
 * Efficiencies as polynomials of logarithms, the usual form: ln ε = Σ a_k (ln(E / 1 MeV))^k. The degree is the one of
 * least AICc (Hurvich & Tsai, Biometrika 76 (1989) 297): the residuals decide, and coefficients that explain nothing
 * are not paid for.
 */
import { leastSquares } from '../response/least-squares.js';
import { HIGHEST_DEGREE } from './curve-rows.js';

/** Energies are in units of it inside the polynomial, which keeps its coefficients small. */
export const UNIT_KEV = 1000;

export interface LogPolynomial {
  /** a_0, a_1, … */
  readonly coefficients: readonly number[];
  /**
   * Covariance of the coefficients from the errors of the points; where these are exceeded by the scatter about the
   * polynomial, enlarged by χ² over degrees of freedom (R. T. Birge, Phys. Rev. 40 (1932) 207).
   */
  readonly covariance: readonly (readonly number[])[];
  readonly chiSquare: number;
  readonly degreesOfFreedom: number;
}

export interface CurvePoint {
  readonly energyKeV: number;
  /** Above 0. */
  readonly mean: number;
  /** Above 0. */
  readonly stdError: number;
}

/** The polynomial of the best degree; null for fewer than 3 points, of which nothing is left to judge by. */
export function fitLogPolynomial(
  points: readonly CurvePoint[],
  highest = HIGHEST_DEGREE,
): LogPolynomial | null {
  // AICc needs two points more than coefficients.
  const degrees = Math.min(highest, points.length - 3);
  const fits = Array.from({ length: Math.max(0, degrees + 1) }, (_, degree) => fitDegree(points, degree));
  const scores = fits.map((fit) => correctedCriterion(fit, points.length));
  return fits[scores.indexOf(Math.min(...scores))] ?? null;
}

/** The polynomial of one degree. */
export function fitDegree(points: readonly CurvePoint[], degree: number): LogPolynomial {
  const { coefficients, covariance, chiSquare } = leastSquares(
    points.map(({ energyKeV }) => powersOf(energyKeV, degree)),
    points.map(({ mean }) => Math.log(mean)),
    points.map(({ mean, stdError }) => stdError / mean),
  );
  const degreesOfFreedom = points.length - degree - 1;
  const excess = degreesOfFreedom > 0 ? Math.max(1, chiSquare / degreesOfFreedom) : 1;
  return {
    coefficients,
    covariance: covariance.map((row) => row.map((value) => value * excess)),
    chiSquare,
    degreesOfFreedom,
  };
}

/** AICc for normal errors that are known. */
function correctedCriterion({ coefficients, chiSquare }: LogPolynomial, points: number): number {
  const k = coefficients.length;
  return chiSquare + 2 * k + (2 * k * (k + 1)) / (points - k - 1);
}

function powersOf(energyKeV: number, degree: number): number[] {
  const x = Math.log(energyKeV / UNIT_KEV);
  return Array.from({ length: degree + 1 }, (_, k) => x ** k);
}

/** Efficiency at an energy, with the standard error that the covariance gives it. */
export function efficiencyAt(
  { coefficients, covariance }: Pick<LogPolynomial, 'coefficients' | 'covariance'>,
  energyKeV: number,
): { mean: number; stdError: number } {
  const powers = powersOf(energyKeV, coefficients.length - 1);
  const mean = Math.exp(powers.reduce((sum, power, k) => sum + coefficients[k] * power, 0));
  const variance = powers.reduce(
    (sum, power, k) => sum + powers.reduce((inner, other, l) => inner + power * covariance[k][l] * other, 0),
    0,
  );
  return { mean, stdError: mean * Math.sqrt(Math.max(0, variance)) };
}
