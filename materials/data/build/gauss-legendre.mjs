// Nodes and weights of Gauss-Legendre integration on [-1, 1], by Newton's method on the polynomial.
export function gaussLegendre(order) {
  const x = new Float64Array(order);
  const w = new Float64Array(order);
  for (let i = 0; i < order; i++) {
    let root = Math.cos((Math.PI * (order - i - 0.25)) / (order + 0.5));
    let slope = 0;
    for (let step = 0; step < 100; step++) {
      let [before, value] = [1, root];
      for (let n = 2; n <= order; n++)
        [before, value] = [value, ((2 * n - 1) * root * value - (n - 1) * before) / n];
      slope = (order * (root * value - before)) / (root * root - 1);
      const move = value / slope;
      root -= move;
      if (Math.abs(move) < 1e-15) break;
    }
    x[i] = root;
    w[i] = 2 / ((1 - root * root) * slope * slope);
  }
  return { x, w };
}
