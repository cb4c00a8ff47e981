/** Errors of the engine: a run that cannot start or cannot be trusted. */

export type EngineErrorCode = 'unsupported' | 'worker_failed' | 'balance' | 'checkpoint';

export class EngineError extends Error {
  override readonly name = 'EngineError';

  constructor(
    readonly code: EngineErrorCode,
    message: string,
    options?: ErrorOptions,
  ) {
    super(message, options);
  }
}
