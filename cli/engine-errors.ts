/** What the engine reports, as errors of the program with a way out and an exit code. */
import type { EngineError } from '../engine/index.js';
import { errors, reason, ThicksetError } from './errors.js';

export function fromEngine(error: EngineError): ThicksetError {
  switch (error.code) {
    case 'unsupported':
      return errors.notSupported(error.message);
    case 'worker_failed':
      return errors.workerDied(reason(error.cause), error);
    case 'checkpoint':
      return errors.checkpointUnfit(error.message, error);
    case 'balance':
      return new ThicksetError(
        'balance_violated',
        error.message,
        'report this setup as a fault of the program',
        error,
      );
  }
}
