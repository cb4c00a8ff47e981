/** An efficiency curve as it stands in the object that `--json` prints. */
import type { StoredResult } from '../result/stored-result.js';
import { CURVE_QUANTITIES } from './curve-rows.js';

/** `efficiency`: the rows of efficiency.arrow; `efficiency_fits`: the fitted polynomials. */
export function curveJson({ rows, fits }: NonNullable<StoredResult['efficiency']>): Record<string, unknown> {
  return {
    efficiency: rows.map((row) => ({
      energy_keV: row.energyKeV,
      layer: row.layer,
      histories: row.histories,
      ...Object.fromEntries(
        CURVE_QUANTITIES.flatMap((quantity) => [
          [quantity, row[quantity].mean],
          [`${quantity}_std_error`, row[quantity].stdError],
        ]),
      ),
    })),
    efficiency_fits: fits.map((fit) => ({
      quantity: fit.quantity,
      layer: fit.layer,
      form: 'ln(efficiency) = sum of coefficients[k] * ln(E / 1 MeV)^k',
      energy_low_keV: fit.energyLowKeV,
      energy_high_keV: fit.energyHighKeV,
      points: fit.points,
      degree: fit.coefficients.length - 1,
      coefficients: fit.coefficients,
      covariance: fit.covariance,
      chi_square: fit.chiSquare,
      degrees_of_freedom: fit.degreesOfFreedom,
      worst_deviation: fit.worstDeviation,
    })),
  };
}
