/** The finished state of one shard of a run, as `thickset merge` reads it. */
import { join } from 'node:path';
import { decodeState, EngineError, encodeState, type RunState, type Timings } from '../../engine/index.js';
import { errors } from '../errors.js';
import { readIfThere, replaceFile } from './durable-file.js';
import type { RunIdentity } from './identity.js';
import { SHARD_NAME } from './names.js';

export interface ShardResult {
  readonly identity: RunIdentity;
  readonly timings: Timings;
  readonly state: RunState;
}

export function writeShard(folder: string, { identity, timings, state }: ShardResult): void {
  replaceFile(join(folder, SHARD_NAME), encodeState(state, JSON.stringify({ identity, timings })));
}

/** Null where there is none. @throws ThicksetError result_damaged */
export function readShard(folder: string): ShardResult | null {
  const path = join(folder, SHARD_NAME);
  const bytes = readIfThere(path);
  if (bytes === null) return null;
  try {
    const { identity, state } = decodeState(bytes);
    return { ...(JSON.parse(identity) as Pick<ShardResult, 'identity' | 'timings'>), state };
  } catch (cause) {
    if (!(cause instanceof EngineError)) throw cause;
    throw errors.resultDamaged(path, cause.message, cause);
  }
}
