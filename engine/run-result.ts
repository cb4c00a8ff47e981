/** The result of a run from its sums. */
import { detectorXRays } from './detector-x-rays.js';
import { topEnergyKeV } from './emission.js';
import { depthRows } from './depth-rows.js';
import { EngineError } from './errors.js';
import type { Problem } from './problem.js';
import type { Balance, RunResult, StopReason, Timings } from './result.js';
import type { RunState, Sums } from './run-sums.js';
import type { Setup } from './setup.js';
import { estimate } from './statistics.js';
import { FIGURE, type TallyLayout } from './tally-layout.js';
import { spectraOf, totalsOf, type RunFigures } from './totals.js';
import { balanceWarnings, doseWarnings, oddityWarnings, setupWarnings } from './warnings.js';

/** Energy book-keeping must close to this relative difference. */
const BALANCE_TOLERANCE = 1e-9;
/** Photons that may be found outside the layer they were in, per history. */
const STRAYED_TOLERANCE = 1e-6;

export interface RunParts {
  readonly setup: Setup;
  readonly problem: Problem;
  readonly state: RunState;
  /** All sums; without those of cells the result has no spectra. */
  readonly sums: Sums;
  readonly stopped: StopReason;
  readonly timings: Timings;
}

/** @throws EngineError when the energy book-keeping does not close, or photons got lost */
export function makeResult({ setup, problem, state, sums, stopped, timings }: RunParts): RunResult {
  const { histories, batches } = state;
  const layout = problem.tally;
  const balance = balanceOf(sums, layout, histories);
  if (!layout.weighted && balance.relativeError > BALANCE_TOLERANCE) {
    throw new EngineError(
      'balance',
      `energy is not conserved: in − deposited − out is ${balance.relativeError} of in`,
    );
  }
  if (state.oddities.strayed > STRAYED_TOLERANCE * histories) {
    throw new EngineError(
      'balance',
      `${state.oddities.strayed} photons were found outside the layer they were in, in ${histories} histories`,
    );
  }
  const figures: RunFigures = { setup, layout, historyWeight: problem.historyWeight, histories, sums };
  return {
    setup,
    histories,
    batches,
    totals: histories > 0 ? totalsOf(figures) : [],
    spectra: histories > 0 && sums.cellSum.length > 0 ? spectraOf(figures) : [],
    depth: histories > 0 ? depthRows(figures) : [],
    xRays: detectorXRays(setup),
    balance,
    warnings: [
      ...setupWarnings(setup, topEnergyKeV(problem.emission)),
      ...doseWarnings(setup, layout.weighted),
      ...oddityWarnings(state.oddities),
      ...balanceWarnings(balance),
    ],
    timings,
    stopped,
  };
}

function balanceOf(sums: Sums, layout: TallyLayout, histories: number): Balance {
  const figure = (index: number) => sums.figureSum[index];
  let energyDepositedKeV = 0;
  for (let l = 0; l < layout.layers; l++) energyDepositedKeV += figure(layout.depositedFigure + l);
  const energyOutKeV =
    figure(FIGURE.transmittedEnergy) + figure(FIGURE.reflectedEnergy) + figure(FIGURE.sideEscapeEnergy);
  const energyInKeV = figure(FIGURE.sourceEnergy);
  const difference = Math.abs(energyInKeV - energyDepositedKeV - energyOutKeV);
  const balance = {
    energyInKeV,
    energyDepositedKeV,
    energyOutKeV,
    relativeError: energyInKeV > 0 ? difference / energyInKeV : 0,
  };
  if (!layout.weighted || energyInKeV === 0) return balance;
  const { gapFigure } = layout.dose;
  const gap = estimate(sums.figureSum[gapFigure], sums.figureSquare[gapFigure], histories);
  return { ...balance, relativeStdError: ((gap.stdError ?? 0) * histories) / energyInKeV };
}
