/**
 * Exponential integrals E_n(x) = ∫₁^∞ e^(−x t) t^(−n) dt for n = 1, 2, 3 (Abramowitz and Stegun, ch. 5.1): what plane
 * sources of isotropic photons send through a thickness x.
 */

const EULER = 0.5772156649015329;
const PRECISION = 1e-16;

/** E_n(x) for n ≥ 1 and x ≥ 0; E₁(0) is Infinity. */
export function exponentialIntegral(n: number, x: number): number {
  if (x === 0) return n === 1 ? Infinity : 1 / (n - 1);
  if (x > 1) return byFraction(n, x);
  // E_{m+1} = (e^(−x) − x E_m)/m, stable for small x
  let value = firstBySeries(x);
  for (let m = 1; m < n; m++) value = (Math.exp(-x) - x * value) / m;
  return value;
}

/** E₁(x) = −γ − ln x − Σ (−x)^k/(k k!). */
function firstBySeries(x: number): number {
  let sum = -EULER - Math.log(x);
  let term = 1;
  for (let k = 1; k < 40; k++) {
    term *= -x / k;
    sum -= term / k;
    if (Math.abs(term) < PRECISION) break;
  }
  return sum;
}

/** The continued fraction e^(−x)/(x + n − 1 n/(x + n + 2 − 2 (n + 1)/(x + n + 4 − …))) by Lentz's method. */
function byFraction(n: number, x: number): number {
  let b = x + n;
  let c = 1 / Number.MIN_VALUE ** 0.5;
  let d = 1 / b;
  let h = d;
  for (let i = 1; i < 200; i++) {
    const a = -i * (n - 1 + i);
    b += 2;
    d = 1 / (a * d + b);
    c = b + a / c;
    const factor = c * d;
    h *= factor;
    if (Math.abs(factor - 1) < PRECISION) break;
  }
  return h * Math.exp(-x);
}
