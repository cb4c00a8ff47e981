/**
 * Expected-value scores at the two faces: each photon that sets out scores at once what would leave without a further
 * collision, exp(−τ/|w|), in number, energy, spectrum, and dose, which counts with 1/|w|.
 *
 * Near a face 1/|w| has no bound, and drawing w as it comes gives dose a variance without end. There the azimuth of the
 * score is drawn anew, with a density in proportion to 1/(|w| + τ) that cancels it.
 */
import type { DeepScores } from './scores.js';
import { DOSE_LINE, type Problem } from '../problem.js';
import { nextUniform, type StreamState } from '../random.js';
import { FIGURE } from '../tally-layout.js';

/** Optical depth of a face within which grazing photons are drawn anew; farther off exp(−τ/w)/w stays below 0.8. */
const NEAR_FACE = 0.5;
/** Cosines below it graze. */
const GRAZING = 0.3;
/** Contributions below this share of the mean score of a source photon are left to chance. */
const SMALL_SHARE = 1e-3;

export class FaceScores {
  private readonly doses: number;
  private readonly doseLines: Float64Array;
  private readonly cellCount: number;
  private readonly random: StreamState;
  private readonly number: number;
  private readonly energy: number;
  private readonly firstCell: number;
  private readonly dose: number;
  private readonly smallScore: number;

  constructor(
    problem: Problem,
    random: StreamState,
    private readonly scores: DeepScores,
    isFar: boolean,
  ) {
    const { tally } = problem;
    const { plan } = problem.deep!;
    this.random = random;
    this.doses = tally.dose.doses;
    this.doseLines = problem.doseLines;
    this.cellCount = problem.cellCount;
    this.number = isFar ? FIGURE.transmitted : FIGURE.reflected;
    this.energy = isFar ? FIGURE.transmittedEnergy : FIGURE.reflectedEnergy;
    this.firstCell = isFar ? tally.transmittedCell : tally.reflectedCell;
    this.dose = isFar ? tally.dose.farFigure : tally.dose.frontFigure;
    this.smallScore = SMALL_SHARE * (isFar ? plan.farScore : plan.frontScore);
  }

  /**
   * A photon sets out at an optical depth `depth` from the face.
   *
   * @param axis direction cosine towards the face of the axis about which its azimuth is uniform
   * @param cosine of the angle to that axis
   * @param w its own direction cosine towards the face
   */
  score(
    weight: number,
    energyKeV: number,
    cell: number,
    depth: number,
    axis: number,
    cosine: number,
    w: number,
  ): void {
    if (this.doses > 0 && depth < NEAR_FACE) {
      const spread = Math.sqrt(Math.max(0, (1 - cosine * cosine) * (1 - axis * axis)));
      const middle = axis * cosine;
      if (middle - spread < GRAZING && spread > 1e-9) {
        if (middle + spread > 0) this.scoreGrazing(weight, energyKeV, cell, depth, middle, spread);
        return;
      }
    }
    if (w > 0) this.add(weight * Math.exp(-depth / w), energyKeV, cell, w);
  }

  /** The same for a photon of any direction alike; w is that drawn. */
  scoreIsotropic(weight: number, energyKeV: number, cell: number, depth: number, w: number): void {
    if (this.doses > 0 && depth < NEAR_FACE && depth > 0) {
      // w from 1/(w + τ) on (0, 1), of which uniform directions fill half
      const log = Math.log1p(1 / depth);
      const drawn = Math.min(1, depth * Math.expm1(nextUniform(this.random) * log));
      const ratio = 0.5 * (drawn + depth) * log;
      if (drawn > 0) this.add(weight * ratio * Math.exp(-depth / drawn), energyKeV, cell, drawn);
    } else if (w > 0) {
      this.add(weight * Math.exp(-depth / w), energyKeV, cell, w);
    }
  }

  /** Draws the azimuth φ of w = m + s cos φ > 0 from 1/(w + τ) by the half-angle tangent, and scores there. */
  private scoreGrazing(
    weight: number,
    energyKeV: number,
    cell: number,
    depth: number,
    middle: number,
    spread: number,
  ): void {
    // 1/(β + s cos φ) dφ = 2 dt/((β + s) + (β − s) t²), t = tan(φ/2)
    const beta = middle + depth;
    const sum = beta + spread;
    const difference = beta - spread;
    const end = middle >= spread ? Infinity : Math.sqrt((spread + middle) / (spread - middle));
    const u = nextUniform(this.random);
    let t: number;
    let integral: number;
    const root = Math.sqrt(Math.abs(sum * difference));
    if (difference > 1e-12 * sum) {
      const slope = Math.sqrt(difference / sum);
      const whole = end === Infinity ? Math.PI / 2 : Math.atan(end * slope);
      t = Math.tan(u * whole) / slope;
      integral = (2 * whole) / root;
    } else if (difference < -1e-12 * sum) {
      const slope = Math.sqrt(-difference / sum);
      const whole = Math.atanh(Math.min(1 - 1e-16, end * slope));
      t = Math.tanh(u * whole) / slope;
      integral = (2 * whole) / root;
    } else {
      t = u * end;
      integral = (2 * end) / sum;
    }
    const w = middle + (spread * (1 - t * t)) / (1 + t * t);
    if (!(w > 0)) return;
    const ratio = (integral * (w + depth)) / Math.PI;
    this.add(weight * ratio * Math.exp(-depth / w), energyKeV, cell, w);
  }

  /** `weight` leaves under w. */
  private add(weight: number, energyKeV: number, cell: number, w: number): void {
    const { doses, doseLines, cellCount, scores } = this;
    let factor = weight;
    const leading =
      doses > 0 ? (doseLines[DOSE_LINE * cell] + doseLines[DOSE_LINE * cell + 1] * energyKeV) / w : energyKeV;
    const expected = weight * leading;
    if (expected < this.smallScore) {
      if (nextUniform(this.random) * this.smallScore >= expected) return;
      factor = this.smallScore / leading;
    }
    if (factor === 0) return;
    scores.addFigure(this.number, factor);
    scores.addFigure(this.energy, factor * energyKeV);
    scores.addSpectrum(this.firstCell, energyKeV, factor);
    for (let d = 0; d < doses; d++) {
      const at = (d * cellCount + cell) * DOSE_LINE;
      scores.addFigure(this.dose + d, (factor * (doseLines[at] + doseLines[at + 1] * energyKeV)) / w);
    }
  }
}
