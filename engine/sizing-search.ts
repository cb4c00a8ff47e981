/**
 * The thickness at which the worst of several goals is just met. ln dose falls nearly evenly with thickness, so that a
 * secant in it is close after a run or two; each run has a seed of its own.
 */
import { materialCoefficients } from '../materials/index.js';
import type { RunResult } from './result.js';
import {
  goalState,
  setupWith,
  worstExcess,
  type Excess,
  type GoalState,
  type SizeGoal,
} from './sizing-goal.js';
import type { Setup } from './setup.js';

/** Plays one setup to its end. */
export type PlaySetup = (setup: Setup) => Promise<RunResult>;

/** One run of a search. */
export interface Trial {
  readonly thicknessCm: number;
  readonly excess: Excess;
  readonly states: readonly GoalState[];
  readonly seed: string;
  readonly histories: number;
}

/** How a search ended; the thickness has its standard error. */
export type Found =
  | {
      readonly verdict: 'found';
      readonly thicknessCm: number;
      readonly stdErrorCm: number;
      readonly perCm: number;
    }
  | { readonly verdict: 'none_needed' }
  | { readonly verdict: 'impossible'; readonly last: Trial };

const FIRST_HISTORIES = 20_000;
const MAX_HISTORIES = 2e8;
/** Relative error of a dose that leads the way. */
const ROUGH_ERROR = 0.05;
/** Standard error of the thickness that is aimed at by default, as a share of it: its 95 % interval is 1.6 % wide. */
const THICKNESS_ERROR = 0.004;
/** An error of no importance even if it were several times larger. */
const NEGLIGIBLE_ERROR = 1e-3;
/** A dose below this share of its limit need not be known well. */
const FAR_BELOW = 0.3;
const LEAST_ERROR = 0.001;
/** The last run is this close in ln dose: what the slope is wrong by then makes no difference. */
const CLOSE = 0.1;
const MAX_TRIALS = 30;
/** Mean free paths of the most penetrating photons beyond which more is of no use. */
const MOST_PATHS = 60;
/** A dose that falls less than this in ln over three mean free paths, at twelve or more, falls no further. */
const PLATEAU_FALL = 0.05;
const PLATEAU_STEP = 3;
const PLATEAU_FROM = 8;
/** A dose that falls less than this share of the attenuation between two trials may be on a plateau. */
const SLOW_FALL = 0.2;

export class ThicknessSearch {
  readonly trials: Trial[] = [];
  /** Attenuation coefficient of the layer for the photons that get through it best, 1/cm. */
  readonly leastPerCm: number;

  constructor(
    private readonly setup: Setup,
    private readonly layer: string,
    private readonly goals: readonly SizeGoal[],
    private readonly play: PlaySetup,
    private readonly seed: string,
    private readonly thicknessError = THICKNESS_ERROR,
  ) {
    this.leastPerCm = leastAttenuation(setup, layer);
  }

  /** Runs a thickness until the worst goal is known to a relative error. */
  async run(
    thicknessCm: number,
    relativeError: number,
    seed: string,
    least = FIRST_HISTORIES,
  ): Promise<Trial> {
    let histories = least;
    for (;;) {
      const trial = await this.runOnce(thicknessCm, histories, seed);
      const error = trial.excess.stdError;
      const isEnough = error <= relativeError && trial.states.every(isSettled);
      if (isEnough || histories >= MAX_HISTORIES || !Number.isFinite(trial.excess.log)) return trial;
      const wanted = Math.max(2, 1.2 * (error / relativeError) ** 2);
      histories = Math.ceil(Math.min(MAX_HISTORIES, histories * Math.min(wanted, 100)));
    }
  }

  private async runOnce(thicknessCm: number, histories: number, seed: string): Promise<Trial> {
    const setup = setupWith(this.setup, this.layer, thicknessCm, this.goals);
    const result = await this.play({ ...setup, seed, run: { ...setup.run, histories } });
    const states = this.goals.map((goal) => goalState(result, goal));
    return { thicknessCm, excess: worstExcess(states), states, seed, histories: result.histories };
  }

  /** Looks for the thickness. */
  async find(): Promise<Found> {
    const without = await this.next(0, ROUGH_ERROR);
    if (without.states.every(({ upper95, goal }) => upper95 <= goal.limit)) return { verdict: 'none_needed' };
    const start = this.setup.stack.find(({ name }) => name === this.layer)!.thicknessCm;
    await this.next(start, ROUGH_ERROR);
    while (this.trials.length < MAX_TRIALS) {
      const last = this.trials[this.trials.length - 1];
      const perCm = this.slopeAt(last);
      if (Math.abs(last.excess.log) <= CLOSE && last.excess.stdError <= this.errorFor(last, perCm) * 1.01) {
        return {
          verdict: 'found',
          thicknessCm: last.thicknessCm + last.excess.log / perCm,
          stdErrorCm: last.excess.stdError / perCm,
          perCm,
        };
      }
      if (this.isHopeless(last)) return { verdict: 'impossible', last };
      const goal = this.guess(last, perCm);
      const isClose = Math.abs(goal - last.thicknessCm) * perCm <= 5 * CLOSE;
      await this.next(goal, isClose ? this.errorFor({ thicknessCm: goal }, perCm) : ROUGH_ERROR);
    }
    return { verdict: 'impossible', last: this.trials[this.trials.length - 1] };
  }

