/** Which setups deep transport is for, and what it needs compiled. */
import { materialCoefficients } from '../../materials/index.js';
import { makeDeepPlan, type DeepPlan } from './pilot.js';
import type { PointPlan } from './points.js';
import { makePointPlan } from './point-plan.js';
import { EngineError } from '../errors.js';
import type { Problem } from '../problem.js';
import type { Setup } from '../setup.js';
import { uncollidedConstants, type Constants } from '../uncollided.js';

/** What deep transport adds to a problem. */
export interface DeepProblem {
  readonly plan: DeepPlan;
  readonly constants: Constants;
  /** Null without dose points that next events can reach. */
  readonly points: PointPlan | null;
}

/** Mean free paths of the most penetrating source energy from which a stack counts as thick: 3 in 10 000 get through. */
const THICK = 8;

/**
 * Whether a setup is run by deep transport: when asked to, or by itself when no pulse heights are needed and dose is, or
 * the stack is thick.
 *
 * @throws EngineError when deep transport is asked for and cannot give what the setup wants
 */
export function isDeep(setup: Setup): boolean {
  const obstacle = obstacleTo(setup);
  switch (setup.run.transport) {
    case 'analog':
      return false;
    case 'deep':
      if (obstacle !== null) throw new EngineError('unsupported', `deep transport ${obstacle}`);
      return true;
    case 'auto':
      return obstacle === null && (wantsDose(setup) || opticalThickness(setup) > THICK);
  }
}

function obstacleTo({ stack, extent, run }: Setup): string | null {
  const detector = stack.find((layer) => layer.detector !== null);
  if (detector) {
    return (
      `gives no pulse heights, but layer ${detector.name} is a detector: ` +
      'remove detector from it, or take transport: analog'
    );
  }
  if (extent !== null || stack.some((layer) => layer.radiusCm !== null)) {
    return 'is for layers without an edge: remove extent and radius, or take transport: analog';
  }
  const quantity = run.until?.quantity;
  if (quantity === 'interacting') return 'cannot give interacting: take transport: analog';
  return null;
}

function wantsDose({ tally }: Setup): boolean {
  return tally.dose.length > 0 || tally.depthProfile !== null;
}

/** Of the whole stack, for the source energy that gets through best. */
function opticalThickness({ stack, source }: Setup): number {
  const { lines, continuum } = source.emission;
  const energies = [...lines.map((line) => line.energyKeV), ...continuum.map((bin) => bin.energyHighKeV)];
  const thickness = (energyKeV: number) =>
    stack.reduce(
      (sum, { material, thicknessCm }) =>
        material === null
          ? sum
          : sum + thicknessCm * material.densityGPerCm3 * materialCoefficients(material, energyKeV).total,
      0,
    );
  return Math.min(...energies.map(thickness));
}

/** Compiles what deep transport needs. */
export function makeDeepProblem(setup: Setup, problem: Problem): DeepProblem {
  const { dosePoints } = setup.tally;
  const constants = uncollidedConstants(problem, dosePoints);
  const plan = makeDeepPlan(problem, setup.tally);
  return { plan, constants, points: makePointPlan(problem, dosePoints, plan, constants) };
}
