/**
 * Next-event scores at dose points: each collision scores what it would send straight to the point, density per sr of
 * its outcome times exp(−τ)/r², for each process that can happen there and with the energy the photon would have.
 */
import { U, V, W, X, Y, Z } from '../../geometry/index.js';
import type { LateralPlan } from './lateral.js';
import { depthToFar, depthToFront } from './paths.js';
import type { DeepScores } from './scores.js';
import { cellOf } from '../energy-grid.js';
import { coherentDensity, incoherentDensity } from '../physics/angular-density.js';
import { forwardDensity } from '../physics/bremsstrahlung.js';
import { sampleDoppler } from '../physics/doppler.js';
import type { Site } from '../physics/interact.js';
import { comptonEnergyRatio } from '../physics/klein-nishina.js';
import { ENERGY } from '../photon.js';
import { DOSE_LINE, type Problem } from '../problem.js';
import { nextUniform } from '../random.js';

/** What workers need to score at dose points. */
export interface PointPlan {
  readonly zCm: Float64Array;
  readonly offsetCm: Float64Array;
  /** Contributions to the leading dose below it are left to chance, by point. */
  readonly smallScore: Float64Array;
  readonly lateral: LateralPlan;
  readonly coherentNorms: Float64Array;
  /** First norm of each slot. */
  readonly normBase: Int32Array;
}

const PER_SR_ISOTROPIC = 1 / (4 * Math.PI);

export class PointScores {
  /** The point in hand: direction to it and 1/r². */
  private readonly direction = new Float64Array(3);
  private inverseSquare = 0;

  constructor(
    private readonly problem: Problem,
    private readonly plan: PointPlan,
    private readonly site: Site,
    private readonly scores: DeepScores,
  ) {}

  /**
   * Scattering of the photon at its place.
   *
   * @param incoherent weight that scatters incoherently
   * @param coherent weight that scatters coherently
   */
  scatter(photon: Float64Array, layer: number, slot: number, incoherent: number, coherent: number): void {
    const { problem, plan, direction } = this;
    const energyKeV = photon[ENERGY];
    for (let p = 0; p < plan.zCm.length; p++) {
      this.aim(photon, p);
      const cosine = photon[U] * direction[0] + photon[V] * direction[1] + photon[W] * direction[2];
      const v = Math.max(0, Math.min(1, (1 - cosine) / 2));
      if (incoherent > 0) {
        const base = problem.incoherentBase[slot];
        const perSr = incoherentDensity(problem.incoherent, base, energyKeV, v);
        const scatteredKeV = perSr > 0 ? this.scatteredEnergy(energyKeV, v, slot) : 0;
        if (scatteredKeV >= problem.cutoffKeV) this.send(p, photon, layer, scatteredKeV, incoherent * perSr);
      }
      if (coherent > 0) {
        const perSr = coherentDensity(
          problem.coherent,
          problem.coherentBase[slot],
          plan.coherentNorms,
          plan.normBase[slot],
          energyKeV,
          v,
        );
        this.send(p, photon, layer, energyKeV, coherent * perSr);
      }
    }
  }

  /** A photon of `energyKeV` set free at the place of `photon` in any direction alike. */
  isotropic(photon: Float64Array, layer: number, energyKeV: number, weight: number): void {
    for (let p = 0; p < this.plan.zCm.length; p++) {
      this.aim(photon, p);
      this.send(p, photon, layer, energyKeV, weight * PER_SR_ISOTROPIC);
    }
  }

  /** One radiated by an electron of speed β that flies as `electron` does, at the place of `photon`. */
  radiated(
    photon: Float64Array,
    layer: number,
    energyKeV: number,
    weight: number,
    electron: Float64Array,
    beta: number,
  ): void {
    const { direction } = this;
    for (let p = 0; p < this.plan.zCm.length; p++) {
      this.aim(photon, p);
      const cosine = electron[U] * direction[0] + electron[V] * direction[1] + electron[W] * direction[2];
      this.send(p, photon, layer, energyKeV, weight * forwardDensity(cosine, beta));
    }
  }

  private aim(photon: Float64Array, p: number): void {
    const dx = this.plan.offsetCm[p] - photon[X];
    const dy = -photon[Y];
    const dz = this.plan.zCm[p] - photon[Z];
    this.inverseSquare = 1 / (dx * dx + dy * dy + dz * dz);
    const inverse = Math.sqrt(this.inverseSquare);
    this.direction[0] = dx * inverse;
    this.direction[1] = dy * inverse;
    this.direction[2] = dz * inverse;
  }

  private scatteredEnergy(energyKeV: number, v: number, slot: number): number {
    const { problem, site } = this;
    const shells = problem.dopplerCount[slot];
    if (shells > 0 && energyKeV < problem.dopplerTopKeV) {
      const { doppler, dopplerBase } = problem;
      const broadened = sampleDoppler(doppler, dopplerBase[slot], shells, energyKeV, v, site.random);
      if (broadened > 0) return broadened;
    }
    return energyKeV * comptonEnergyRatio(energyKeV, v);
  }

  /** `perSr` photons per sr of an energy set out towards the point in hand. */
  private send(p: number, photon: Float64Array, layer: number, energyKeV: number, perSr: number): void {
    const { problem, plan, scores } = this;
    const { dose } = problem.tally;
    const cell = cellOf(problem.grid, energyKeV);
    const along = this.direction[2];
    const depth =
      along > 0
        ? depthToFar(problem, energyKeV, cell, photon[Z], layer)
        : depthToFront(problem, energyKeV, cell, photon[Z], layer);
    let fluence = perSr * this.inverseSquare * Math.exp(-depth / Math.abs(along));
    const leading = problem.doseLines[DOSE_LINE * cell] + problem.doseLines[DOSE_LINE * cell + 1] * energyKeV;
    const small = plan.smallScore[p];
    if (fluence * leading < small) {
      if (nextUniform(this.site.random) * small >= fluence * leading) return;
      fluence = small / leading;
    }
    if (!(fluence > 0)) return;
    for (let d = 0; d < dose.doses; d++) {
      const at = (d * problem.cellCount + cell) * DOSE_LINE;
      const perFluence = problem.doseLines[at] + problem.doseLines[at + 1] * energyKeV;
      scores.addFigure(dose.pointFigure + p * dose.doses + d, fluence * perFluence);
    }
  }
}
