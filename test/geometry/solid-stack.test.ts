import { describe, expect, it } from 'vitest';
import {
  LEFT_FAR,
  LEFT_FRONT,
  LEFT_SIDE,
  NEVER,
  RAY_LENGTH,
  Track,
  enterStack,
  makeSolidStack,
  placeInBeam,
  placeInLayer,
  pointAlongAxis,
  traceThrough,
  turn,
  type Edge,
  type SolidLayer,
} from '../../geometry/index.js';
import { uniforms } from './uniform.js';

const disc = (thicknessCm: number, radiusCm: number): SolidLayer => ({
  thicknessCm,
  edge: { kind: 'radius', radiusCm },
});
const box = (thicknessCm: number, widthCm: number, heightCm: number): SolidLayer => ({
  thicknessCm,
  edge: { kind: 'rectangle', widthCm, heightCm },
});
const endless = (thicknessCm: number): SolidLayer => ({ thicknessCm, edge: { kind: 'none' } });

interface Trip {
  readonly left: number;
  readonly layers: number[];
  readonly lengths: number[];
}

/** Follows a ray from a layer (or from outside, null) through a stack. */
function trip(layers: readonly SolidLayer[], given: readonly number[], from: number | null): Trip {
  const stack = makeSolidStack(layers);
  const ray = Float64Array.from(given);
  const track = new Track(layers.length);
  const layer = from ?? enterStack(stack, 0, ray);
  const left = layer < 0 ? NEVER : traceThrough(stack, layer, ray, track);
  const indices = Array.from({ length: track.count }, (_, i) => i);
  return {
    left,
    layers: indices.map((i) => track.layer[i]),
    lengths: indices.map((i) => track.piece[4 * i + 3]),
  };
}

const S = Math.SQRT1_2;

