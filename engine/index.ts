/** The door of the engine folder. */
export { simulate } from './simulate.js';
export { EngineError, type EngineErrorCode } from './errors.js';
export type * from './setup.js';
export { MAX_ENERGY_KEV, MAX_LAYERS, MIN_ENERGY_KEV } from './setup.js';
export type * from './result.js';
