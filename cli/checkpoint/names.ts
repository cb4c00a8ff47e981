/** Names of files by which folders are told apart. */

/** The finished state of one shard of a run. */
export const SHARD_NAME = 'shard.bin';
/** Everything a sweep has found out. */
export const JOURNAL_NAME = 'journal.bin';
/** Shards and scripts of a sweep on a cluster; the merged sweep stands around it. */
export const SLURM_FOLDER = 'slurm';
