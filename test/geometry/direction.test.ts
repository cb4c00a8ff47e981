import { describe, expect, it } from 'vitest';
import { RAY_LENGTH, U, V, W, pointAlongAxis, turn } from '../../geometry/index.js';
import { uniforms } from './uniform.js';

const DIRECTIONS = [
  [0, 0, 1],
  [0, 0, -1],
  [1, 0, 0],
  [0, -1, 0],
  [1e-9, 0, Math.sqrt(1 - 1e-18)],
  [1e-9, -1e-9, -1],
  [0.6, 0, -0.8],
  [1 / Math.sqrt(3), -1 / Math.sqrt(3), 1 / Math.sqrt(3)],
];

function rayAlong([u, v, w]: number[]): Float64Array {
  const ray = new Float64Array(RAY_LENGTH);
  ray.set([u, v, w], U);
  return ray;
}

const dot = (a: ArrayLike<number>, b: ArrayLike<number>) => a[U] * b[U] + a[V] * b[V] + a[W] * b[W];

describe('A turned direction', () => {
  it.each(DIRECTIONS.map((direction) => ({ direction })))(
    'has the angle asked for to $direction and length 1',
    ({ direction }) => {
      const old = rayAlong(direction);
      for (const v of [0, 1e-12, 0.001, 0.25, 0.5, 0.9, 1]) {
        for (let azimuth = 0; azimuth < 1; azimuth += 0.037) {
          const ray = rayAlong(direction);
          turn(ray, v, azimuth);
          // The tables of the azimuth are good to 5e-9 in angle, and it is the azimuth alone that they spoil.
          expect(Math.abs(dot(ray, old) - (1 - 2 * v))).toBeLessThan(1e-10);
          expect(Math.abs(dot(ray, ray) - 1)).toBeLessThan(1e-10);
        }
      }
    },
  );

  it('goes right round with its azimuth', () => {
    // For the axis itself the azimuth is that of the plane of x and y, up to sense and start.
    const at = (azimuth: number) => {
      const ray = new Float64Array(RAY_LENGTH);
      pointAlongAxis(ray);
      turn(ray, 0.5, azimuth);
      return Math.atan2(ray[V], ray[U]);
    };
    for (let azimuth = 0; azimuth < 0.99; azimuth += 0.0101) {
      const step = (at(azimuth + 0.01) - at(azimuth) + 4 * Math.PI) % (2 * Math.PI);
      expect(Math.abs(step - 0.02 * Math.PI)).toBeLessThan(2e-8);
    }
  });

  it('keeps its length through a million turns', () => {
    const next = uniforms('drift');
    const ray = rayAlong([0, 0.6, 0.8]);
    let worst = 0;
    for (let i = 0; i < 1e6; i++) {
      turn(ray, i % 3 === 0 ? 1e-6 * next() : next(), next());
      worst = Math.max(worst, Math.abs(dot(ray, ray) - 1));
    }
    expect(worst).toBeLessThan(1e-10);
  });

  it('is isotropic when v and azimuth are uniform', () => {
    const next = uniforms('isotropy');
    const samples = 300_000;
    const sum = new Float64Array(3);
    const squares = new Float64Array(3);
    const products = new Float64Array(3);
    for (let i = 0; i < samples; i++) {
      const ray = rayAlong([0.48, -0.6, 0.64]);
      turn(ray, next(), next());
      for (let k = 0; k < 3; k++) {
        sum[k] += ray[U + k];
        squares[k] += ray[U + k] ** 2;
        products[k] += ray[U + k] * ray[U + ((k + 1) % 3)];
      }
    }
    // Moments of the uniform sphere: ⟨u⟩ = 0 ± √(1/3), ⟨u²⟩ = 1/3 ± √(4/45), ⟨u v⟩ = 0 ± √(1/15). 4.5 σ for nine
    // figures: false alarm 6e-5.
    const limit = (sigma: number) => (4.5 * sigma) / Math.sqrt(samples);
    for (let k = 0; k < 3; k++) {
      expect(Math.abs(sum[k] / samples)).toBeLessThan(limit(Math.sqrt(1 / 3)));
      expect(Math.abs(squares[k] / samples - 1 / 3)).toBeLessThan(limit(Math.sqrt(4 / 45)));
      expect(Math.abs(products[k] / samples)).toBeLessThan(limit(Math.sqrt(1 / 15)));
    }
  });
});
