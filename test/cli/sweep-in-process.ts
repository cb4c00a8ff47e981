/** Sweeps played in this process, by one set of threads for all of them. */
import { Simulator, type Shard } from '../../engine/index.js';
import { readSweepFile } from '../../cli/sweep/sweep-reader.js';
import { runSweep, type SweepOutcome } from '../../cli/sweep/run-sweep.js';
import type { SweepRunOptions } from '../../cli/sweep/sweep-runner.js';

export interface SweepCase {
  readonly shard?: Shard;
  readonly resume?: boolean;
  readonly overwrite?: boolean;
  readonly options?: Partial<SweepRunOptions>;
  readonly simulator?: Pick<Simulator, 'play' | 'threads'>;
}

const NEVER = new AbortController().signal;

/** A player of sweeps; `close` ends its threads. */
export function makePlayer(threads: number) {
  const simulator = new Simulator(threads);
  const play = (path: string, out: string, given: SweepCase = {}): Promise<SweepOutcome> =>
    runSweep(
      readSweepFile(path),
      out,
      { resume: given.resume ?? false, overwrite: given.overwrite ?? false },
      given.simulator ?? simulator,
      { shard: given.shard ?? null, checkpointS: 30, signal: NEVER, ...given.options },
    );
  return { simulator, play, close: () => simulator.close() };
}
