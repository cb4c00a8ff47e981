/** Where and in which direction a photon starts in a laterally infinite stack: depth and direction cosine. */
import type { Problem } from '../problem.js';
import { nextOpenUniform, type StreamState } from '../random.js';

/** Start of a history; made once per batch and reused. */
export interface SlabStart {
  /** Depth z in cm and direction cosine w. */
  readonly place: Float64Array;
  layer: number;
}

/**
 * Draws the start of the next history. Photons of a point or disc source that fly away from the stack are not played:
 * the half that flies towards it stands for all with the problem's history weight of 1/2.
 */
export function startInSlab(problem: Problem, random: StreamState, start: SlabStart): void {
  const { source } = problem;
  switch (source.kind) {
    case 'beam':
      start.place[1] = problem.beamCosine;
      return;
    case 'point':
    case 'disc':
      start.place[1] = nextOpenUniform(random);
      return;
    case 'diffuse':
      // Constant radiance crosses a face in proportion to the cosine.
      start.place[1] =
        source.law === 'isotropic' ? Math.sqrt(nextOpenUniform(random)) : nextOpenUniform(random);
      return;
    case 'embedded': {
      const layer = problem.sourceLayer;
      const low = problem.boundariesCm[layer];
      start.layer = layer;
      start.place[0] = low + (problem.boundariesCm[layer + 1] - low) * nextOpenUniform(random);
      start.place[1] = 2 * nextOpenUniform(random) - 1;
    }
  }
}
