/**
 * How a run is cut up. Batches have a fixed size that depends on the setup alone; blocks are runs of consecutive
 * batches, at most 64 of them. Batches are summed in order inside a block, blocks in order into the total, so that a
 * shard that holds whole blocks can be merged to the very bits of an undivided run.
 */

/** Histories of a batch whose spectra are small. */
const BASE_BATCH = 10_000;
/** Cells of spectra up to which the base size is kept: merging a batch must stay cheap against playing it. */
const BASE_CELLS = 40_000;
export const MAX_BLOCKS = 64;

export interface BatchPlan {
  readonly histories: number;
  readonly batchSize: number;
  readonly batches: number;
  readonly batchesPerBlock: number;
}

/** Part `index` (from 1) of `count` parts of a run or sweep. */
export interface Shard {
  readonly index: number;
  readonly count: number;
}

/** Batches from `first` up to but not including `end`. */
export interface BatchRange {
  readonly first: number;
  readonly end: number;
}

/** The plan of a run of at most `histories` with `cells` spectrum cells. */
export function planBatches(histories: number, cells: number): BatchPlan {
  const batchSize = BASE_BATCH * Math.ceil(cells / BASE_CELLS);
  const batches = Math.ceil(histories / batchSize);
  return { histories, batchSize, batches, batchesPerBlock: Math.ceil(batches / MAX_BLOCKS) };
}

/** Histories of one batch: the last may be shorter. */
export function historiesOf(plan: BatchPlan, batch: number): number {
  return Math.min(plan.batchSize, plan.histories - batch * plan.batchSize);
}

/** The batches of a shard, whole blocks; none where there are more shards than blocks. All batches without a shard. */
export function rangeOf(plan: BatchPlan, shard: Shard | null): BatchRange {
  if (shard === null) return { first: 0, end: plan.batches };
  const blocks = Math.ceil(plan.batches / plan.batchesPerBlock);
  const start = (part: number) =>
    Math.min(plan.batches, Math.floor((part * blocks) / shard.count) * plan.batchesPerBlock);
  return { first: start(shard.index - 1), end: start(shard.index) };
}
