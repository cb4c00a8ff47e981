/** What has become of the shards, by their folders: what the scheduler says of jobs is not what counts. */
import { statSync } from 'node:fs';
import { join } from 'node:path';
import { JOURNAL_NAME } from '../checkpoint/names.js';
import { errors } from '../errors.js';
import { readSweepLog } from '../sweep/sweep-log.js';
import { shardFolder } from './job-scripts.js';

/** Numbers of the shards, from 1, that have not come to their end. */
export function missingShards(out: string, shards: number): number[] {
  return Array.from({ length: shards }, (_, i) => i + 1).filter((shard) => !isFinished(out, shard));
}

function isFinished(out: string, shard: number): boolean {
  return readSweepLog(shardFolder(out, shard))?.end != null;
}

/** Bytes that shards have recorded: what grows is alive. */
export function recordedBytes(out: string, shards: readonly number[]): number {
  return shards.reduce((sum, shard) => {
    try {
      return sum + statSync(join(shardFolder(out, shard), JOURNAL_NAME)).size;
    } catch {
      return sum;
    }
  }, 0);
}

/** True when the whole sweep has been merged. */
export function isMerged(out: string): boolean {
  return readSweepLog(out)?.end != null;
}

export function logOf(out: string, shard: number): string {
  return `${shardFolder(out, shard)}.log`;
}

/** An error that says which shards do not come to an end. */
export function stuck(out: string, missing: readonly number[], told: string) {
  return errors.scheduler(
    `shards that do not come to an end: ${told}`,
    `see ${logOf(out, missing[0])}, then go on with --slurm --resume`,
  );
}
