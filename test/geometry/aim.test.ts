import { describe, expect, it } from 'vitest';
import {
  AIM_ACROSS,
  AIM_ALONG,
  AIM_LENGTH,
  AIM_OPENNESS,
  aimAt,
  discSolidAngleSr,
  makeSolidStack,
  rimsOf,
  type SolidLayer,
} from '../../geometry/index.js';
import { uniforms } from './uniform.js';

const disc = (thicknessCm: number, radiusCm: number): SolidLayer => ({
  thicknessCm,
  edge: { kind: 'radius', radiusCm },
});

function aimOf(layers: readonly SolidLayer[], distanceCm: number, offsetCm: number): Float64Array {
  const aim = new Float64Array(AIM_LENGTH);
  aimAt(rimsOf(makeSolidStack(layers)), distanceCm, offsetCm, aim);
  return aim;
}

/** Largest 1 − cos between the axis of the aim and points all over the faces of all layers. */
function widest(
  layers: readonly SolidLayer[],
  distanceCm: number,
  offsetCm: number,
  aim: Float64Array,
): number {
  let widest = 0;
  let z = 0;
  for (const { thicknessCm, edge } of layers) {
    for (const depth of [z, z + thicknessCm]) {
      for (let i = 0; i < 720; i++) {
        const azimuth = (i * Math.PI) / 360;
        let x = Math.cos(azimuth);
        let y = Math.sin(azimuth);
        if (edge.kind === 'radius') {
          x *= edge.radiusCm;
          y *= edge.radiusCm;
        } else if (edge.kind === 'rectangle') {
          const scale = Math.min(edge.widthCm / 2 / Math.abs(x), edge.heightCm / 2 / Math.abs(y));
          x *= scale;
          y *= scale;
        }
        const [dx, dz] = [x - offsetCm, depth + distanceCm];
        const cosine = (aim[AIM_ACROSS] * dx + aim[AIM_ALONG] * dz) / Math.hypot(dx, y, dz);
        widest = Math.max(widest, 1 - cosine);
      }
    }
    z += thicknessCm;
  }
  return widest;
}

describe('The cone from a source point', () => {
  it('is the solid angle of the front face for a point on the axis of a disc', () => {
    const aim = aimOf([disc(7.62, 3.81)], 25, 0);
    expect(aim[AIM_ALONG]).toBe(1);
    expect(Math.abs((2 * Math.PI * aim[AIM_OPENNESS]) / discSolidAngleSr(3.81, 25) - 1)).toBeLessThan(1e-11);
  });

  it('holds every point of a hundred stacks made up at random, and no more than its widest point needs', () => {
    const next = uniforms('cones');
    for (let i = 0; i < 100; i++) {
      const layers = Array.from({ length: 1 + Math.floor(3 * next()) }, () =>
        next() < 0.7
          ? disc(10 ** (2 * next() - 1), 10 ** (2 * next() - 1))
          : {
              thicknessCm: next(),
              edge: { kind: 'rectangle' as const, widthCm: 1 + 9 * next(), heightCm: 1 + 9 * next() },
            },
      );
      const [distance, offset] = [10 ** (3 * next() - 1), next() < 0.3 ? 0 : 30 * next()];
      const aim = aimOf(layers, distance, offset);
      const needed = widest(layers, distance, offset, aim);
      const where = `case ${i}: ${JSON.stringify(layers)} from ${distance}, ${offset}`;
      if (aim[AIM_OPENNESS] === 1) continue;
      // 1 − cos has the rounding of 1.
      expect(needed - aim[AIM_OPENNESS], where).toBeLessThan(4 * Number.EPSILON);
      // Half a degree between the sampled points; a rectangle is held by the circle around it.
      if (layers.every(({ edge }) => edge.kind === 'radius')) {
        expect(aim[AIM_OPENNESS] - needed, where).toBeLessThan(2e-4 * needed + 1e-9);
      }
    }
    expect.hasAssertions();
  });

  it.each([
    ['a point on the front face', [disc(1, 1)], 0, 0],
    ['a stack without an edge', [{ thicknessCm: 1, edge: { kind: 'none' } } as SolidLayer], 5, 0],
    ['a stack as wide as half the sky', [disc(1, 1e9)], 1, 3],
  ])('is the half space in front for %s', (_, layers, distance, offset) => {
    const aim = aimOf(layers, distance, offset);
    expect(aim[AIM_ALONG]).toBeCloseTo(1, 8);
    expect(aim[AIM_OPENNESS]).toBeGreaterThan(0.999999);
    expect(aim[AIM_OPENNESS]).toBeLessThanOrEqual(1);
  });

  it('keeps its bits when all lengths are doubled', () => {
    const once = aimOf([disc(1, 2), disc(0.3, 5)], 7, 4);
    const twice = aimOf([disc(2, 4), disc(0.6, 10)], 14, 8);
    expect(twice).toEqual(once);
  });
});
