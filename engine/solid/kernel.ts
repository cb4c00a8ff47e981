/**
 * The history loop for stacks whose layers have edges: photons in space, with the weight of their history.
 *
 * A biased history is two outcomes at once. Along the straight way of the source photon through the stack, of optical
 * length τ, it flies through untouched with the weight e^−τ, and collides somewhere with the weight 1 − e^−τ; only the
 * second is followed, from a point of the way drawn by the law of flight. A pulse can come of the second alone, and
 * after the first collision everything is as nature makes it: so every pulse height keeps its exact expectation.
 */
import { AnalogDose } from '../analog-dose.js';
import { clearance, turn } from '../../geometry/index.js';
import type { BatchTally } from '../batch-tally.js';
import { lineEnergyKeV, pickLine } from '../emission.js';
import { cellOf } from '../energy-grid.js';
import { ENERGY, WEIGHT } from '../photon.js';
import { interact, type Site } from '../physics/interact.js';
import type { Problem } from '../problem.js';
import { nextUniform } from '../random.js';
import { FirstFlight, fly } from './flight.js';
import { SolidScores } from './scores.js';
import { SolidStart, startInSolid, type SolidProblem } from './source.js';
import { WaitingPhotons } from '../waiting-photons.js';

/** Plays `histories` histories with the stream in `site.random` into `tally`. */
export function runSolidBatch(problem: Problem, histories: number, site: Site, tally: BatchTally): void {
  const solid = problem.solid as SolidProblem;
  const { stack, biased } = solid;
  const { emission, grid, slotOfLayer } = problem;
  const { random, secondaries } = site;
  const dose = tally.layout.dose.doses > 0 ? new AnalogDose(problem, tally) : null;
  const scores = new SolidScores(tally, problem.cutoffKeV, grid, dose);
  const first = new FirstFlight(problem.layers);
  const waiting = new WaitingPhotons();
  const start = new SolidStart();
  const { photon } = start;

  for (let history = 0; history < histories; history++) {
    // Birth of the source photon; one that misses the stack is a history that scores nothing.
    const line = pickLine(emission, random);
    photon[ENERGY] = lineEnergyKeV(emission, line, random);
    startInSolid(solid, random, start);
    let layer = start.layer;
    if (layer < 0) continue;
    scores.open(photon, line, start.incident);
    let cell = cellOf(grid, photon[ENERGY]);
    let untouched = true;
    let atCollision = false;

    // First flight of a biased history: what goes through untouched leaves, the rest stands at its first collision.
    if (biased) {
      first.play(problem, stack, photon, layer, cell, random);
      const weight = photon[WEIGHT];
      const collided = weight * first.collidedShare;
      photon[WEIGHT] = weight - collided;
      if (photon[WEIGHT] > 0) scores.leave(first.left, photon, true);
      photon[WEIGHT] = collided;
      layer = first.layer;
      atCollision = true;
    }

    while (photon[WEIGHT] > 0) {
      // A flight to a collision or out of the stack.
      if (!atCollision) layer = fly(problem, stack, photon, layer, cell, site);
      atCollision = false;
      let alive = false;
      if (layer < 0) {
        scores.leave(layer, photon, untouched);
      } else {
        untouched = false;
        site.energyKeV = photon[ENERGY];
        const slot = slotOfLayer[layer];
        site.setCutoffs(problem, slot, clearance(stack, layer, photon) * problem.densityOfSlot[slot]);
        interact(problem, site, slot, cell);
        if (site.depositedKeV > 0) scores.deposit(layer, site.depositedKeV);
        if (secondaries.count > 0) waiting.add(secondaries, photon, layer, random);
        if (site.energyKeV > 0) {
          alive = true;
          photon[ENERGY] = site.energyKeV;
          turn(photon, site.v, nextUniform(random));
        }
      }
      // The next photon of the history, if any waits.
      if (!alive) {
        if (waiting.count === 0) break;
        layer = waiting.take(photon);
      }
      cell = cellOf(grid, photon[ENERGY]);
    }
    scores.close(photon);
  }
  dose?.closeBatch(histories);
}