  private async next(thicknessCm: number, relativeError: number): Promise<Trial> {
    const trial = await this.run(thicknessCm, relativeError, `${this.seed}/size/${this.trials.length}`);
    this.trials.push(trial);
    return trial;
  }

  /** Relative error of the dose that brings the thickness to the error aimed at. */
  private errorFor({ thicknessCm }: Pick<Trial, 'thicknessCm'>, perCm: number): number {
    return Math.max(LEAST_ERROR, Math.min(ROUGH_ERROR, this.thicknessError * thicknessCm * perCm));
  }

  /** Fall of ln dose per cm near a trial: to the trial nearest in thickness, else a guess from the attenuation. */
  private slopeAt({ thicknessCm, excess }: Trial): number {
    const others = this.trials.filter(
      (trial) =>
        trial.thicknessCm > 0 &&
        Math.abs(trial.thicknessCm - thicknessCm) * this.leastPerCm > 0.05 &&
        Number.isFinite(trial.excess.log),
    );
    const nearest = others.reduce<Trial | null>(
      (best, trial) =>
        best && Math.abs(best.thicknessCm - thicknessCm) <= Math.abs(trial.thicknessCm - thicknessCm)
          ? best
          : trial,
      null,
    );
    const slope = nearest ? (nearest.excess.log - excess.log) / (thicknessCm - nearest.thicknessCm) : 0;
    // A slope far from the attenuation is noise, or a plateau.
    return slope > 0.1 * this.leastPerCm ? slope : this.leastPerCm;
  }

  /** Next thickness: along the slope, inside the bracket known so far. */
  private guess({ thicknessCm, excess }: Trial, perCm: number): number {
    const limit = MOST_PATHS / this.leastPerCm;
    const tooThin = this.trials.filter((trial) => trial.excess.log > 0).map((trial) => trial.thicknessCm);
    const enough = this.trials.filter((trial) => trial.excess.log <= 0).map((trial) => trial.thicknessCm);
    const low = Math.max(0, ...tooThin);
    const high = Math.min(limit, ...enough);
    const aim =
      thicknessCm +
      (Number.isFinite(excess.log) ? excess.log / perCm : 5 / this.leastPerCm) +
      (this.isSlow() ? PLATEAU_FROM / this.leastPerCm : 0);
    const inside = high > low ? Math.max(low, Math.min(high, aim)) : aim;
    return Math.min(limit, Math.max(inside, 0.01 / this.leastPerCm));
  }

  /** Whether the last step brought far less than the attenuation promises. */
  private isSlow(): boolean {
    const [before, last] = this.trials.slice(-2);
    const stepCm = last.thicknessCm - before.thicknessCm;
    const fall = before.excess.log - last.excess.log;
    return before.thicknessCm > 0 && stepCm > 0 && fall < SLOW_FALL * this.leastPerCm * stepCm;
  }

  private isHopeless(last: Trial): boolean {
    if (last.excess.log <= 0) return false;
    const paths = last.thicknessCm * this.leastPerCm;
    if (paths >= MOST_PATHS * 0.999) return true;
    return this.trials.some(
      (trial) =>
        paths >= PLATEAU_FROM &&
        (last.thicknessCm - trial.thicknessCm) * this.leastPerCm >= PLATEAU_STEP &&
        trial.thicknessCm > 0 &&
        trial.excess.log - last.excess.log < PLATEAU_FALL + 2 * last.excess.stdError,
    );
  }
}

/**
 * Whether a dose is known well enough to judge by: its error can be relied on, or is so small that it does not matter, or
 * the dose is far below its limit.
 */
export function isSettled({ value, stdError, goal, isReliable }: GoalState): boolean {
  if (isReliable || value === null) return true;
  return stdError < NEGLIGIBLE_ERROR * value || value < FAR_BELOW * goal.limit;
}

/** Least attenuation coefficient of a layer at any energy up to the highest of the source. */
function leastAttenuation({ stack, source }: Setup, layer: string): number {
  const { material } = stack.find(({ name }) => name === layer)!;
  const { lines, continuum } = source.emission;
  const energies = [...lines.map((line) => line.energyKeV), ...continuum.map((bin) => bin.energyHighKeV)];
  return Math.min(
    ...energies.map((energy) => material!.densityGPerCm3 * materialCoefficients(material!, energy).total),
  );
}
