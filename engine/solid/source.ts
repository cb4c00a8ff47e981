/** Where and in which direction a photon starts when layers have edges, what weight it has, and where it strikes. */
import {
  AIM_ACROSS,
  AIM_ALONG,
  AIM_LENGTH,
  AIM_OPENNESS,
  NEVER,
  U,
  V,
  W,
  X,
  Y,
  Z,
  aimAt,
  enterStack,
  makeSolidStack,
  placeInBeam,
  placeInDisc,
  placeInLayer,
  pointAlongAxis,
  rimsOf,
  turn,
  type Edge,
  type SolidStack,
} from '../../geometry/index.js';
import { EngineError } from '../errors.js';
import { PHOTON_LENGTH, WEIGHT } from '../photon.js';
import { nextOpenUniform, nextUniform, type StreamState } from '../random.js';
import type { Layer, Setup, SourceShape } from '../setup.js';

/** 1 − cos of a "cone" that is the whole sphere. */
const SPHERE = 2;

/** What the history loop for stacks with edges needs of a problem beyond the rest. */
export interface SolidProblem {
  readonly stack: SolidStack;
  /**
   * Photons are sent into the cone that holds the stack, and one that would have flown through the stack is told apart
   * by its weight from one that collides. Without it every history is one photon as nature makes it.
   */
  readonly biased: boolean;
  readonly source: SourceShape;
  /** Direction cosine of a beam; layer number of an embedded source. */
  readonly beamCosine: number;
  readonly sourceLayer: number;
  /** The circles that hold the stack; null if a layer has no edge. */
  readonly rims: Float64Array | null;
  /** The cone from a point source. */
  readonly aim: Float64Array;
}

/** Whether any layer has an edge. */
export function hasEdges({ extent, stack }: Pick<Setup, 'extent' | 'stack'>): boolean {
  return extent !== null || stack.some(({ radiusCm }) => radiusCm !== null);
}

/**
 * Compiles the part of a problem that only stacks with edges have.
 *
 * @throws EngineError for a source that is spread over a layer without an edge
 */
export function makeSolidProblem(setup: Setup, beamCosine: number, sourceLayer: number): SolidProblem {
  const source = setup.source.shape;
  const layers = setup.stack.map((layer) => ({ thicknessCm: layer.thicknessCm, edge: edgeOf(setup, layer) }));
  const spread = source.kind === 'embedded' ? sourceLayer : source.kind === 'diffuse' ? 0 : -1;
  if (spread >= 0 && layers[spread].edge.kind === 'none') {
    const { name } = setup.stack[spread];
    throw new EngineError(
      'unsupported',
      `the source is spread over layer ${name}, which has no edge, while others have one: no photon of an endless ` +
        'source is sure to come near them; give the layer a radius, or the stack an extent',
    );
  }
  const stack = makeSolidStack(layers);
  const rims = rimsOf(stack);
  const aim = new Float64Array(AIM_LENGTH);
  if (source.kind === 'point') aimAt(rims, source.distanceCm, source.offsetCm, aim);
  const biased = setup.run.transport !== 'analog';
  return { stack, biased, source, beamCosine, sourceLayer, rims, aim };
}

function edgeOf({ extent }: Setup, { radiusCm }: Layer): Edge {
  return radiusCm !== null ? { kind: 'radius', radiusCm } : (extent ?? { kind: 'none' });
}

/** Start of a history; made once per batch and reused. */
export class SolidStart {
  readonly photon = new Float64Array(PHOTON_LENGTH);
  readonly aim = new Float64Array(AIM_LENGTH);
  /** Layer the photon starts in or enters first; NEVER if it meets none. */
  layer = 0;
  /** It strikes the front face, or starts inside; a photon that comes in by a side or a step does not. */
  incident = true;
}

/** Draws the start of the next history and brings it to the stack. */
export function startInSolid(solid: SolidProblem, random: StreamState, start: SolidStart): void {
  const { source, stack } = solid;
  const { photon } = start;
  switch (source.kind) {
    case 'beam': {
      const wide = source.diameterCm > 0;
      const u1 = wide ? nextUniform(random) : 0;
      const u2 = wide ? nextUniform(random) : 0;
      placeInBeam(photon, 0.5 * source.diameterCm, solid.beamCosine, u1, u2);
      start.photon[WEIGHT] = 1;
      arrive(stack, start);
      return;
    }
    case 'point':
      photon[X] = source.offsetCm;
      photon[Y] = 0;
      photon[Z] = -source.distanceCm;
      send(solid, solid.aim, source.offsetCm, random, start);
      return;
    case 'disc': {
      placeInDisc(photon, source.radiusCm, -source.distanceCm, nextUniform(random), nextUniform(random));
      const offsetCm = Math.sqrt(photon[X] * photon[X] + photon[Y] * photon[Y]);
      if (solid.biased) aimAt(solid.rims, source.distanceCm, offsetCm, start.aim);
      send(solid, start.aim, offsetCm, random, start);
      return;
    }
    case 'diffuse': {
      // Constant radiance crosses a face in proportion to the cosine.
      const u = nextOpenUniform(random);
      const cosine = source.law === 'isotropic' ? Math.sqrt(u) : u;
      placeInLayer(stack, 0, photon, 0, nextUniform(random), nextUniform(random));
      pointAlongAxis(photon);
      turn(photon, 0.5 * (1 - cosine), nextUniform(random));
      beInside(start, 0);
      return;
    }
    case 'embedded': {
      const layer = solid.sourceLayer;
      const low = stack.planesCm[layer];
      const z = low + (stack.planesCm[layer + 1] - low) * nextOpenUniform(random);
      placeInLayer(stack, layer, photon, z, nextUniform(random), nextUniform(random));
      pointAlongAxis(photon);
      turn(photon, nextUniform(random), nextUniform(random));
      beInside(start, layer);
    }
  }
}

/** Sends a photon from its place in front of the stack into the cone of `aim`, or anywhere in an analog run. */
function send(
  solid: SolidProblem,
  aim: Float64Array,
  offsetCm: number,
  random: StreamState,
  start: SolidStart,
): void {
  const { photon } = start;
  const openness = solid.biased ? aim[AIM_OPENNESS] : SPHERE;
  if (solid.biased) {
    const across = offsetCm > 0 ? aim[AIM_ACROSS] / offsetCm : 0;
    photon[U] = across * photon[X];
    photon[V] = across * photon[Y];
    photon[W] = aim[AIM_ALONG];
  } else {
    pointAlongAxis(photon);
  }
  turn(photon, 0.5 * openness * nextUniform(random), nextUniform(random));
  start.photon[WEIGHT] = 0.5 * openness;
  arrive(solid.stack, start);
}

/** Brings a photon that comes from outside to the layer it meets first. */
function arrive(stack: SolidStack, start: SolidStart): void {
  start.layer = start.photon[W] > 0 ? enterStack(stack, 0, start.photon) : NEVER;
  start.incident = start.layer === 0 && start.photon[Z] === stack.planesCm[0];
}

function beInside(start: SolidStart, layer: number): void {
  start.photon[WEIGHT] = 1;
  start.layer = layer;
  start.incident = true;
}
