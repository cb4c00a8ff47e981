/**
 * Scores of the depth profile of one layer. Each flight scores its expected track length in every slice ahead: the mean
 * fluence there, exact in its 1/|w| and without bound to none.
 *
 * Dose behind a layer that ended in the slice is scored in the same run: photons that reach the slice without ever having
 * been deeper would have come as far without all that lies deeper, and would have left.
 */
import { W, Z } from '../../geometry/index.js';
import { DEEPEST } from './photons.js';
import type { DeepScores } from './scores.js';
import { ENERGY, WEIGHT } from '../photon.js';
import { CELL_LENGTH, DOSE_LINE, type Problem } from '../problem.js';
import { nextUniform, type StreamState } from '../random.js';

/** Optical path after which half of the flights are followed on, with twice the weight. */
const FOLLOWED_PATH = 3;

export class DepthScores {
  private readonly lowCm: number;
  private readonly highCm: number;
  private readonly sliceCm: number;
  private readonly perCm: number;

  constructor(
    private readonly problem: Problem,
    private readonly random: StreamState,
    private readonly scores: DeepScores,
  ) {
    const { depthLayer, depthBins } = problem.tally.dose;
    this.lowCm = problem.boundariesCm[depthLayer];
    this.highCm = problem.boundariesCm[depthLayer + 1];
    this.sliceCm = (this.highCm - this.lowCm) / depthBins;
    this.perCm = depthBins / (this.highCm - this.lowCm);
  }

  /** Energy left at depth z of the layer. */
  deposit(z: number, depositedKeV: number): void {
    const { depthBins, depthDepositFigure } = this.problem.tally.dose;
    const bin = Math.min(depthBins - 1, Math.max(0, Math.floor((z - this.lowCm) * this.perCm)));
    this.scores.addFigure(depthDepositFigure + bin, depositedKeV);
  }

  /** A flight sets out; the first flight of a source photon is not scored, for it is known exactly. */
  fly(photon: Float64Array, layer: number, cell: number): void {
    const { problem } = this;
    const own = problem.tally.dose.depthLayer;
    const w = photon[W];
    if (w === 0 || (w > 0 ? layer > own : layer < own)) return;
    const forwards = w > 0;
    let z = photon[Z];
    let path = 0;
    for (let l = layer; l !== own; l += forwards ? 1 : -1) {
      const end = problem.boundariesCm[forwards ? l + 1 : l];
      path += ((end - z) * this.attenuation(l, cell, photon[ENERGY])) / w;
      z = end;
    }
    this.cross(photon, cell, z, path);
  }

  private attenuation(layer: number, cell: number, energyKeV: number): number {
    const at = (this.problem.slotOfLayer[layer] * this.problem.cellCount + cell) * CELL_LENGTH;
    return this.problem.cells[at] + this.problem.cells[at + 1] * energyKeV;
  }

  /** Slices ahead of z, reached after an optical path. */
  private cross(photon: Float64Array, cell: number, z: number, path: number): void {
    const { problem, random, perCm, lowCm, sliceCm } = this;
    const { depthBins, depthLayer } = problem.tally.dose;
    const forwards = photon[W] > 0;
    const slant = Math.abs(photon[W]);
    const perSlant = this.attenuation(depthLayer, cell, photon[ENERGY]) / slant;
    let bin = Math.floor((z - lowCm) * perCm);
    bin = Math.max(0, Math.min(depthBins - 1, bin));
    let weight = photon[WEIGHT] * Math.exp(-path);
    let followed = 0;
    while (bin >= 0 && bin < depthBins && weight > 0) {
      const end = lowCm + (forwards ? bin + 1 : bin) * sliceCm;
      const length = Math.max(0, forwards ? end - z : z - end);
      const depth = length * perSlant;
      const lost = weight * -Math.expm1(-depth);
      // ∫ exp(−τ) ds over the slice, per slice thickness
      const track = (depth > 1e-9 ? lost / perSlant : weight * length) / (slant * sliceCm);
      this.add(cell, photon[ENERGY], bin, track, this.behindTrack(photon, z, end, weight, perSlant));
      weight -= lost;
      z = end;
      bin += forwards ? 1 : -1;
      followed += depth;
      if (followed > FOLLOWED_PATH) {
        followed = 0;
        if (nextUniform(random) < 0.5) return;
        weight *= 2;
      }
    }
  }

  /** Track length in the part of a slice that is deeper than the photon has ever been. */
  private behindTrack(
    photon: Float64Array,
    z: number,
    end: number,
    weight: number,
    perSlant: number,
  ): number {
    const slant = photon[W];
    const from = Math.max(z, photon[DEEPEST]);
    if (slant <= 0 || from >= end) return 0;
    const there = weight * Math.exp(-(from - z) * perSlant);
    const depth = (end - from) * perSlant;
    const lost = there * -Math.expm1(-depth);
    return (depth > 1e-9 ? lost / perSlant : there * (end - from)) / (slant * this.sliceCm);
  }

  private add(cell: number, energyKeV: number, bin: number, inside: number, behind: number): void {
    const { scores, problem } = this;
    const { doses, insideFigure, behindFigure } = problem.tally.dose;
    for (let d = 0; d < doses; d++) {
      const at = (d * problem.cellCount + cell) * DOSE_LINE;
      const dose = problem.doseLines[at] + problem.doseLines[at + 1] * energyKeV;
      if (inside > 0) scores.addFigure(insideFigure + bin * doses + d, inside * dose);
      if (behind > 0) scores.addFigure(behindFigure + bin * doses + d, behind * dose);
    }
  }
}
