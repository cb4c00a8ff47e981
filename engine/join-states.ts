/** Shards of a run put together again. */
import { EngineError } from './errors.js';
import { Run } from './run.js';
import type { RunResult } from './result.js';
import { addSums, emptySums, ODDITIES, type RunState } from './run-sums.js';
import type { Setup } from './setup.js';

/**
 * The result of an undivided run from the states of its shards, in order: blocks are added up one by one as the
 * undivided run adds them, so the bits are the same.
 *
 * @throws EngineError when they are not all the shards of this setup
 */
export function joinShards(setup: Setup, shards: Iterable<RunState>): RunResult {
  const empty = new Run(setup);
  const { cells, figures } = empty.problem.tally;
  const [total, block] = [emptySums({ cells, figures }), emptySums({ cells, figures })];
  const { oddities } = empty.state();
  const joined = { histories: 0, batches: 0, oddities: { ...oddities }, closed: [total], block };
  for (const state of shards) {
    joined.histories += state.histories;
    joined.batches += state.batches;
    for (const name of ODDITIES) joined.oddities[name] += state.oddities[name];
    for (const sums of state.closed) addSums(total, sums);
    // Only the last block of a run can be short of batches; everywhere else this adds zeros.
    addSums(block, state.block);
  }
  const run = new Run(setup, { from: joined });
  if (!run.isComplete) {
    throw new EngineError('checkpoint', `the shards hold ${run.batches} batches of ${run.plan.batches}`);
  }
  return run.result();
}
