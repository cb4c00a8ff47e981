/** Whether what is to be resumed is finished already. */
import { existsSync } from 'node:fs';
import { dirname, join } from 'node:path';
import type { Setup } from '../../engine/index.js';
import { errors } from '../errors.js';
import { MANIFEST_NAME, type Manifest } from '../result/manifest.js';
import { readManifest, readResult, type StoredResult } from '../result/stored-result.js';
import { parseSetup } from '../setup-reader.js';
import { identityChanges, runIdentity, type RunIdentity } from './identity.js';
import { CHECKPOINT_NAME } from './run-checkpoint.js';
import { readShard, type ShardResult } from './shard-file.js';

/**
 * The complete result of the run in a folder; null while there is something left to do.
 *
 * @throws ThicksetError not_the_same for the result of another run, result_damaged
 */
export function finishedRun(folder: string, setupPath: string, identity: RunIdentity): StoredResult | null {
  if (!existsSync(join(folder, MANIFEST_NAME)) || existsSync(join(folder, CHECKPOINT_NAME))) return null;
  const manifest = readManifest(folder);
  const changes = identityChanges(earlierIdentity(manifest, setupPath), identity);
  if (changes.length > 0) throw errors.notTheSame(folder, 'run', changes);
  return manifest.stopped === 'histories' || manifest.stopped === 'until' ? readResult(folder) : null;
}

/** The identity of a run from what its manifest keeps: text of the setup, and the seed and histories in its stead. */
function earlierIdentity({ setup, seed, run, version }: Manifest, setupPath: string): RunIdentity {
  const text = setup?.text ?? '';
  const read: Setup = parseSetup(text, { fileName: setupPath, directory: dirname(setupPath) }).setup;
  const earlier = { ...read, seed, run: { ...read.run, histories: run.histories } };
  return { ...runIdentity(earlier, text, null), version };
}

/** The finished shard in a folder; null while there is something left to do. Throws as `finishedRun`. */
export function finishedShard(folder: string, identity: RunIdentity): ShardResult | null {
  const shard = readShard(folder);
  if (shard === null) return null;
  const changes = identityChanges(shard.identity, identity);
  if (changes.length > 0) throw errors.notTheSame(folder, 'shard', changes);
  return shard;
}