describe('A straight flight', () => {
  // A crystal in front of a wider backing, and the other way round.
  const narrowFirst = [disc(2, 1), disc(1, 10)];
  const wideFirst = [disc(1, 10), disc(2, 1)];

  it.each([
    ['along the axis leaves by the far face', narrowFirst, [0, 0, 0, 0, 0, 1], 0, [0, 1], [2, 1], LEFT_FAR],
    [
      'back along the axis leaves by the front face',
      narrowFirst,
      [0, 0, 3, 0, 0, -1],
      1,
      [1, 0],
      [1, 2],
      LEFT_FRONT,
    ],
    [
      'out of the crystal’s side flies on to the wider layer',
      narrowFirst,
      [0, 0, 0, S, 0, S],
      0,
      [0, 1],
      [Math.SQRT2, Math.SQRT2],
      LEFT_FAR,
    ],
    [
      'back from the wider layer beside the crystal leaves by the front face',
      narrowFirst,
      [5, 0, 2.5, 0, 0, -1],
      1,
      [1],
      [0.5],
      LEFT_FRONT,
    ],
    [
      'back from the wider layer can hit the crystal’s side',
      narrowFirst,
      [2.5, 0, 3, -S, 0, -S],
      1,
      [1, 0],
      [Math.SQRT2, 1.5 * Math.SQRT2],
      LEFT_FRONT,
    ],
    ['straight across leaves by the side', narrowFirst, [0, 0.6, 1, 1, 0, 0], 0, [0], [0.8], LEFT_SIDE],
    [
      'slanting out of the last layer’s side leaves by the side',
      wideFirst,
      [0, 0, 1.5, S, 0, S],
      1,
      [1],
      [Math.SQRT2],
      LEFT_SIDE,
    ],
    [
      'through the wide layer beside the narrow one behind leaves by the far face',
      wideFirst,
      [5, 0, 0, 0, 0, 1],
      0,
      [0],
      [1],
      LEFT_FAR,
    ],
    [
      'from outside through a vacuum beside the crystal meets the wider layer',
      narrowFirst,
      [5, 0, -3, 0, 0, 1],
      null,
      [1],
      [1],
      LEFT_FAR,
    ],
    [
      'from outside can come in by the side',
      [disc(4, 1)],
      [-3, 0, -1, S, 0, S],
      null,
      [0],
      [2 * Math.SQRT2],
      LEFT_SIDE,
    ],
    ['from outside can miss', [disc(1, 1)], [-3, 0, -1, S, 0, S], null, [], [], NEVER],
    [
      'between planes without an edge never leaves by a side',
      [endless(1), disc(1, 1)],
      [0, 0, 0.5, 0.8, 0, -0.6],
      0,
      [0],
      [0.5 / 0.6],
      LEFT_FRONT,
    ],
    [
      'meets a narrow layer again behind a gap of nothing',
      [disc(1, 5), disc(1, 0.1), disc(1, 5)],
      [0, 0, 0, S, 0, S],
      0,
      [0, 2],
      [Math.SQRT2, Math.SQRT2],
      LEFT_FAR,
    ],
    ['leaves a box by its nearer wall', [box(10, 4, 2)], [0, 0, 5, 0.6, 0.8, 0], 0, [0], [1.25], LEFT_SIDE],
    [
      'comes into a box by a wall',
      [box(10, 4, 2)],
      [-5, 0, -1, S, 0, S],
      null,
      [0],
      [4 * Math.SQRT2],
      LEFT_SIDE,
    ],
    ['passes a box by', [box(1, 4, 2)], [0, 1.5, -1, 0, 0, 1], null, [], [], NEVER],
  ] as const)('%s', (_, layers, ray, from, met, lengths, left) => {
    const got = trip(layers, ray, from);
    expect(got.left).toBe(left);
    expect(got.layers).toEqual(met);
    got.lengths.forEach((length, i) => expect(length).toBeCloseTo(lengths[i], 12));
  });

  it('agrees with a walk in small steps through five hundred stacks made up at random', () => {
    const next = uniforms('stacks');
    for (let i = 0; i < 500; i++) {
      const layers = Array.from({ length: 1 + Math.floor(4 * next()) }, (): SolidLayer => {
        const kind = next();
        return kind < 0.6
          ? disc(0.2 + next(), 0.3 + 2 * next())
          : kind < 0.9
            ? box(0.2 + next(), 0.5 + 3 * next(), 0.5 + 3 * next())
            : endless(0.2 + next());
      });
      const ray = new Float64Array(RAY_LENGTH);
      ray.set([4 * next() - 2, 4 * next() - 2, -2]);
      pointAlongAxis(ray);
      turn(ray, 0.3 * next(), next());
      const got = trip(layers, Array.from(ray), null);
      const walked = walk(layers, ray);
      const lengths = new Float64Array(layers.length);
      got.layers.forEach((layer, k) => (lengths[layer] += got.lengths[k]));
      const where = `case ${i}: ${JSON.stringify(layers)}, ray ${ray}`;
      lengths.forEach((length, l) => expect(Math.abs(length - walked[l]), where).toBeLessThan(2.5 * STEP));
    }
    expect.hasAssertions();
  });

  it('keeps its bits when all lengths are doubled', () => {
    const next = uniforms('doubled');
    for (let i = 0; i < 200; i++) {
      const [t0, t1, r0, w1, h1] = [next(), next(), next(), next(), next()];
      const ray = new Float64Array(RAY_LENGTH);
      ray.set([next() - 0.5, next() - 0.5, -next()]);
      pointAlongAxis(ray);
      turn(ray, 0.2 * next(), next());
      const once = trip([disc(t0, r0), box(t1, w1, h1)], Array.from(ray), null);
      for (let k = 0; k < 3; k++) ray[k] *= 4;
      const scaled = trip([disc(4 * t0, 4 * r0), box(4 * t1, 4 * w1, 4 * h1)], Array.from(ray), null);
      expect(scaled).toEqual({ ...once, lengths: once.lengths.map((length) => 4 * length) });
    }
  });
});

