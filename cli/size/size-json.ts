/** The answer of `thickset size` as one object. */
import type { Confirmation, EqualDosePair, GoalState, SizeAnswer } from '../../engine/index.js';
import type { Setup } from '../../engine/setup.js';
import { CAUTION } from '../text/caution.js';
import { goalUnit, type NamedGoal, type SizeTask } from './size-goals.js';

/** What the command was asked and found. */
export interface SizeReport {
  readonly task: SizeTask;
  readonly layer: string;
  readonly stepCm: number;
  readonly answer: SizeAnswer;
  readonly tradeOff: { readonly layer: string; readonly pairs: readonly EqualDosePair[] } | null;
  readonly wallS: number;
}

/** `found`, `unconfirmed`, `none_needed` or `impossible`. */
export function verdictOf({ found, confirmations }: SizeAnswer): string {
  if (found.verdict !== 'found') return found.verdict;
  return confirmations.at(-1)?.isMet ? 'found' : 'unconfirmed';
}

export function sizeObject(report: SizeReport): Record<string, unknown> {
  const { task, layer, stepCm, answer, tradeOff, wallS } = report;
  const { found, intervalCm, roundedCm, confirmations, trials } = answer;
  const last = confirmations.at(-1);
  return {
    verdict: verdictOf(answer),
    layer,
    step_cm: stepCm,
    thickness_cm: found.verdict === 'found' ? found.thicknessCm : null,
    std_error_cm: found.verdict === 'found' ? found.stdErrorCm : null,
    interval_95_cm: intervalCm,
    rounded_cm: roundedCm,
    confirmation: last ? { ...confirmationObject(last, task), runs: confirmations.length } : null,
    closest: found.verdict === 'impossible' ? statesObject(found.last.states, task) : null,
    search: trials.map(({ thicknessCm, excess, seed, histories }) => ({
      thickness_cm: thicknessCm,
      dose_over_limit: Math.exp(excess.log),
      relative_error: excess.stdError,
      seed,
      histories,
    })),
    trade_off: tradeOff && {
      layer: tradeOff.layer,
      pairs: tradeOff.pairs.map((pair) => pairObject(pair, task.setup, layer, tradeOff.layer)),
    },
    wall_s: wallS,
    caution: CAUTION,
  };
}

function confirmationObject({ thicknessCm, states, seed, histories, isMet }: Confirmation, task: SizeTask) {
  return { met: isMet, thickness_cm: thicknessCm, seed, histories, goals: statesObject(states, task) };
}

function statesObject(states: readonly GoalState[], { goals }: SizeTask) {
  return states.map(({ value, stdError, upper95, isReliable }, i) => {
    const { goal, perMicroPerHour } = goals[i];
    const factor = perMicroPerHour ?? 1;
    return {
      quantity: goal.kind === 'dose' ? goal.quantity : 'dose_transmission',
      of: goal.quantity,
      place: goal.place,
      value: value === null ? null : value * factor,
      std_error: stdError * factor,
      upper_95: Number.isFinite(upper95) ? upper95 * factor : null,
      limit: goal.limit * factor,
      unit: goalUnit(goals[i]),
      reliable: isReliable,
    };
  });
}

/** Mass per area of both layers of a pair, g/cm². */
export function massPerArea(pair: EqualDosePair, setup: Setup, layer: string, other: string): number | null {
  if (pair.found.verdict === 'impossible') return null;
  const density = (name: string) =>
    setup.stack.find((own) => own.name === name)?.material?.densityGPerCm3 ?? 0;
  const own = pair.found.verdict === 'found' ? pair.found.thicknessCm : 0;
  return own * density(layer) + pair.otherCm * density(other);
}

function pairObject(pair: EqualDosePair, setup: Setup, layer: string, other: string) {
  const { otherCm, found } = pair;
  const isFound = found.verdict === 'found';
  return {
    verdict: found.verdict,
    other_cm: otherCm,
    thickness_cm: isFound ? found.thicknessCm : found.verdict === 'none_needed' ? 0 : null,
    std_error_cm: isFound ? found.stdErrorCm : null,
    mass_per_area_g_per_cm2: massPerArea(pair, setup, layer, other),
  };
}

/** A goal with its state, for texts. */
export interface NamedState {
  readonly named: NamedGoal;
  readonly state: GoalState;
}

export function namedStates(states: readonly GoalState[], { goals }: SizeTask): NamedState[] {
  return states.map((state, i) => ({ named: goals[i], state }));
}
