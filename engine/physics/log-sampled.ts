/** Smooth positive functions of x sampled once on an even grid of ln x, for builders that ask for them very often. */

export interface LogGrid {
  readonly low: number;
  readonly high: number;
  readonly nodes: number;
}

/** The values of a function at the nodes of a grid. */
export function logSamples(f: (x: number) => number, { low, high, nodes }: LogGrid): Float64Array {
  const step = Math.log(high / low) / (nodes - 1);
  return Float64Array.from({ length: nodes }, (_, i) => f(low * Math.exp(i * step)));
}

/** Place of x on a grid, in steps from its low end; below the low end as −x/low, so that a square law can go on. */
export function logPlace({ low, high, nodes }: LogGrid, x: number): number {
  if (x < low) return -x / low;
  return Math.min(nodes - 1, (Math.log(x / low) / Math.log(high / low)) * (nodes - 1));
}

/** Value at a place: straight between nodes; below the low end the square law of a function that starts from 0. */
export function valueAtPlace(values: Float64Array, place: number): number {
  if (place < 0) return values[0] * place * place;
  const i = Math.min(values.length - 2, Math.floor(place));
  return values[i] + (place - i) * (values[i + 1] - values[i]);
}

/** The sampled function itself; below the grid the original is asked. */
export function logSampled(f: (x: number) => number, grid: LogGrid): (x: number) => number {
  const values = logSamples(f, grid);
  return (x) => (x <= grid.low ? f(x) : valueAtPlace(values, logPlace(grid, x)));
}
