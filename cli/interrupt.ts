/**
 * Ctrl-C: the first asks the run to finish the batches in hand, the second ends the program at once. Files are
 * written without a break between event-loop turns, so that the second cannot cut one in two.
 */
import { EXIT_CODES } from './errors.js';

const SIGNALS = ['SIGINT', 'SIGTERM'] as const;

export interface Interrupt {
  readonly signal: AbortSignal;
  /** Gives the signals back to the system. */
  readonly dispose: () => void;
}

/** Listens from now on; `announce` is called on the first signal. */
export function onInterrupt(announce: () => void): Interrupt {
  const controller = new AbortController();
  const listen = (): void => {
    if (controller.signal.aborted) {
      process.exit(EXIT_CODES.killed);
    }
    controller.abort();
    announce();
  };
  SIGNALS.forEach((name) => process.on(name, listen));
  return {
    signal: controller.signal,
    dispose: () => SIGNALS.forEach((name) => process.off(name, listen)),
  };
}
