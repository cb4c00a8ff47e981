/** From limits as users say them to goals of the engine: doses per source photon at places of the setup. */
import type { DosePoint, DoseQuantity, Setup } from '../../engine/setup.js';
import type { SizeGoal } from '../../engine/index.js';
import { errors } from '../errors.js';
import { nearestWord } from '../../materials/nearest.js';
import type { RateLimit } from './limit-words.js';

/** A goal with the words for it; `perMicroPerHour` turns a dose per photon into µGy/h or µSv/h. */
export interface NamedGoal {
  readonly goal: SizeGoal;
  readonly perMicroPerHour: number | null;
}

/** A setup with the goals it is to meet. */
export interface SizeTask {
  readonly setup: Setup;
  readonly goals: readonly NamedGoal[];
  /** True where no dose point was given and the usual one was taken. */
  readonly usualPoint: boolean;
}

/** Distance behind the wall at which doses are judged where no point is given (common practice: NCRP 147, 151). */
const USUAL_DISTANCE_CM = 30;
const SECONDS_PER_HOUR = 3600;
const MICRO_PER_PICO = 1e-6;

export function makeTask(
  given: Setup,
  limits: readonly RateLimit[],
  transmissions: readonly number[],
): SizeTask {
  const hasEnd = given.source.shape.kind === 'point' || given.source.shape.kind === 'disc';
  const usualPoint = given.tally.dosePoints.length === 0 && (hasEnd || limits.length > 0);
  const setup = usualPoint ? withUsualPoint(given) : given;
  const points = setup.tally.dosePoints.map(({ name }) => name);
  const quantity: DoseQuantity = setup.tally.dose[0] ?? 'air_kerma';
  const places = points.length > 0 ? points : [null];
  return {
    setup,
    usualPoint,
    goals: [
      ...limits.flatMap((limit) => limitGoals(setup, limit, points)),
      ...transmissions.flatMap((limit) =>
        places.map((place) => ({
          goal: { quantity, kind: 'transmission' as const, place, limit },
          perMicroPerHour: null,
        })),
      ),
    ],
  };
}

function withUsualPoint(setup: Setup): Setup {
  const stackCm = setup.stack.reduce((sum, { thicknessCm }) => sum + thicknessCm, 0);
  const point: DosePoint = {
    name: `${USUAL_DISTANCE_CM} cm behind`,
    zCm: stackCm + USUAL_DISTANCE_CM,
    offsetCm: 0,
  };
  return { ...setup, tally: { ...setup.tally, dosePoints: [point] } };
}

function limitGoals(setup: Setup, limit: RateLimit, points: readonly string[]): NamedGoal[] {
  const { shape, activityBq, emission } = setup.source;
  if (activityBq === null) {
    throw errors.usage(
      'a limit on a dose rate needs the activity of the source',
      'add activity to source in the setup, or give --transmission',
    );
  }
  if (shape.kind === 'diffuse' || shape.kind === 'embedded') {
    throw errors.usage(
      `a ${shape.kind} source has no end, so that its activity gives no dose rate`,
      'give --transmission, or take a point or disc source',
    );
  }
  if (limit.place !== null && !points.includes(limit.place)) {
    const nearest = nearestWord(limit.place, points);
    throw errors.usage(
      `no dose point is called ${limit.place}`,
      nearest === null ? `dose points: ${points.join(', ')}` : `did you mean ${nearest}?`,
    );
  }
  const perSecond = activityBq * (emission.photonsPerDecay ?? 1);
  const perMicroPerHour = perSecond * SECONDS_PER_HOUR * MICRO_PER_PICO;
  return (limit.place === null ? points : [limit.place]).map((place) => ({
    goal: { quantity: limit.quantity, kind: 'dose', place, limit: limit.microPerHour / perMicroPerHour },
    perMicroPerHour,
  }));
}

/** Value of a goal in what users read: µGy/h, µSv/h, or a pure number. */
export function goalUnit({ goal }: NamedGoal): 'uGy/h' | 'uSv/h' | '1' {
  if (goal.kind === 'transmission') return '1';
  return goal.quantity === 'air_kerma' ? 'uGy/h' : 'uSv/h';
}
