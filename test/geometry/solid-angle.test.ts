import { describe, expect, it } from 'vitest';
import { discSolidAngleSr } from '../../geometry/index.js';
import { carlsonRd, carlsonRf, completeK } from '../../geometry/elliptic-integrals.js';

describe('The elliptic integrals', () => {
  it.each([
    ['R_F(1, 2, 0)', carlsonRf(1, 2, 0), 1.3110287771461],
    ['R_F(2, 3, 4)', carlsonRf(2, 3, 4), 0.58408284167715],
    ['R_D(0, 2, 1)', carlsonRd(0, 2, 1), 1.7972103521034],
    ['R_D(2, 3, 4)', carlsonRd(2, 3, 4), 0.16510527294261],
    ['K(sin 30°)', completeK(0.75), 1.68575035481],
  ])('give the published value of %s', (_, got, published) => {
    // Carlson 1995, section 3; K: Abramowitz and Stegun, table 17.1. Values from memory.
    expect(Math.abs(got / published - 1)).toBeLessThan(1e-11);
  });
});

/** Solid angle of a disc by the sum over rings and azimuths of L dA / r³ (midpoint rule). */
function bySummation(radius: number, distance: number, offset: number): number {
  const rings = 1000;
  const turns = 500;
  let sum = 0;
  for (let i = 0; i < rings; i++) {
    const r = (radius * (i + 0.5)) / rings;
    for (let j = 0; j < turns; j++) {
      const azimuth = (Math.PI * (j + 0.5)) / turns;
      const squared = r * r + offset * offset - 2 * r * offset * Math.cos(azimuth) + distance * distance;
      sum += r / (squared * Math.sqrt(squared));
    }
  }
  return (2 * Math.PI * distance * radius * sum) / (rings * turns);
}

describe('The solid angle of a disc', () => {
  it.each([
    [1, 1],
    [3.81, 25],
    [1, 1e-3],
    [1, 1e4],
  ])('of radius %d seen from %d away on the axis is 2π(1 − cos)', (radius, distance) => {
    const tangent = radius / distance;
    const expected = 4 * Math.PI * Math.sin(Math.atan(tangent) / 2) ** 2;
    expect(Math.abs(discSolidAngleSr(radius, distance) / expected - 1)).toBeLessThan(1e-14);
  });

  // F. Paxton, Rev. Sci. Instrum. 30, 254 (1959), table I. Values from memory, to four decimals.
  it.each([
    [0.5, 0.2, 3.4184],
    [0.5, 1, 1.7687],
    [0.5, 2, 0.2324],
    [1, 0.4, 1.7089],
    [1, 1, 1.1227],
    [1, 1.6, 0.5437],
    [1.5, 0.6, 0.9301],
    [1.5, 1.2, 0.6472],
    [1.5, 2, 0.3217],
  ])(
    'of radius 1 seen from %d away and %d off the axis is that of Paxton’s table',
    (distance, offset, table) => {
      expect(Math.abs(discSolidAngleSr(1, distance, offset) - table)).toBeLessThan(5.1e-5);
    },
  );

  it.each([
    [1, 0.3, 0.7],
    [1, 1, 1],
    [3.81, 25, 10],
    [2, 1, 5],
  ])(
    'of radius %d seen from %d away and %d off the axis is the sum over its area',
    (radius, distance, offset) => {
      // Midpoint rule of 1000 × 500 parts: error about 1e-6 of the value.
      const sum = bySummation(radius, distance, offset);
      expect(Math.abs(discSolidAngleSr(radius, distance, offset) / sum - 1)).toBeLessThan(3e-6);
    },
  );

  it('goes over into the value on the axis', () => {
    expect(discSolidAngleSr(1, 2, 1e-7)).toBeCloseTo(discSolidAngleSr(1, 2), 12);
  });

  it.each([
    [0, 1, 0],
    [1, 0, 0],
    [1, 1, -1],
    [NaN, 1, 0],
  ])('is refused for radius %d, distance %d and offset %d', (radius, distance, offset) => {
    expect(() => discSolidAngleSr(radius, distance, offset)).toThrow(RangeError);
  });
});
