/**
 * The history loop of deep transport, for laterally infinite stacks and figures that need no pulse heights.
 *
 * - A flight ends in a collision inside the stack: what would leave without one was scored when the photon set out. Its
 *   length is drawn so that collisions are spread to where they matter (deep/pilot.ts); the weight makes up for it.
 * - A collision lets the photon survive with the share that scatters; absorption is played with its probability, for
 *   what it deposits and sets free.
 * - A photon that sets out scores its expected contribution, then is split or ended by its importance: weight times
 *   importance stays near 1.
 * All of it leaves every mean unchanged, whatever the importances are.
 */
import { turn, U, V, W, X, Y, Z } from '../../geometry/index.js';
import type { BatchTally } from '../batch-tally.js';
import { COSINE_BINS, cosineBin } from './grid.js';
import { Flight } from './flight.js';
import { DepthScores } from './depths.js';
import { Lateral } from './lateral.js';
import { FaceScores } from './faces.js';
import { depthToFar, depthToFront } from './paths.js';
import { DEEP_LENGTH, DEEPEST, DeepPhotons } from './photons.js';
import { PointScores } from './points.js';
import { DeepScores } from './scores.js';
import { DeepSource, head } from './source.js';
import { bucketOf, cellOf } from '../energy-grid.js';
import { PAIR_THRESHOLD_KEV } from '../constants.js';
import { composeCosines, forward } from '../physics/bremsstrahlung.js';
import { COHERENT, INCOHERENT, interactAs, PAIR, PHOTOELECTRIC, type Site } from '../physics/interact.js';
import { ENERGY, WEIGHT } from '../photon.js';
import { CELL_LENGTH, type Problem } from '../problem.js';
import { nextUniform } from '../random.js';
import { FIGURE } from '../tally-layout.js';

/** Weight times importance is split above, left to chance below; a photon that is left goes on with the middle. */
const SPLIT_ABOVE = 2;
const CHANCE_BELOW = 0.5;
/** Below it a photon is left to chance before its direction is drawn. */
const EARLY_CHANCE_BELOW = 0.25;
const MOST_COPIES = 1000;
/** Faces count as twice as far as they are for what cannot get out: weights make rare ways out count. */
const TRAPPED_SHARE = 0.5;

/** Plays `histories` histories with the stream in `site.random` into `tally`. */
export function runDeepBatch(problem: Problem, histories: number, site: Site, tally: BatchTally): void {
  const run = new DeepRun(problem, site, tally);
  for (let history = 0; history < histories; history++) run.playHistory();
  run.scores.addConstants(histories, problem.deep!.constants);
}

class DeepRun {
  readonly scores: DeepScores;
  private readonly source: DeepSource;
  private readonly flight: Flight;
  private readonly far: FaceScores;
  private readonly front: FaceScores;
  private readonly depths: DepthScores | null;
  private readonly points: PointScores | null;
  private readonly lateral: Lateral | null;
  private readonly waiting = new DeepPhotons();
  /** The photon in hand, one that sets out, and an electron's direction. */
  private readonly photon = new Float64Array(DEEP_LENGTH);
  private readonly next = new Float64Array(DEEP_LENGTH);
  private readonly electron = new Float64Array(DEEP_LENGTH);
  private layer = 0;
  private slice = 0;
  private readonly uncollidedKeV: number;

  constructor(
    private readonly problem: Problem,
    private readonly site: Site,
    tally: BatchTally,
  ) {
    const plan = problem.deep!;
    const { dose } = problem.tally;
    this.scores = new DeepScores(tally);
    this.source = new DeepSource(problem, plan.plan, site.random, plan.points);
    this.flight = new Flight(problem, site.random);
    this.far = new FaceScores(problem, site.random, this.scores, true);
    this.front = new FaceScores(problem, site.random, this.scores, false);
    this.depths = dose.depthBins > 0 ? new DepthScores(problem, site.random, this.scores) : null;
    this.points = plan.points === null ? null : new PointScores(problem, plan.points, site, this.scores);
    this.lateral = plan.points === null ? null : new Lateral(plan.points.lateral);
    const { figures } = plan.constants;
    this.uncollidedKeV = figures[FIGURE.transmittedEnergy] + figures[FIGURE.reflectedEnergy];
  }

