/** A single run from start to end. */
import type { Progress, RunResult, SimulateOptions } from './result.js';
import { Run } from './run.js';
import type { Setup } from './setup.js';
import { Simulator } from './simulator.js';

/**
 * Runs a setup.
 *
 * @throws EngineError when a worker fails twice on one batch, or when the energy book-keeping does not close
 */
export async function simulate(setup: Setup, options: SimulateOptions = {}): Promise<RunResult> {
  return (await playRun(setup, options)).result();
}

/**
 * Like {@link simulate}, for those who want the state as well: that of a shard is merged with `joinStates`.
 *
 * @throws EngineError when a worker fails twice on one batch
 */
export async function playRun(setup: Setup, options: SimulateOptions = {}): Promise<Run> {
  const run = new Run(setup, options);
  const { threads, signal } = options;
  if (signal?.aborted) run.stop('interrupted');
  if (run.isOver) return run;
  const simulator = new Simulator(threads === undefined ? undefined : Math.min(threads, run.batchesLeft));
  let next: Run | null = run;
  try {
    await simulator.play({
      next: () => {
        const first = next;
        next = null;
        return first;
      },
      onTask: attendant(options),
      signal,
    });
  } finally {
    await simulator.close();
  }
  if (run.failure !== null) throw run.failure;
  if (!run.isComplete && run.batches > 0) options.checkpoint?.save(run.state());
  return run;
}

/** Reports and saves while a run is under way. */
function attendant({ onProgress, checkpoint }: SimulateOptions): (run: Run) => void {
  let savedMs = performance.now();
  const report = onProgress && ((progress: Progress | null) => progress && onProgress(progress));
  return (run) => {
    report?.(run.progress());
    if (!checkpoint || performance.now() - savedMs < 1000 * checkpoint.everyS) return;
    if (run.stopped === null && run.batches > 0) checkpoint.save(run.state());
    savedMs = performance.now();
  };
}
