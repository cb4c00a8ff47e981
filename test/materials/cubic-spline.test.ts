import { describe, expect, it } from 'vitest';
import {
  naturalSpline,
  polynomialAt,
  straightLines,
  type PiecewiseCubic,
} from '../../materials/cubic-spline.js';

const x = Float64Array.of(0, 0.5, 1.7, 2, 4);

function value(curve: PiecewiseCubic, u: number): number {
  const out = new Float64Array(4);
  polynomialAt(curve, u, out, 0);
  return out[0];
}

describe('naturalSpline', () => {
  it('passes through its points', () => {
    const y = x.map((u) => Math.sin(u) + u * u);
    const curve = naturalSpline(x, y);
    x.forEach((u, i) => expect(value(curve, u)).toBeCloseTo(y[i], 12));
  });

  it('has continuous slope and curvature at its points, and no curvature at the ends', () => {
    const curve = naturalSpline(x, x.map(Math.exp));
    const [before, after] = [new Float64Array(4), new Float64Array(4)];
    for (const u of [0.5, 1.7, 2]) {
      polynomialAt(curve, u - 1e-9, before, 0);
      polynomialAt(curve, u, after, 0);
      for (const power of [0, 1, 2]) expect(after[power]).toBeCloseTo(before[power], 6);
    }
    polynomialAt(curve, 0, after, 0);
    expect(after[2]).toBe(0);
    polynomialAt(curve, 4, after, 0);
    expect(after[2]).toBeCloseTo(0, 10);
  });

  it('reproduces a straight line, also through two points alone', () => {
    const line = (u: number) => 3 - 2 * u;
    expect(value(naturalSpline(x, x.map(line)), 3.3)).toBeCloseTo(line(3.3), 12);
    expect(value(naturalSpline(Float64Array.of(1, 2), Float64Array.of(1, -1)), 1.25)).toBeCloseTo(0.5, 12);
  });

  it('solves the textbook case of three points', () => {
    // Natural spline through (0, 0), (1, 1), (2, 0): second derivative −3 in the middle, value 11/16 at 1/2 by
    // the closed form of one unknown, 4 M = 6 (0 − 2 + 0).
    const curve = naturalSpline(Float64Array.of(0, 1, 2), Float64Array.of(0, 1, 0));
    expect(value(curve, 0.5)).toBeCloseTo(11 / 16, 12);
  });
});

describe('polynomialAt', () => {
  it('moves the polynomial to another origin without changing the curve', () => {
    const curve = naturalSpline(x, x.map(Math.cos));
    const out = new Float64Array(6);
    polynomialAt(curve, 0.9, out, 2);
    const moved = ((out[5] * 0.3 + out[4]) * 0.3 + out[3]) * 0.3 + out[2];
    expect(moved).toBeCloseTo(value(curve, 1.2), 12);
  });

  it('goes on as a straight line below the first point', () => {
    const curve = naturalSpline(x, x.map(Math.exp));
    expect(value(curve, -2) - value(curve, -1)).toBeCloseTo(value(curve, -1) - value(curve, 0), 12);
  });
});

describe('straightLines', () => {
  it('joins the points by straight lines', () => {
    const curve = straightLines(Float64Array.of(0, 1, 3), Float64Array.of(5, 7, 1));
    expect([0, 0.5, 1, 2].map((u) => value(curve, u))).toEqual([5, 6, 7, 4]);
  });
});
