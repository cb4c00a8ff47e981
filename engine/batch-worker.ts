/** What runs in a worker thread: consecutive batches of a problem, each with its own random stream. */
import { BatchTally } from './batch-tally.js';
import { runDeepBatch } from './deep/kernel.js';
import { Site } from './physics/interact.js';
import type { Kernel, Problem } from './problem.js';
import { seedStream } from './random.js';
import type { BatchResult } from './run-sums.js';
import { runSlabBatch } from './slab/kernel.js';
import { runSolidBatch } from './solid/kernel.js';

/** Batches `first`, `first + 1`, … with their numbers of histories. */
export interface BatchTask {
  readonly problem: Problem;
  readonly first: number;
  readonly histories: readonly number[];
}

const KERNELS: Record<Kernel, (problem: Problem, histories: number, site: Site, tally: BatchTally) => void> =
  {
    slab: runSlabBatch,
    solid: runSolidBatch,
    deep: runDeepBatch,
  };

/**
 * Plays the batches of a task. The sums are copied to the thread that asked, not handed over: one array given away makes
 * every access to any array check for it from then on, which costs the history loops a tenth of their speed.
 */
export function playBatches(task: BatchTask): BatchResult[] {
  return task.histories.map((histories, i) => playBatch(task.problem, task.first + i, histories));
}

/** Plays one batch in this thread. */
export function playBatch(problem: Problem, batch: number, histories: number): BatchResult {
  const startedMs = performance.timeOrigin + performance.now();
  const tally = new BatchTally(problem.tally);
  const site = new Site();
  seedStream(site.random, problem.seed, batch);
  KERNELS[problem.kernel](problem, histories, site, tally);
  return {
    histories,
    cellSum: tally.cellSum,
    cellSquare: tally.cellSquare,
    figureSum: tally.figureSum,
    figureSquare: tally.figureSquare,
    dopplerGivenUp: site.dopplerGivenUp,
    strayed: site.strayed,
    startedMs,
    endedMs: performance.timeOrigin + performance.now(),
  };
}
