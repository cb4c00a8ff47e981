/** Where source photons of deep transport start, in space: dose points need their place across the axis too. */
import { placeInBeam, placeInDisc, U, V, W, X, Y, Z } from '../geometry/index.js';
import type { Problem } from './problem.js';
import { nextOpenUniform, nextUniform, type StreamState } from './random.js';

/**
 * Places a source photon on the front face (or in its layer). Photons of a point or disc source that fly away are not
 * played; the problem's history weight stands for them. Returns the layer it is in.
 */
export function startDeep(problem: Problem, random: StreamState, photon: Float64Array): number {
  const { source } = problem;
  photon[X] = 0;
  photon[Y] = 0;
  photon[Z] = 0;
  switch (source.kind) {
    case 'beam':
      placeInBeam(
        photon,
        source.diameterCm / 2,
        problem.beamCosine,
        nextUniform(random),
        nextUniform(random),
      );
      photon[Z] = 0;
      return 0;
    case 'point':
      photon[X] = source.offsetCm;
      head(photon, nextOpenUniform(random), nextUniform(random));
      flyTo(photon, source.distanceCm);
      return 0;
    case 'disc':
      placeInDisc(photon, source.radiusCm, 0, nextUniform(random), nextUniform(random));
      head(photon, nextOpenUniform(random), nextUniform(random));
      flyTo(photon, source.distanceCm);
      return 0;
    case 'diffuse': {
      // Constant radiance crosses a face in proportion to the cosine.
      const u = nextOpenUniform(random);
      head(photon, source.law === 'isotropic' ? Math.sqrt(u) : u, nextUniform(random));
      return 0;
    }
    case 'embedded': {
      const layer = problem.sourceLayer;
      const low = problem.boundariesCm[layer];
      photon[Z] = low + (problem.boundariesCm[layer + 1] - low) * nextOpenUniform(random);
      head(photon, 2 * nextOpenUniform(random) - 1, nextUniform(random));
      return layer;
    }
  }
}

/** Direction with cosine w to the axis and an azimuth given as a share of a turn. */
export function head(photon: Float64Array, w: number, turn: number): void {
  const across = Math.sqrt(Math.max(0, 1 - w * w));
  photon[U] = across * Math.cos(2 * Math.PI * turn);
  photon[V] = across * Math.sin(2 * Math.PI * turn);
  photon[W] = w;
}

/** Moves across by what the flight to the front face takes. */
function flyTo(photon: Float64Array, distanceCm: number): void {
  photon[X] += (photon[U] / photon[W]) * distanceCm;
  photon[Y] += (photon[V] / photon[W]) * distanceCm;
}
