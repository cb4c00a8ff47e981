/** Exponential integrals E_n(x) = ∫₁^∞ exp(−x t) t⁻ⁿ dt (Abramowitz and Stegun 1964, ch. 5). */

const EULER = 0.5772156649015329;

/** E_n for n = 1, 2, 3 … and x > 0: E₁ by 5.1.11 or 5.1.22, the others by the recurrence 5.1.14. */
export function exponentialIntegral(n: number, x: number): number {
  let value = x < 1.5 ? series(x) : continuedFraction(x);
  for (let order = 1; order < n; order++) value = (Math.exp(-x) - x * value) / order;
  return value;
}

function series(x: number): number {
  let sum = -EULER - Math.log(x);
  let term = 1;
  for (let i = 1; i < 60; i++) {
    term *= -x / i;
    sum -= term / i;
  }
  return sum;
}

function continuedFraction(x: number): number {
  let tail = 0;
  for (let i = 200; i >= 1; i--) tail = i / (1 + i / (x + tail));
  return Math.exp(-x) / (x + tail);
}
