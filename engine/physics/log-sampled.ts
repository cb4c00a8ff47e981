/** A smooth positive function of x sampled once on an even grid of ln x, for builders that ask for it very often. */
export function logSampled(
  f: (x: number) => number,
  low: number,
  high: number,
  nodes: number,
): (x: number) => number {
  const start = Math.log(low);
  const step = (Math.log(high) - start) / (nodes - 1);
  const values = Float64Array.from({ length: nodes }, (_, i) => f(Math.exp(start + i * step)));
  return (x) => {
    if (x <= low) return f(x);
    const steps = (Math.log(x) - start) / step;
    const i = Math.min(nodes - 2, Math.floor(steps));
    return values[i] + Math.min(1, steps - i) * (values[i + 1] - values[i]);
  };
}
