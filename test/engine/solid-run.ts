/** Plays setups with edges in this thread; the books of every one of them are checked. */
import { compile } from '../../engine/compile.js';
import type { Extent, Physics, Setup, SourceShape, Transport } from '../../engine/setup.js';
import type { Material } from '../../materials/index.js';
import { PLAIN, playSetup, slabSetup, type Played } from './slab-run.js';

/** Material, thickness in cm, own radius in cm or null, and whether the layer is a detector. */
export type SolidLayer = readonly [Material | string | null, number, (number | null)?, 'detector'?];

export interface SolidCase {
  readonly stack: readonly SolidLayer[];
  readonly extent?: Extent | null;
  readonly energyKeV: number;
  readonly shape: SourceShape;
  readonly seed: string;
  readonly physics?: Physics;
  readonly transport?: Transport;
  readonly edgesKeV?: readonly number[];
}

export const point = (distanceCm: number, offsetCm = 0): SourceShape => ({
  kind: 'point',
  distanceCm,
  offsetCm,
});
export const beam = (diameterCm = 0, angleDeg = 0): SourceShape => ({ kind: 'beam', angleDeg, diameterCm });
export const disc = (distanceCm: number, radiusCm: number): SourceShape => ({
  kind: 'disc',
  distanceCm,
  radiusCm,
});
export const embedded = (layer: string): SourceShape => ({ kind: 'embedded', layer });
export const radius = (radiusCm: number): Extent => ({ kind: 'radius', radiusCm });

/** A bare cylinder 3 inches high and wide. */
export const THREE_INCH_CM = 7.62;

/** The setup of a case; layers are named l0, l1, … */
export function solidSetup(given: SolidCase, histories: number): Setup {
  const setup = slabSetup(
    {
      stack: given.stack.map(([material, thicknessCm, , detector]) =>
        detector ? [material, thicknessCm, detector] : [material, thicknessCm],
      ),
      energyKeV: given.energyKeV,
      physics: given.physics ?? PLAIN,
      seed: given.seed,
      shape: given.shape,
    },
    histories,
  );
  return {
    ...setup,
    stack: setup.stack.map((layer, l) => ({ ...layer, radiusCm: given.stack[l][2] ?? null })),
    extent: given.extent ?? null,
    tally: given.edgesKeV
      ? { ...setup.tally, energyEdgesKeV: Float64Array.from(given.edgesKeV) }
      : setup.tally,
    run: { ...setup.run, transport: given.transport ?? 'auto' },
  };
}

/** Plays a case. */
export function playSolid(given: SolidCase, histories: number): Played {
  const setup = solidSetup(given, histories);
  return playSetup(setup, compile(setup));
}
