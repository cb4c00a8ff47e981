/** The package as a library. */
export {
  EngineError,
  MAX_ENERGY_KEV,
  MAX_LAYERS,
  MIN_ENERGY_KEV,
  simulate,
  type EngineErrorCode,
} from '../engine/index.js';
export type * from '../engine/index.js';
export * from '../materials/index.js';
export { SetupError, ThicksetError, type ErrorCode, type Problem } from './errors.js';
export { checkSetup, parseSetup, readSetup, type CheckedSetup, type SetupOrigin } from './setup-reader.js';
export { readManifest, readResult, writeResult, type StoredResult } from './result/stored-result.js';
export { checkResultFolder } from './result/result-folder.js';
export type { Manifest, ManifestLayer, ManifestSource, ManifestUntil, RunRecord } from './result/manifest.js';
