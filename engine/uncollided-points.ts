/** Uncollided fluence at a dose point, per history, with and without the stack. */
import type { Problem } from './problem.js';
import type { DosePoint } from './setup.js';

export interface PointFluence {
  /** 1/cm²; Infinity on the axis of a beam without width, NaN where the source has no end. */
  readonly behindStack: number;
  readonly free: number;
}

/** Parts of a disc's area and of half a turn that stand for the disc. */
const RINGS = 96;
const AZIMUTHS = 64;

/** @param depth optical thickness of the whole stack at the photons' energy */
export function uncollidedAtPoint(problem: Problem, point: DosePoint, depth: number): PointFluence {
  const { source, historyWeight } = problem;
  const isBehind = point.zCm > 0;
  const between = isBehind ? depth : 0;
  switch (source.kind) {
    case 'beam':
      return beamFluence(problem, source.diameterCm / 2, point, between);
    case 'point': {
      const alongCm = point.zCm + source.distanceCm;
      const acrossCm = point.offsetCm - source.offsetCm;
      return {
        behindStack: isotropic(alongCm, acrossCm, between) / historyWeight,
        free: isotropic(alongCm, acrossCm, 0) / historyWeight,
      };
    }
    case 'disc': {
      const mean = (depthBetween: number) =>
        discMean(source.radiusCm, (x, y) =>
          isotropic(point.zCm + source.distanceCm, Math.hypot(point.offsetCm - x, y), depthBetween),
        ) / historyWeight;
      return { behindStack: mean(between), free: mean(0) };
    }
    default:
      return { behindStack: NaN, free: NaN };
  }
}

/** exp(−τ/w)/(4 π r²). */
function isotropic(alongCm: number, acrossCm: number, depth: number): number {
  const squared = alongCm * alongCm + acrossCm * acrossCm;
  const slant = depth === 0 ? 0 : (depth * Math.sqrt(squared)) / Math.abs(alongCm);
  return Math.exp(-slant) / (4 * Math.PI * squared);
}

/** Mean over a disc by equal areas and even azimuths. */
function discMean(radiusCm: number, at: (x: number, y: number) => number): number {
  let sum = 0;
  for (let ring = 0; ring < RINGS; ring++) {
    const r = radiusCm * Math.sqrt((ring + 0.5) / RINGS);
    for (let n = 0; n < AZIMUTHS; n++) {
      const azimuth = (Math.PI * (n + 0.5)) / AZIMUTHS;
      sum += at(r * Math.cos(azimuth), r * Math.sin(azimuth));
    }
  }
  return sum / (RINGS * AZIMUTHS);
}

/** The beam meets the axis at the front face, tilted in the plane of the points. */
function beamFluence(
  { beamCosine }: Problem,
  radiusCm: number,
  { zCm, offsetCm }: DosePoint,
  depth: number,
): PointFluence {
  const sine = Math.sqrt(1 - beamCosine * beamCosine);
  const fromAxisCm = Math.abs(offsetCm * beamCosine - zCm * sine);
  if (fromAxisCm > radiusCm) return { behindStack: 0, free: 0 };
  const free = 1 / (Math.PI * radiusCm * radiusCm);
  return { behindStack: free * Math.exp(-depth / beamCosine), free };
}