const STEP = 2e-3;

/** Lengths in each layer by steps along the ray. */
function walk(layers: readonly SolidLayer[], ray: Float64Array): Float64Array {
  const lengths = new Float64Array(layers.length);
  const depths = [0];
  layers.forEach(({ thicknessCm }, l) => depths.push(depths[l] + thicknessCm));
  const inside = (edge: Edge, x: number, y: number) =>
    edge.kind === 'none' ||
    (edge.kind === 'radius'
      ? Math.hypot(x, y) < edge.radiusCm
      : Math.abs(x) < edge.widthCm / 2 && Math.abs(y) < edge.heightCm / 2);
  const total = (depths[layers.length] + 2) / ray[5];
  for (let s = STEP / 2; s < total; s += STEP) {
    const [x, y, z] = [0, 1, 2].map((k) => ray[k] + s * ray[3 + k]);
    const l = depths.findIndex((depth, k) => z >= depth && z < depths[k + 1]);
    if (l >= 0 && inside(layers[l].edge, x, y)) lengths[l] += STEP;
  }
  return lengths;
}

describe('Chords of rays that start isotropically and uniformly inside', () => {
  // With s the way from a uniform point to the surface, ⟨s⟩ = ⟨l²⟩/(2⟨l⟩); for isotropic uniform starts the surface
  // current is V/⟨…⟩: the share that has its surface within ds is S/(4 V) ds as s → 0 (Cauchy 1850: ⟨l⟩ = 4 V/S).
  it.each([
    ['a disc', disc(1.5, 2), Math.PI * 4 * 1.5, 2 * Math.PI * 2 * (2 + 1.5)],
    ['a box', box(1.5, 2, 3), 9, 2 * (2 * 3 + 1.5 * 2 + 1.5 * 3)],
  ])('end near their start in %s as often as Cauchy’s law says', (_, layer, volume, surface) => {
    const next = uniforms('chords');
    const stack = makeSolidStack([layer]);
    const track = new Track(1);
    const samples = 200_000;
    const near = 0.01;
    let short = 0;
    for (let i = 0; i < samples; i++) {
      const ray = new Float64Array(RAY_LENGTH);
      placeInLayer(stack, 0, ray, layer.thicknessCm * next(), next(), next());
      pointAlongAxis(ray);
      turn(ray, next(), next());
      traceThrough(stack, 0, ray, track);
      if (track.piece[3] < near) short++;
    }
    const expected = (surface * near) / (4 * volume);
    // 4 σ of a binomial count (false alarm 6e-5); chords shorter than 0.01 at the rims take off less than 0.5 %.
    const sigma = Math.sqrt(expected / samples);
    expect(Math.abs(short / samples - expected)).toBeLessThan(4 * sigma + 0.005 * expected);
  });
});

describe('A beam', () => {
  it('fills an ellipse on the front face when it is tilted', () => {
    const next = uniforms('beam');
    const cosine = 0.5;
    const ray = new Float64Array(RAY_LENGTH);
    let across = 0;
    let along = 0;
    const samples = 100_000;
    for (let i = 0; i < samples; i++) {
      placeInBeam(ray, 2, cosine, next(), next());
      expect((ray[0] * cosine) ** 2 + ray[1] ** 2).toBeLessThanOrEqual(4 * (1 + 1e-12));
      along += ray[0] ** 2;
      across += ray[1] ** 2;
    }
    // ⟨y²⟩ = R²/4 = 1 and ⟨x²⟩ = R²/(4 cos²) = 4, each with a relative standard deviation of 1: 4 σ, false alarm 6e-5.
    expect(Math.abs(across / samples - 1)).toBeLessThan(4 / Math.sqrt(samples));
    expect(Math.abs(along / samples / 4 - 1)).toBeLessThan(4 / Math.sqrt(samples));
    expect(ray.slice(2)).toEqual(Float64Array.of(0, Math.sqrt(0.75), 0, 0.5));
  });
});
