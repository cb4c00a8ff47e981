/**
 * Carlson's symmetric elliptic integrals by duplication (B. C. Carlson, "Numerical computation of real or complex
 * elliptic integrals", Numerical Algorithms 10, 1995), and what solid angles need of Legendre's.
 */

/** Spread of the arguments at which the series take over: their error is of its sixth power. */
const SPREAD = 1e-3;

/** R_F(x, y, z) = ½ ∫₀^∞ dt / √((t + x)(t + y)(t + z)); at most one argument 0, none negative. */
export function carlsonRf(x: number, y: number, z: number): number {
  for (;;) {
    const mean = (x + y + z) / 3;
    const dx = 1 - x / mean;
    const dy = 1 - y / mean;
    const dz = -dx - dy;
    if (Math.max(Math.abs(dx), Math.abs(dy), Math.abs(dz)) < SPREAD) {
      const e2 = dx * dy - dz * dz;
      const e3 = dx * dy * dz;
      return (1 - e2 / 10 + e3 / 14 + (e2 * e2) / 24 - (3 * e2 * e3) / 44) / Math.sqrt(mean);
    }
    const lambda = Math.sqrt(x * y) + Math.sqrt(x * z) + Math.sqrt(y * z);
    x = (x + lambda) / 4;
    y = (y + lambda) / 4;
    z = (z + lambda) / 4;
  }
}

/** R_D(x, y, z) = 3/2 ∫₀^∞ dt / (√((t + x)(t + y)) (t + z)^(3/2)); z above 0. */
export function carlsonRd(x: number, y: number, z: number): number {
  let sum = 0;
  let factor = 1;
  for (;;) {
    const mean = (x + y + 3 * z) / 5;
    const dx = 1 - x / mean;
    const dy = 1 - y / mean;
    const dz = -(dx + dy) / 3;
    if (Math.max(Math.abs(dx), Math.abs(dy), Math.abs(dz)) < SPREAD) {
      const e2 = dx * dy - 6 * dz * dz;
      const e3 = (3 * dx * dy - 8 * dz * dz) * dz;
      const e4 = 3 * (dx * dy - dz * dz) * dz * dz;
      const e5 = dx * dy * dz * dz * dz;
      const series =
        1 - (3 * e2) / 14 + e3 / 6 + (9 * e2 * e2) / 88 - (3 * e4) / 22 - (9 * e2 * e3) / 52 + (3 * e5) / 26;
      return 3 * sum + (factor * series) / (mean * Math.sqrt(mean));
    }
    const lambda = Math.sqrt(x * y) + Math.sqrt(x * z) + Math.sqrt(y * z);
    sum += factor / (Math.sqrt(z) * (z + lambda));
    factor /= 4;
    x = (x + lambda) / 4;
    y = (y + lambda) / 4;
    z = (z + lambda) / 4;
  }
}

/** Complete integral K by its squared complementary modulus 1 − k². */
export function completeK(complement: number): number {
  return carlsonRf(0, complement, 1);
}

/**
 * Heuman's lambda function Λ₀(ξ, k) = (2/π) (E(k) F(ξ, k') + K(k) (E(ξ, k') − F(ξ, k'))).
 *
 * @param sine sin ξ
 * @param cosine cos ξ
 * @param complement k'² = 1 − k²
 */
export function heumanLambda(sine: number, cosine: number, complement: number): number {
  const k = completeK(complement);
  const e = k - ((1 - complement) / 3) * carlsonRd(0, complement, 1);
  const delta = 1 - complement * sine * sine;
  const f = sine * carlsonRf(cosine * cosine, delta, 1);
  const eMinusF = -(complement / 3) * sine ** 3 * carlsonRd(cosine * cosine, delta, 1);
  return (2 / Math.PI) * (e * f + k * eMinusF);
}
