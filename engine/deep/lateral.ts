/**
 * What a place across the axis is worth to the dose points. The coarse grid knows depth alone; a photon far aside of the
 * line of sight of a point is worth less to it: by the inverse square and by the longer way out.
 */
import { U, V, W, X, Y, Z } from '../../geometry/index.js';

/** Worth factors at dose points: numbers that stand for the points. */
export interface LateralPlan {
  readonly zCm: Float64Array;
  readonly offsetCm: Float64Array;
  /** Factor on the worth for each point; the mean over source photons of worth times factor is the point's part. */
  readonly scale: Float64Array;
  /** Part of the effort that goes to the figures of the faces, wherever photons are. */
  readonly everywhere: number;
  /** Thickness of the stack, and the attenuation that slant ways suffer, 1/cm. */
  readonly thicknessCm: number;
  readonly perCm: number;
}

/** Share of the way to the face a flight heads for at which it is judged. */
const JUDGED_AT = 0.5;
/** What a flight straight at a point is worth more, and 1 − cos of the angle at which it is half of that. */
const AIMED_GAIN = 8;
const AIMED_WITHIN = 0.004;
/** Flights more across than this are judged as if they had this cosine. */
const LEAST_COSINE = 0.1;

export class Lateral {
  constructor(private readonly plan: LateralPlan) {}

  /** Factor for a photon in flight. */
  ofFlight(photon: Float64Array): number {
    const { scale, everywhere } = this.plan;
    let factor = everywhere;
    for (let p = 0; p < scale.length; p++) factor += scale[p] * this.sightOfFlight(p, photon);
    return factor;
  }

  /** Sight of the place at which a flight is judged. */
  sightOfFlight(p: number, photon: Float64Array): number {
    const w = photon[W];
    const slant = w > 0 ? Math.max(w, LEAST_COSINE) : Math.min(w, -LEAST_COSINE);
    const ahead = JUDGED_AT * (w > 0 ? this.plan.thicknessCm - photon[Z] : -photon[Z]);
    const length = ahead / slant;
    const judged = this.sight(
      p,
      photon[X] + length * photon[U],
      photon[Y] + length * photon[V],
      photon[Z] + ahead,
    );
    return judged * this.aimed(p, photon);
  }

  /** A flight that heads for the point nearly straight may reach it by one small angle: coherent scattering peaks there. */
  private aimed(p: number, photon: Float64Array): number {
    const dx = this.plan.offsetCm[p] - photon[X];
    const dy = -photon[Y];
    const dz = this.plan.zCm[p] - photon[Z];
    const cosine =
      (dx * photon[U] + dy * photon[V] + dz * photon[W]) / Math.sqrt(dx * dx + dy * dy + dz * dz);
    const miss = (1 - cosine) / AIMED_WITHIN;
    return 1 + AIMED_GAIN / (1 + miss * miss);
  }

  /** Factor at a place. */
  at(x: number, y: number, z: number): number {
    const { zCm, scale, everywhere } = this.plan;
    let factor = everywhere;
    for (let p = 0; p < zCm.length; p++) factor += scale[p] * this.sight(p, x, y, z);
    return factor;
  }

  /** cos² of the line of sight times what its slant costs in attenuation: 1 straight in front of the point. */
  sight(p: number, x: number, y: number, z: number): number {
    const { zCm, offsetCm, thicknessCm, perCm } = this.plan;
    const along = Math.abs(zCm[p] - z);
    const dx = x - offsetCm[p];
    const square = 1 + (dx * dx + y * y) / (along * along);
    const matter = perCm * (zCm[p] > 0 ? thicknessCm - z : z);
    return Math.exp(matter * (1 - Math.sqrt(square))) / square;
  }
}
