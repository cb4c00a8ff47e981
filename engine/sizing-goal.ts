/** What a shield is to achieve, and how far one result of a run is from it. */
import { ratioName } from './dose-rows.js';
import { isUnreliable } from './reliability-verdict.js';
import type { RunResult } from './result.js';
import type { DosePoint, DoseQuantity, Layer, Setup } from './setup.js';

/** A bound on a dose at one place. */
export interface SizeGoal {
  readonly quantity: DoseQuantity;
  /** Dose per source photon (pGy or pSv) at a point, or dose with the stack over dose without it. */
  readonly kind: 'dose' | 'transmission';
  /** Name of a dose point; null: the far face. */
  readonly place: string | null;
  readonly limit: number;
}

/** How a goal stands at one thickness. */
export interface GoalState {
  readonly goal: SizeGoal;
  /** In the unit of the limit; null where it has no bound. */
  readonly value: number | null;
  readonly stdError: number;
  /** One-sided upper 95 % limit of the value. */
  readonly upper95: number;
  /** False where few histories or very unequal ones contributed: the limits are then not to be trusted. */
  readonly isReliable: boolean;
}

/** Normal quantile of 95 %. */
const UPPER_95 = 1.6449;

export function goalState(result: RunResult, goal: SizeGoal): GoalState {
  const dose = result.setup.tally.dose.indexOf(goal.quantity);
  const name = goal.kind === 'dose' ? goal.quantity : ratioName('dose_transmission', goal.quantity, dose);
  const row = result.totals.find(({ quantity, layer }) => quantity === name && layer === goal.place);
  const value = row?.mean ?? null;
  const stdError = row?.stdError ?? 0;
  const reliability = row?.reliability;
  return {
    goal,
    value,
    stdError,
    upper95: value === null ? Infinity : value + UPPER_95 * stdError,
    isReliable: stdError === 0 || !reliability || !isUnreliable(reliability),
  };
}

/** ln(value/limit) of the goal that is farthest from met, with its standard error. */
export interface Excess {
  readonly log: number;
  readonly stdError: number;
  readonly state: GoalState;
}

export function worstExcess(states: readonly GoalState[]): Excess {
  return states
    .map((state) => {
      const { value, stdError, goal } = state;
      if (value === null) return { log: Infinity, stdError: 0, state };
      return { log: Math.log(value / goal.limit), stdError: value > 0 ? stdError / value : 1, state };
    })
    .reduce((worst, excess) => (excess.log > worst.log ? excess : worst));
}

/** Thickness that stands for a layer that is not there, cm: small against anything. */
const NOTHING_CM = 1e-7;

/**
 * The setup with another thickness of one layer (0: without it), set up to score the goals alone. Dose points behind the
 * stack keep their distance from the far face.
 */
export function setupWith(
  setup: Setup,
  layer: string,
  thicknessCm: number,
  goals: readonly SizeGoal[],
): Setup {
  const before = setup.stack.find(({ name }) => name === layer)!;
  const there: Layer =
    thicknessCm > 0 ? { ...before, thicknessCm } : { ...before, thicknessCm: NOTHING_CM, material: null };
  const grownCm = there.thicknessCm - before.thicknessCm;
  const moved = (point: DosePoint): DosePoint =>
    point.zCm > 0 ? { ...point, zCm: point.zCm + grownCm } : point;
  const edges = setup.tally.energyEdgesKeV;
  return {
    ...setup,
    stack: setup.stack.map((own) => (own === before ? there : own)),
    tally: {
      energyEdgesKeV: Float64Array.of(0, edges[edges.length - 1]),
      dose: [...new Set(goals.map(({ quantity }) => quantity))],
      dosePoints: setup.tally.dosePoints
        .filter((point) => goals.some(({ place }) => place === point.name))
        .map(moved),
      depthProfile: null,
    },
    run: { ...setup.run, until: null, timeLimitS: null, transport: 'deep' },
  };
}
