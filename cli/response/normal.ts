/**
 * The normal law. The complementary error function is W. J. Cody's rational Chebyshev approximation ("Rational
 * Chebyshev approximations for the error function", Math. Comp. 23 (1969) 631–637), good to about 1e-16 relative.
 */

const A = [3.1611237438705655, 113.86415415105016, 377.485237685302, 3209.3775891384694, 0.18577770618460315];
const B = [23.601290952344122, 244.02463793444417, 1282.6165260773723, 2844.236833439171];
const C = [
  0.5641884969886701, 8.883149794388377, 66.11919063714163, 298.6351381974001, 881.952221241769,
  1712.0476126340707, 2051.0783778260716, 1230.3393547979972, 2.1531153547440383e-8,
];
const D = [
  15.744926110709835, 117.6939508913125, 537.1811018620099, 1621.3895745666903, 3290.7992357334597,
  4362.619090143247, 3439.3676741437216, 1230.3393548037495,
];
const P = [
  0.30532663496123236, 0.36034489994980445, 0.12578172611122926, 0.016083785148742275, 0.0006587491615298378,
  0.016315387137302097,
];
const Q = [
  2.568520192289822, 1.8729528499234673, 0.5279051029514285, 0.06051834131244132, 0.0023352049762686918,
];
const INVERSE_ROOT_PI = 0.5641895835477563;

/** Ratio of two polynomials of one degree in Cody's order: the leading coefficient of the numerator stands last. */
function ratio(numerator: readonly number[], denominator: readonly number[], x: number): number {
  const last = numerator.length - 2;
  let top = numerator[last + 1] * x;
  let bottom = x;
  for (let i = 0; i < last; i++) {
    top = (top + numerator[i]) * x;
    bottom = (bottom + denominator[i]) * x;
  }
  return (top + numerator[last]) / (bottom + denominator[last]);
}

/** erfc(x) = 2/√π ∫ exp(−t²) dt from x to infinity. */
export function complementaryError(x: number): number {
  const y = Math.abs(x);
  if (y <= 0.46875) return 1 - x * ratio(A, B, y * y);
  let tail = 0;
  if (y <= 4) {
    tail = ratio(C, D, y);
  } else if (y < 27) {
    const z = 1 / (y * y);
    tail = (INVERSE_ROOT_PI - z * ratio(P, Q, z)) / y;
  }
  // exp(−y²) from two factors, for y² alone has lost the digits that matter.
  const rough = Math.trunc(y * 16) / 16;
  tail *= Math.exp(-rough * rough) * Math.exp(-(y - rough) * (y + rough));
  return x < 0 ? 2 - tail : tail;
}

const ROOT_HALF = Math.SQRT1_2;
const INVERSE_ROOT_TWO_PI = 0.3989422804014327;

/** Probability of a standard normal variable below z. */
export function normalBelow(z: number): number {
  return 0.5 * complementaryError(-z * ROOT_HALF);
}

/** Integral of {@link normalBelow} from −infinity to z: the mean of (z − variable) where that is above 0. */
export function normalBelowIntegral(z: number): number {
  return z * normalBelow(z) + INVERSE_ROOT_TWO_PI * Math.exp(-0.5 * z * z);
}