  /** One source photon and all that comes of it. */
  playHistory(): void {
    const { problem, photon } = this;
    const start = this.source.next(photon);
    const sourceKeV = this.source.energyKeV * this.source.lineWeight;
    if (start >= 0) {
      this.layer = start;
      photon[DEEPEST] = photon[Z];
      this.slice = this.flight.sliceAt(photon[Z], start);
      this.weigh(photon);
    }
    for (let layer = this.waiting.take(photon); layer >= 0; layer = this.waiting.take(photon)) {
      this.layer = layer;
      const cell = cellOf(problem.grid, photon[ENERGY]);
      if (this.fly(cell)) this.collide(cell);
    }
    this.scores.close(sourceKeV, this.uncollidedKeV);
  }

  /** Splits a photon or leaves it to chance by its importance; what is left waits. */
  private weigh(photon: Float64Array): void {
    const { grid, importance } = this.problem.deep!.plan;
    const group = grid.groupOfBucket[bucketOf(photon[ENERGY])];
    const at = (this.slice * grid.groups + group) * COSINE_BINS + cosineBin(photon[W]);
    let worth = photon[WEIGHT] * importance[at];
    if (this.lateral !== null) worth *= this.lateral.ofFlight(photon);
    let copies = 1;
    if (worth > SPLIT_ABOVE) {
      copies = Math.min(MOST_COPIES, Math.floor(worth + nextUniform(this.site.random)));
      photon[WEIGHT] /= worth > MOST_COPIES ? MOST_COPIES : worth;
    } else if (worth < CHANCE_BELOW) {
      if (nextUniform(this.site.random) >= worth) return;
      photon[WEIGHT] /= worth;
    }
    this.waiting.add(photon, this.layer, copies);
  }

  /** Moves the photon to its collision. False when there is nothing to collide with. */
  private fly(cell: number): boolean {
    const { photon, flight } = this;
    const factor = flight.draw(photon, this.layer, cell);
    if (factor === 0) return false;
    const length = (flight.z - photon[Z]) / photon[W];
    photon[WEIGHT] *= factor;
    photon[X] += length * photon[U];
    photon[Y] += length * photon[V];
    photon[Z] = flight.z;
    if (flight.z > photon[DEEPEST]) photon[DEEPEST] = flight.z;
    this.layer = flight.layer;
    this.slice = flight.slice;
    return true;
  }

  /** Both branches of a collision: absorption by chance, survival for certain. */
  private collide(cell: number): void {
    const { problem, photon, site } = this;
    const { cells } = problem;
    const energyKeV = photon[ENERGY];
    const weight = photon[WEIGHT];
    const slot = problem.slotOfLayer[this.layer];
    const at = (slot * problem.cellCount + cell) * CELL_LENGTH;
    const absorbed = Math.max(0, cells[at + 2] + cells[at + 3] * energyKeV);
    const incoherent = Math.max(absorbed, cells[at + 4] + cells[at + 5] * energyKeV);
    const coherent =
      energyKeV <= PAIR_THRESHOLD_KEV ? 1 : Math.max(incoherent, cells[at + 6] + cells[at + 7] * energyKeV);
    this.setCutoffs(slot);
    if (this.points !== null) {
      this.points.scatter(
        photon,
        this.layer,
        slot,
        weight * (incoherent - absorbed),
        weight * (coherent - incoherent),
      );
    }
    const u = nextUniform(site.random);
    if (u < absorbed) {
      site.energyKeV = energyKeV;
      interactAs(PHOTOELECTRIC, problem, site, slot, cell);
      this.settle(weight);
    }
    const surviving = 1 - absorbed;
    if (!(surviving > 1e-12)) return;
    const pick = absorbed + surviving * nextUniform(site.random);
    site.energyKeV = energyKeV;
    interactAs(pick < incoherent ? INCOHERENT : pick < coherent ? COHERENT : PAIR, problem, site, slot, cell);
    this.settle(weight * surviving);
    if (site.energyKeV > 0) this.scatterOn(weight * surviving);
  }

  /** Photons that cannot get out of the layer are not set free: see local-cutoff.ts. */
  private setCutoffs(slot: number): void {
    const { problem, photon, site } = this;
    const { boundariesCm } = problem;
    const z = photon[Z];
    const nearest = Math.min(z - boundariesCm[this.layer], boundariesCm[this.layer + 1] - z);
    site.setCutoffs(problem, slot, Math.max(0, TRAPPED_SHARE * nearest) * problem.densityOfSlot[slot]);
  }

