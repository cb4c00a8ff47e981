/**
 * Sizing a shield: the thickness of one layer that meets all goals, rounded up to a step and confirmed by a run that had
 * no part in finding it.
 */
import { EngineError } from './errors.js';
import type { Setup } from './setup.js';
import type { GoalState, SizeGoal } from './sizing-goal.js';
import { isSettled, ThicknessSearch, type Found, type PlaySetup, type Trial } from './sizing-search.js';

export interface SizeRequest {
  readonly layer: string;
  readonly goals: readonly SizeGoal[];
  /** The thickness is rounded up to a multiple of it. */
  readonly stepCm: number;
}

/** A run of its own seed at the rounded thickness. */
export interface Confirmation {
  readonly thicknessCm: number;
  readonly states: readonly GoalState[];
  readonly seed: string;
  readonly histories: number;
  /** Every upper 95 % limit meets its limit. */
  readonly isMet: boolean;
}

export interface SizeAnswer {
  readonly found: Found;
  /** Two-sided 95 % interval of the thickness at which the worst goal is just met; null unless one was found. */
  readonly intervalCm: readonly [number, number] | null;
  readonly roundedCm: number | null;
  /** In order; the last one counts. More than one: the first thickness, or its statistics, did not suffice. */
  readonly confirmations: readonly Confirmation[];
  readonly trials: readonly Trial[];
}

/** Normal quantile of a two-sided interval of 95 %. */
const TWO_SIDED_95 = 1.96;
const MAX_CONFIRMATIONS = 12;
/** Standard error of the thicknesses of a trade-off, as a share of them. */
const PAIR_ERROR = 0.01;
/** Standard errors that a confirmation should have between value and limit. */
const MARGIN_SIGMAS = 3;
const ERROR_RANGE = [0.001, 0.01] as const;

/**
 * Sizes a layer.
 *
 * @param play plays one setup; all runs are by deep transport
 * @throws EngineError for a layer that cannot be sized
 */
export async function sizeLayer(setup: Setup, request: SizeRequest, play: PlaySetup): Promise<SizeAnswer> {
  requireSizable(setup, request.layer);
  const search = new ThicknessSearch(setup, request.layer, request.goals, play, setup.seed);
  const found = await search.find();
  const none = { found, intervalCm: null, roundedCm: null, confirmations: [], trials: search.trials };
  if (found.verdict !== 'found') return none;
  const half = TWO_SIDED_95 * found.stdErrorCm;
  const intervalCm = [Math.max(0, found.thicknessCm - half), found.thicknessCm + half] as const;
  const confirmations = await confirm(search, found, request, setup.seed);
  const last = confirmations[confirmations.length - 1];
  return { found, intervalCm, roundedCm: last.thicknessCm, confirmations, trials: search.trials };
}

/** A layer of vacuum stops nothing, and one that holds the source brings it along. */
function requireSizable({ stack, source }: Setup, layer: string): void {
  const own = stack.find(({ name }) => name === layer);
  if (!own) throw new EngineError('unsupported', `no layer is called ${layer}`);
  if (own.material === null) {
    throw new EngineError('unsupported', `layer ${layer} is vacuum: no thickness of it stops anything`);
  }
  if (source.shape.kind === 'embedded' && source.shape.layer === layer) {
    throw new EngineError('unsupported', `layer ${layer} holds the source: size one around it`);
  }
}

async function confirm(
  search: ThicknessSearch,
  found: Found & { verdict: 'found' },
  { stepCm }: SizeRequest,
  seed: string,
): Promise<Confirmation[]> {
  const confirmations: Confirmation[] = [];
  // A thickness that is a multiple of the step but for rounding stays as it is.
  let steps = Math.max(1, Math.ceil(found.thicknessCm / stepCm - 1e-9));
  while (confirmations.length < MAX_CONFIRMATIONS) {
    const thicknessCm = steps * stepCm;
    const margin = (thicknessCm - found.thicknessCm) * found.perCm;
    const [least, most] = ERROR_RANGE;
    const error = Math.max(least, Math.min(most, margin / MARGIN_SIGMAS));
    const trial = await search.run(thicknessCm, error, `${seed}/confirm/${confirmations.length}`);
    const isMet = trial.states.every((state) => isSettled(state) && state.upper95 <= state.goal.limit);
    const { states, histories } = trial;
    confirmations.push({ thicknessCm, states, seed: trial.seed, histories, isMet });
    if (isMet) break;
    steps++;
  }
  return confirmations;
}

/** Thicknesses of two layers that meet the goals together. */
export interface EqualDosePair {
  readonly otherCm: number;
  readonly found: Found;
}

/** For each thickness of another layer, the thickness of the sized layer that then meets the goals. */
export async function tradeOff(
  setup: Setup,
  request: SizeRequest,
  other: string,
  thicknessesCm: readonly number[],
  play: PlaySetup,
): Promise<EqualDosePair[]> {
  requireSizable(setup, request.layer);
  requireSizable(setup, other);
  const pairs: EqualDosePair[] = [];
  for (const [n, otherCm] of thicknessesCm.entries()) {
    const changed = withThickness(setup, other, otherCm);
    const seed = `${setup.seed}/trade-off/${n}`;
    const search = new ThicknessSearch(changed, request.layer, request.goals, play, seed, PAIR_ERROR);
    pairs.push({ otherCm, found: await search.find() });
  }
  return pairs;
}

/** Another thickness of a layer, 0: without it; points behind the stack move along. */
function withThickness(setup: Setup, layer: string, thicknessCm: number): Setup {
  const before = setup.stack.find(({ name }) => name === layer)!;
  const grownCm = thicknessCm - before.thicknessCm;
  return {
    ...setup,
    stack: setup.stack.flatMap((own) =>
      own !== before ? [own] : thicknessCm > 0 ? [{ ...own, thicknessCm }] : [],
    ),
    tally: {
      ...setup.tally,
      dosePoints: setup.tally.dosePoints.map((point) =>
        point.zCm > 0 ? { ...point, zCm: point.zCm + grownCm } : point,
      ),
    },
  };
}
