/**
 * Source photons of deep transport, in space: dose points need their place across the axis too. Photons are drawn by
 * their worth (deep/start-plan.ts), those of points and discs also straight towards the dose points behind the stack.
 */
import { placeInBeam, placeInDisc, turn, U, V, W, X, Y, Z } from '../../geometry/index.js';
import { COSINE_BINS, COSINE_BOUNDS, cosineBin } from './grid.js';
import type { DeepPlan } from './pilot.js';
import { pick } from './start-plan.js';
import { lineEnergyKeV } from '../emission.js';
import { bucketOf } from '../energy-grid.js';
import { ENERGY, WEIGHT } from '../photon.js';
import type { Problem } from '../problem.js';
import { nextOpenUniform, nextUniform, type StreamState } from '../random.js';

/** Part of the photons of a point or disc that are sent towards dose points, where there are any behind the stack. */
const AIMED_PART = 0.5;
/** 1 − cos of the angle within which most of those fly. */
const AIMED_WITHIN = 0.01;

/** Places that source photons are sent to. */
export interface Aims {
  readonly zCm: readonly number[];
  readonly offsetCm: readonly number[];
}

export class DeepSource {
  /** Energy of the photon drawn last, keV, and the weight of its line. */
  energyKeV = 0;
  lineWeight = 1;
  private readonly aims: Aims;
  private readonly axis = new Float64Array(3);

  constructor(
    private readonly problem: Problem,
    private readonly plan: Pick<DeepPlan, 'grid' | 'start'>,
    private readonly random: StreamState,
    points: { readonly zCm: Float64Array; readonly offsetCm: Float64Array } | null,
  ) {
    const behind = points === null ? [] : [...points.zCm.keys()].filter((p) => points.zCm[p] > 0);
    this.aims = {
      zCm: behind.map((p) => points!.zCm[p]),
      offsetCm: behind.map((p) => points!.offsetCm[p]),
    };
  }