  /** Energy left by a branch, and the photons it sets free. */
  private settle(weight: number): void {
    const { problem, photon, site, scores } = this;
    if (site.depositedKeV > 0) {
      scores.addFigure(problem.tally.depositedFigure + this.layer, weight * site.depositedKeV);
      if (this.depths !== null && this.layer === problem.tally.dose.depthLayer) {
        this.depths.deposit(photon[Z], weight * site.depositedKeV);
      }
    }
    const { count, energyKeV, beta } = site.secondaries;
    for (let i = 0; i < count; i++) this.release(weight, energyKeV[i], beta[i], i);
  }

  /** Weight with which a photon that sets out is followed; 0 when chance ends it. */
  private early(weight: number, energyKeV: number): number {
    const { grid, topImportance } = this.problem.deep!.plan;
    const group = grid.groupOfBucket[bucketOf(energyKeV)];
    let worth = weight * topImportance[this.slice * grid.groups + group];
    if (this.lateral !== null) worth *= this.lateral.at(this.photon[X], this.photon[Y], this.photon[Z]);
    if (worth >= EARLY_CHANCE_BELOW) return weight;
    const chance = worth / EARLY_CHANCE_BELOW;
    return nextUniform(this.site.random) < chance ? weight / chance : 0;
  }

  /** A photon set free: isotropic, or radiated by an electron. */
  private release(weight: number, energyKeV: number, beta: number, i: number): void {
    const { photon, next, electron, site, points } = this;
    const kept = this.early(weight, energyKeV);
    if (kept === 0) return;
    this.setOut(kept, energyKeV);
    if (beta === 0) {
      if (points !== null) points.isotropic(photon, this.layer, energyKeV, kept);
      const w = 2 * nextUniform(site.random) - 1;
      head(next, w, nextUniform(site.random));
      const cell = cellOf(this.problem.grid, energyKeV);
      const { problem } = this;
      const z = photon[Z];
      if (this.depths !== null) this.depths.fly(next, this.layer, cell);
      this.far.scoreIsotropic(kept, energyKeV, cell, depthToFar(problem, energyKeV, cell, z, this.layer), w);
      this.front.scoreIsotropic(
        kept,
        energyKeV,
        cell,
        depthToFront(problem, energyKeV, cell, z, this.layer),
        -w,
      );
      this.weigh(next);
      return;
    }
    const { electronCosine, turnedCosine } = site.secondaries;
    const cosine = composeCosines(electronCosine[i], turnedCosine[i], nextUniform(site.random));
    for (let slot = U; slot <= W; slot++) electron[slot] = photon[slot];
    turn(electron, 0.5 * (1 - cosine), nextUniform(site.random));
    if (points !== null) points.radiated(photon, this.layer, energyKeV, kept, electron, beta);
    this.setOutAbout(electron, forward(2 * nextUniform(site.random) - 1, beta), kept, energyKeV);
  }

  /** The scattered photon. */
  private scatterOn(weight: number): void {
    const { photon, site } = this;
    const energyKeV = site.energyKeV;
    const kept = this.early(weight, energyKeV);
    if (kept === 0) return;
    this.setOut(kept, energyKeV);
    this.setOutAbout(photon, 1 - 2 * site.v, kept, energyKeV);
  }

  /** Puts place, energy and weight of a photon that sets out here into `next`. */
  private setOut(weight: number, energyKeV: number): void {
    const { photon, next } = this;
    next[X] = photon[X];
    next[Y] = photon[Y];
    next[Z] = photon[Z];
    next[ENERGY] = energyKeV;
    next[WEIGHT] = weight;
    next[DEEPEST] = photon[DEEPEST];
  }

  /** Sends `next` off at an angle to an axis, scores it and lets it wait. */
  private setOutAbout(axis: Float64Array, cosine: number, weight: number, energyKeV: number): void {
    const { next, site, problem } = this;
    next[U] = axis[U];
    next[V] = axis[V];
    next[W] = axis[W];
    turn(next, Math.max(0, 0.5 * (1 - cosine)), nextUniform(site.random));
    const cell = cellOf(problem.grid, energyKeV);
    const z = next[Z];
    const w = next[W];
    const toFar = depthToFar(problem, energyKeV, cell, z, this.layer);
    const toFront = depthToFront(problem, energyKeV, cell, z, this.layer);
    if (this.depths !== null) this.depths.fly(next, this.layer, cell);
    this.far.score(weight, energyKeV, cell, toFar, axis[W], cosine, w);
    this.front.score(weight, energyKeV, cell, toFront, -axis[W], cosine, -w);
    this.weigh(next);
  }
}
