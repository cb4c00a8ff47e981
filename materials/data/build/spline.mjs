// Natural cubic spline through (x, y).
export function cubicSpline(x, y) {
  const n = x.length;
  const second = new Float64Array(n);
  const work = new Float64Array(n);
  for (let i = 1; i < n - 1; i++) {
    const ratio = (x[i] - x[i - 1]) / (x[i + 1] - x[i - 1]);
    const p = ratio * second[i - 1] + 2;
    second[i] = (ratio - 1) / p;
    const slopes = (y[i + 1] - y[i]) / (x[i + 1] - x[i]) - (y[i] - y[i - 1]) / (x[i] - x[i - 1]);
    work[i] = ((6 * slopes) / (x[i + 1] - x[i - 1]) - ratio * work[i - 1]) / p;
  }
  for (let i = n - 2; i >= 0; i--) second[i] = second[i] * second[i + 1] + work[i];
  return (at) => {
    let low = 0;
    let high = n - 1;
    while (high - low > 1) {
      const middle = (low + high) >> 1;
      if (x[middle] > at) high = middle;
      else low = middle;
    }
    const h = x[high] - x[low];
    const a = (x[high] - at) / h;
    const b = (at - x[low]) / h;
    const bend = ((a ** 3 - a) * second[low] + (b ** 3 - b) * second[high]) * (h * h);
    return a * y[low] + b * y[high] + bend / 6;
  };
}

// Cubic Hermite curve through (x, y) that never overshoots (Fritsch & Carlson, SIAM J. Numer. Anal. 17 (1980) 238;
// slopes by the weighted harmonic mean of Fritsch & Butland); slope 0 at the low end, a straight line's at the high.
export function monotoneCubic(x, y) {
  const n = x.length;
  const slope = new Float64Array(n);
  const secant = (i) => (y[i + 1] - y[i]) / (x[i + 1] - x[i]);
  for (let i = 1; i < n - 1; i++) {
    const [before, after] = [secant(i - 1), secant(i)];
    if (before * after <= 0) continue;
    const [left, right] = [x[i] - x[i - 1], x[i + 1] - x[i]];
    const [w1, w2] = [2 * right + left, right + 2 * left];
    slope[i] = (w1 + w2) / (w1 / before + w2 / after);
  }
  slope[n - 1] = secant(n - 2);
  return (at) => {
    let i = 0;
    while (i < n - 2 && x[i + 1] <= at) i++;
    const h = x[i + 1] - x[i];
    const t = (at - x[i]) / h;
    return (
      (1 + 2 * t) * (1 - t) ** 2 * y[i] +
      t * (1 - t) ** 2 * h * slope[i] +
      t ** 2 * (3 - 2 * t) * y[i + 1] +
      t ** 2 * (t - 1) * h * slope[i + 1]
    );
  };
}
