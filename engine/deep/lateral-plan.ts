/** Worth across the axis, compiled: how much each dose point counts, by a sample of source photons. */
import { W } from '../../geometry/index.js';
import { attenuationPerCm, COSINE_BINS, cosineBin } from './grid.js';
import { Lateral, type LateralPlan } from './lateral.js';
import { DEEP_LENGTH } from './photons.js';
import type { DeepPlan } from './pilot.js';
import { DeepSource } from './source.js';
import { topEnergyKeV } from '../emission.js';
import { bucketOf } from '../energy-grid.js';
import { ENERGY, WEIGHT } from '../photon.js';
import { sharedDoubles, type Problem } from '../problem.js';
import { seedStream } from '../random.js';
import type { DosePoint } from '../setup.js';

/** Part of the effort that is not aimed at points. */
const EVERYWHERE = 0.2;
/** Source photons in the sample. */
const SAMPLE = 4000;

export function makeLateralPlan(problem: Problem, points: readonly DosePoint[], plan: DeepPlan): LateralPlan {
  const shared = (values: readonly number[]) => {
    const array = sharedDoubles(values.length);
    array.set(values);
    return array;
  };
  const lateral = {
    zCm: shared(points.map(({ zCm }) => zCm)),
    offsetCm: shared(points.map(({ offsetCm }) => offsetCm)),
    scale: sharedDoubles(points.length),
    everywhere: EVERYWHERE,
    thicknessCm: problem.boundariesCm[problem.layers],
    perCm: meanAttenuation(problem),
  };
  const means = meanWorths(problem, lateral, plan);
  means.forEach((mean, p) => {
    lateral.scale[p] = mean > 0 ? (1 - EVERYWHERE) / (points.length * mean) : 0;
  });
  // Points that no source photon is worth anything to leave their part to the rest.
  lateral.everywhere = 1 - means.filter((mean) => mean > 0).length * ((1 - EVERYWHERE) / points.length);
  return lateral;
}

/** Of the whole stack for the highest source energy, 1/cm. */
function meanAttenuation(problem: Problem): number {
  const topKeV = topEnergyKeV(problem.emission);
  let depth = 0;
  for (let l = 0; l < problem.layers; l++) {
    const thicknessCm = problem.boundariesCm[l + 1] - problem.boundariesCm[l];
    depth += attenuationPerCm(problem, problem.slotOfLayer[l], topKeV) * thicknessCm;
  }
  return depth / problem.boundariesCm[problem.layers];
}

/** Mean over source photons of their worth times the sight each point has of them. */
function meanWorths(problem: Problem, lateralPlan: LateralPlan, plan: DeepPlan): Float64Array {
  const lateral = new Lateral(lateralPlan);
  const photon = new Float64Array(DEEP_LENGTH);
  const random = new Float64Array(4);
  seedStream(random, `${problem.seed}/points`, 0);
  const means = new Float64Array(lateralPlan.zCm.length);
  const source = new DeepSource(problem, plan, random, lateralPlan);
  for (let n = 0; n < SAMPLE; n++) {
    if (source.next(photon) < 0) continue;
    // Sources that points can see are in front: their photons start in the first slice.
    const group = plan.grid.groupOfBucket[bucketOf(photon[ENERGY])];
    const worth = photon[WEIGHT] * plan.importance[group * COSINE_BINS + cosineBin(photon[W])];
    for (let p = 0; p < means.length; p++) means[p] += (worth * lateral.sightOfFlight(p, photon)) / SAMPLE;
  }
  return means;
}
