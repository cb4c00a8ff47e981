// Cubic spline through (x, y): slope 0 or natural (second derivative 0) at the low end, natural at the high end.
export function cubicSpline(x, y, { flatStart = false } = {}) {
  const n = x.length;
  const second = new Float64Array(n);
  const work = new Float64Array(n);
  if (flatStart) {
    second[0] = -0.5;
    work[0] = (3 / (x[1] - x[0])) * ((y[1] - y[0]) / (x[1] - x[0]));
  }
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
