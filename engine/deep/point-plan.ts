/** What scoring at dose points needs compiled. */
import { COHERENT_LENGTH } from '../physics/coherent.js';
import { coherentNorms, coherentRows } from '../physics/angular-density.js';
import { makeLateralPlan } from './lateral-plan.js';
import type { DeepPlan } from './pilot.js';
import type { PointPlan } from './points.js';
import { topEnergyKeV } from '../emission.js';
import { sharedDoubles, sharedInts, type Problem } from '../problem.js';
import type { DosePoint } from '../setup.js';
import type { Constants } from '../uncollided.js';

/** Contributions below this share of the figure expected are left to chance. */
const SMALL_SHARE = 1e-3;

/** Null where there is nothing to aim at: no points, or a source without end, of which every place sees the same. */
export function makePointPlan(
  problem: Problem,
  points: readonly DosePoint[],
  plan: DeepPlan,
  constants: Constants,
): PointPlan | null {
  const { kind } = problem.source;
  if (problem.tally.dose.points === 0 || kind === 'diffuse' || kind === 'embedded') return null;
  const shared = (values: readonly number[]) => {
    const array = sharedDoubles(values.length);
    array.set(values);
    return array;
  };
  return {
    zCm: shared(points.map(({ zCm }) => zCm)),
    offsetCm: shared(points.map(({ offsetCm }) => offsetCm)),
    smallScore: shared(
      points.map((point, p) => SMALL_SHARE * expectedScore(problem, point, p, plan, constants)),
    ),
    lateral: makeLateralPlan(problem, points, plan),
    ...normsOfSlots(problem),
  };
}

/** A rough lower guess of the leading dose at a point: the uncollided, or that of the faces spread over a sphere. */
function expectedScore(
  problem: Problem,
  { zCm, offsetCm }: DosePoint,
  p: number,
  plan: DeepPlan,
  { figures }: Constants,
): number {
  const { dose } = problem.tally;
  const isBehind = zCm > 0;
  const uncollided = isBehind ? figures[dose.pointUncollidedFigure + p * dose.doses] : 0;
  if (uncollided > 0 && uncollided < Infinity) return uncollided;
  const { source } = problem;
  const before = source.kind === 'point' || source.kind === 'disc' ? source.distanceCm : 0;
  const squared = (Math.abs(zCm) + before) ** 2 + offsetCm ** 2;
  return (isBehind ? plan.farScore : plan.frontScore) / (4 * Math.PI * squared);
}

/** Norms of coherent scattering for all slots; slots of one composition share them. */
function normsOfSlots(problem: Problem): Pick<PointPlan, 'coherentNorms' | 'normBase'> {
  const slots = Math.max(...problem.slotOfLayer) + 1;
  const normBase = sharedInts(slots);
  if (problem.coherent.length < COHERENT_LENGTH) return { coherentNorms: sharedDoubles(1), normBase };
  const rows = coherentRows(topEnergyKeV(problem.emission)) + 1;
  const firstOf = new Map<number, number>();
  const norms: number[] = [];
  for (let slot = 0; slot < slots; slot++) {
    const base = problem.coherentBase[slot];
    if (!firstOf.has(base)) {
      firstOf.set(base, norms.length);
      norms.push(...coherentNorms(problem.coherent, base, rows));
    }
    normBase[slot] = firstOf.get(base)!;
  }
  const coherentNormsShared = sharedDoubles(norms.length);
  coherentNormsShared.set(norms);
  return { coherentNorms: coherentNormsShared, normBase };
}
