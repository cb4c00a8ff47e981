/** Shards of a run, put together to what the undivided run would have written. */
import { EngineError, joinShards, type RunResult, type RunState } from '../../engine/index.js';
import { fromEngine } from '../engine-errors.js';
import { errors } from '../errors.js';
import { packResult, type PackedResult } from '../result/stored-result.js';
import { identityChanges, setupFromFacts } from './identity.js';
import { inOrder, type Part } from './merge-parts.js';
import type { ShardResult } from './shard-file.js';

/** @throws ThicksetError shards_do_not_fit, not_the_same */
export function mergeRun(parts: readonly Part<ShardResult>[]): PackedResult {
  const ordered = inOrder(parts, ({ identity }) => identity.shard!);
  const [first] = ordered;
  for (const { folder, content } of ordered) {
    const changes = identityChanges(
      { ...first.content.identity, shard: null },
      { ...content.identity, shard: null },
    );
    if (changes.length > 0) throw errors.notTheSame(folder, `run than ${first.folder}`, changes);
  }
  const shards = ordered.map(({ content }) => content);
  const { setup, text } = first.content.identity;
  const result = join(shards, setupFromFacts(setup));
  return packResult(result, { setupText: text, threads: null, finished: new Date() });
}

function join(shards: readonly ShardResult[], setup: Parameters<typeof joinShards>[0]): RunResult {
  try {
    const result = joinShards(
      setup,
      shards.map(({ state }): RunState => state),
    );
    return { ...result, timings: together(shards) };
  } catch (cause) {
    throw cause instanceof EngineError ? fromEngine(cause) : cause;
  }
}

/** As if all shards had run side by side. */
function together(shards: readonly ShardResult[]): RunResult['timings'] {
  const timings = shards.map((shard) => shard.timings);
  return {
    wallS: Math.max(...timings.map(({ wallS }) => wallS)),
    workerS: timings.reduce((sum, { workerS }) => sum + workerS, 0),
    historiesPerSecond: timings.reduce((sum, { historiesPerSecond }) => sum + historiesPerSecond, 0),
  };
}
