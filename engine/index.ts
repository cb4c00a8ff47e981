/** The door of the engine folder. */
export type { BatchPlan, Shard } from './batch-plan.js';
export { decodeState, encodeState } from './checkpoint.js';
export { joinShards } from './join-states.js';
export { Run, type RunStart } from './run.js';
export type { RunState, Sums } from './run-sums.js';
export { playRun, simulate } from './simulate.js';
export type { GoalState, SizeGoal } from './sizing-goal.js';
export type { Found, PlaySetup, Trial } from './sizing-search.js';
export {
  sizeLayer,
  tradeOff,
  type Confirmation,
  type EqualDosePair,
  type SizeAnswer,
  type SizeRequest,
} from './sizing.js';
export { Simulator, type Playlist } from './simulator.js';
export {
  curveSeed,
  curveSetup,
  simulateEfficiency,
  type CurveOptions,
  type CurvePoint,
  type EfficiencyCurve,
} from './efficiency-curve.js';
export { EngineError, type EngineErrorCode } from './errors.js';
export type * from './setup.js';
export { MAX_ENERGY_KEV, MAX_LAYERS, MIN_ENERGY_KEV } from './setup.js';
export type * from './result.js';
