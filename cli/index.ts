/** The package as a library. */
export {
  EngineError,
  MAX_ENERGY_KEV,
  MAX_LAYERS,
  MIN_ENERGY_KEV,
  curveSetup,
  simulate,
  simulateEfficiency,
  Simulator,
  type EngineErrorCode,
} from '../engine/index.js';
export type * from '../engine/index.js';
export * from '../materials/index.js';
export { SetupError, ThicksetError, type ErrorCode, type Problem } from './errors.js';
export { checkSetup, parseSetup, readSetup, type CheckedSetup, type SetupOrigin } from './setup-reader.js';
export { analyse, type Analysis } from './response/analysis.js';
export type { DetectorResponse, WidthChoice } from './response/respond.js';
export type { FeatureName, FeatureStatus, PeakRow } from './response/peaks/peak-row.js';
export { fwhmKeV } from './response/resolution.js';
export { efficiencyAt, type LogPolynomial } from './efficiency/log-polynomial.js';
export { efficiencyOf, writeCurve } from './efficiency/pack-curve.js';
export type { CurveRow } from './efficiency/curve-rows.js';
export type { CurveFit } from './efficiency/fit-curve.js';
export { readManifest, readResult, writeResult, type StoredResult } from './result/stored-result.js';
export { checkResultFolder } from './result/result-folder.js';
export type { Manifest, ManifestLayer, ManifestSource, ManifestUntil, RunRecord } from './result/manifest.js';
export { readSweepFile, type SweepFile } from './sweep/sweep-reader.js';
export { runSweep, type SweepOutcome } from './sweep/run-sweep.js';
export type { SweepRunOptions } from './sweep/sweep-runner.js';