  /**
   * Places the next source photon on the front face (or in its layer), with energy and weight. Photons of a point or disc
   * source that fly away are not played; the problem's history weight stands for them. Returns the layer it is in, −1
   * for a photon sent where no photon of the source goes.
   */
  next(photon: Float64Array): number {
    const { problem, random } = this;
    const { start } = this.plan;
    const line = pick(start.lineCumulative, 0, start.lineCumulative.length, nextUniform(random));
    this.energyKeV = lineEnergyKeV(problem.emission, line, random);
    photon[ENERGY] = this.energyKeV;
    this.lineWeight = start.lineWeight[line];
    photon[WEIGHT] = this.lineWeight;
    photon[X] = 0;
    photon[Y] = 0;
    photon[Z] = 0;
    const { source } = problem;
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
        return this.send(photon, source.distanceCm);
      case 'disc':
        placeInDisc(photon, source.radiusCm, 0, nextUniform(random), nextUniform(random));
        return this.send(photon, source.distanceCm);
      case 'diffuse':
      case 'embedded':
        this.drawStart(photon);
        return source.kind === 'embedded' ? problem.sourceLayer : 0;
    }
  }

  /** Depth and direction by their worth. */
  private drawStart(photon: Float64Array): void {
    const { random } = this;
    const { grid, start } = this.plan;
    const { source } = this.problem;
    const cells = start.slices * COSINE_BINS;
    const first = grid.groupOfBucket[bucketOf(photon[ENERGY])] * cells;
    const cell = pick(start.cellCumulative, first, cells, nextUniform(random));
    const slice = Math.floor(cell / COSINE_BINS);
    const bin = cell - slice * COSINE_BINS;
    const [low, high] = [COSINE_BOUNDS[bin], COSINE_BOUNDS[bin + 1]];
    const u = nextOpenUniform(random);
    // Constant radiance crosses a face in proportion to the cosine.
    const w =
      source.kind === 'diffuse' && source.law === 'isotropic'
        ? Math.sqrt(low * low + u * (high * high - low * low))
        : low + u * (high - low);
    head(photon, w, nextUniform(random));
    photon[WEIGHT] *= start.cellWeight[first + cell];
    if (source.kind === 'embedded') {
      const edge = start.firstSlice + slice;
      photon[Z] = grid.edgesCm[edge] + nextUniform(random) * (grid.edgesCm[edge + 1] - grid.edgesCm[edge]);
    }
  }

  /** Sends a photon from a place in front, by worth or towards a point, and moves it to the face. */
  private send(photon: Float64Array, distanceCm: number): number {
    const { aims, random } = this;
    const count = aims.zCm.length;
    if (count === 0) {
      this.drawStart(photon);
      this.flyTo(photon, distanceCm);
      return 0;
    }
    const before = photon[WEIGHT];
    if (nextUniform(random) < AIMED_PART) {
      this.lookAt(photon, distanceCm, Math.min(count - 1, Math.floor(nextUniform(random) * count)));
      const u = nextUniform(random);
      const miss = (2 * AIMED_WITHIN * u) / (2 + AIMED_WITHIN - 2 * u);
      photon[U] = this.axis[0];
      photon[V] = this.axis[1];
      photon[W] = this.axis[2];
      turn(photon, miss / 2, nextUniform(random));
      if (!(photon[W] > 0)) return -1;
    } else {
      this.drawStart(photon);
    }
    photon[WEIGHT] = before / (2 * Math.PI * this.densityOf(photon, distanceCm));
    this.flyTo(photon, distanceCm);
    return 0;
  }

  /** Photons per sr with which the direction of a photon at its source is drawn. */
  private densityOf(photon: Float64Array, distanceCm: number): number {
    const { aims } = this;
    const { grid, start } = this.plan;
    const cells = start.slices * COSINE_BINS;
    const first = grid.groupOfBucket[bucketOf(photon[ENERGY])] * cells;
    const weight = start.cellWeight[first + cosineBin(photon[W])];
    let aimed = 0;
    for (let p = 0; p < aims.zCm.length; p++) {
      this.lookAt(photon, distanceCm, p);
      const cosine = photon[U] * this.axis[0] + photon[V] * this.axis[1] + photon[W] * this.axis[2];
      const miss = Math.max(0, 1 - cosine) + AIMED_WITHIN;
      aimed += (AIMED_WITHIN * (2 + AIMED_WITHIN)) / (4 * Math.PI * miss * miss);
    }
    return (1 - AIMED_PART) / (2 * Math.PI * weight) + (AIMED_PART * aimed) / aims.zCm.length;
  }

  /** Direction from the place of a photon, `distanceCm` in front of the face, to a point. */
  private lookAt(photon: Float64Array, distanceCm: number, p: number): void {
    const dx = this.aims.offsetCm[p] - photon[X];
    const dy = -photon[Y];
    const dz = this.aims.zCm[p] + distanceCm;
    const inverse = 1 / Math.sqrt(dx * dx + dy * dy + dz * dz);
    this.axis[0] = dx * inverse;
    this.axis[1] = dy * inverse;
    this.axis[2] = dz * inverse;
  }

  /** Moves across by what the flight to the front face takes. */
  private flyTo(photon: Float64Array, distanceCm: number): void {
    photon[X] += (photon[U] / photon[W]) * distanceCm;
    photon[Y] += (photon[V] / photon[W]) * distanceCm;
  }
}

/** Direction with cosine w to the axis and an azimuth given as a share of a turn. */
export function head(photon: Float64Array, w: number, azimuth: number): void {
  const across = Math.sqrt(Math.max(0, 1 - w * w));
  photon[U] = across * Math.cos(2 * Math.PI * azimuth);
  photon[V] = across * Math.sin(2 * Math.PI * azimuth);
  photon[W] = w;
}
