/**
 * One run: gives out its batches as tasks, merges what comes back in order, judges at each batch boundary whether its
 * aim is met, and makes the result. Who plays the tasks, and in what order they come back, changes nothing.
 */
import {
  historiesOf,
  planBatches,
  rangeOf,
  type BatchPlan,
  type BatchRange,
  type Shard,
} from './batch-plan.js';
import type { BatchTask } from './batch-worker.js';
import { compile } from './compile.js';
import { EngineError } from './errors.js';
import type { Problem } from './problem.js';
import type { Progress, RunResult, StopReason, Timings } from './result.js';
import { makeResult } from './run-result.js';
import { RunSums, type BatchResult, type RunState, type SumLengths } from './run-sums.js';
import type { Setup } from './setup.js';
import { watchFor, type Watch } from './watch.js';

/** Time a task should take, so that handing it over costs little and stopping does not wait. */
const TASK_MS = 40;
const MAX_TASK_BATCHES = 64;

export interface RunStart {
  /** Goes on from there; made by a run of the same setup and shard. */
  readonly from?: RunState | null;
  /** Plays whole blocks only, and keeps them apart. */
  readonly shard?: Shard | null;
  /** False: sums of the spectra are dropped, which makes the state small. */
  readonly spectra?: boolean;
  /** Gives out no batch after so many, those of `from` included. */
  readonly batches?: number;
}

export class Run {
  readonly problem: Problem;
  readonly plan: BatchPlan;
  readonly range: BatchRange;
  /** Why no more batches are given out; null while they are. */
  stopped: StopReason | null = null;
  /** Set when a batch failed twice. */
  failure: EngineError | null = null;
  /** Time inside batches, of this session. */
  workerMs = 0;

  private readonly sums: RunSums;
  private readonly lengths: SumLengths;
  private readonly watch: Watch;
  private readonly waiting = new Map<number, BatchResult>();
  private readonly again: BatchTask[] = [];
  private readonly triedAgain = new Set<number>();
  private readonly startMs = performance.now();
  private readonly batchLimit: number;
  private readonly earlierHistories: number;
  private nextBatch: number;
  private inHand = 0;
  private taskBatches = 1;
  private firstMs = Infinity;
  private lastMs = 0;

  /** @throws EngineError for a setup that cannot be run, or a state that does not fit it */
  constructor(
    readonly setup: Setup,
    { from = null, shard = null, spectra = true, batches = Infinity }: RunStart = {},
  ) {
    if (shard !== null) refuseUndivided(setup);
    this.problem = compile(setup);
    const { tally } = this.problem;
    this.plan = planBatches(setup.run.histories, tally.cells);
    this.range = rangeOf(this.plan, shard);
    this.lengths = { cells: spectra ? tally.cells : 0, figures: tally.figures };
    if (from !== null) checkFits(from, this.lengths, this.range);
    this.sums = new RunSums(this.lengths, this.plan, shard !== null, from);
    this.watch = watchFor(setup, this.problem);
    this.earlierHistories = this.sums.histories;
    this.nextBatch = this.range.first + this.sums.batches;
    this.batchLimit = Math.min(this.range.end, this.range.first + batches);
  }

  /** The next batches to play; null when there is nothing to play now. */
  take(): BatchTask | null {
    if (this.stopped !== null || this.failure !== null) return null;
    const task = this.again.pop() ?? this.nextTask();
    if (task !== null) this.inHand++;
    return task;
  }

  private nextTask(): BatchTask | null {
    const first = this.nextBatch;
    const count = Math.min(this.taskBatches, this.batchLimit - first);
    if (count <= 0) return null;
    const { timeLimitS } = this.setup.run;
    if (timeLimitS !== null && this.elapsedS() >= timeLimitS) {
      this.stop('time_limit');
      return null;
    }
    this.nextBatch += count;
    const histories = Array.from({ length: count }, (_, i) => historiesOf(this.plan, first + i));
    return { problem: this.problem, first, histories };
  }

  /** Takes the results of a task. */
  give({ first }: BatchTask, results: readonly BatchResult[]): void {
    this.inHand--;
    results.forEach((result, i) => this.waiting.set(first + i, result));
    this.merge();
  }

  /** A task that failed is played once more: a worker may have died of something else. */
  fail(task: BatchTask, cause: unknown): void {
    this.inHand--;
    if (this.triedAgain.has(task.first)) {
      const why = cause instanceof Error ? cause.message : String(cause);
      const message = `a worker thread failed in batch ${task.first}: ${why}`;
      this.failure ??= new EngineError('worker_failed', message, { cause });
      return;
    }
    this.triedAgain.add(task.first);
    this.again.push(task);
  }

  /** Gives out no more batches, if there are any left; those in hand are still taken. */
  stop(reason: StopReason): void {
    if (this.hasMore) this.stopped ??= reason;
  }

  private get hasMore(): boolean {
    return this.again.length > 0 || this.nextBatch < this.batchLimit;
  }

  /** Nothing is in hand and nothing more is to come. */
  get isOver(): boolean {
    return this.inHand === 0 && (this.stopped !== null || this.failure !== null || !this.hasMore);
  }

  /** Every batch of the setup or shard is merged, or its aim is met. */
  get isComplete(): boolean {
    return this.stopped === 'until' || this.range.first + this.sums.batches >= this.range.end;
  }

  get histories(): number {
    return this.sums.histories;
  }

  get batches(): number {
    return this.sums.batches;
  }

  get batchesLeft(): number {
    return this.batchLimit - this.nextBatch;
  }

  /** What to remember, at the last batch boundary; its arrays change as the run goes on. */
  state(): RunState {
    return this.sums.state();
  }

  /** Merges what is next in order; a run that met its aim drops the batches after it. */
  private merge(): void {
    for (;;) {
      const result = this.waiting.get(this.range.first + this.sums.batches);
      if (!result || this.stopped === 'until') return;
      this.waiting.delete(this.range.first + this.sums.batches);
      this.sums.add(result);
      this.note(result);
      if (this.watch.met(this.sums)) this.stopped = 'until';
    }
  }

  private note(result: BatchResult): void {
    this.firstMs = Math.min(this.firstMs, result.startedMs);
    this.lastMs = Math.max(this.lastMs, result.endedMs);
    const tookMs = result.endedMs - result.startedMs;
    this.workerMs += tookMs;
    this.taskBatches = Math.max(1, Math.min(MAX_TASK_BATCHES, Math.round(TASK_MS / Math.max(tookMs, 0.01))));
  }

  private elapsedS(): number {
    return (performance.now() - this.startMs) / 1000;
  }

  /** Null before the first batch. */
  progress(): Progress | null {
    const { histories } = this.sums;
    if (histories === 0) return null;
    const elapsedS = this.elapsedS();
    const played = Math.max(1, histories - this.earlierHistories);
    const { first, end } = this.range;
    const historiesPlanned =
      Math.min(this.plan.histories, end * this.plan.batchSize) - first * this.plan.batchSize;
    const byCount = (elapsedS * (historiesPlanned - histories)) / played;
    const byLimit = this.setup.run.timeLimitS === null ? Infinity : this.setup.run.timeLimitS - elapsedS;
    const byAim = (elapsedS * histories * (this.watch.workFactor(this.sums) - 1)) / played;
    return {
      histories,
      historiesPlanned,
      elapsedS,
      remainingS: Math.max(0, Math.min(byCount, byLimit, byAim)),
      figure: this.watch.figure(this.sums),
    };
  }

  /**
   * The result so far.
   *
   * @throws EngineError the failure, if there is one, or when the energy book-keeping does not close
   */
  result(): RunResult {
    if (this.failure !== null) throw this.failure;
    return makeResult({
      setup: this.setup,
      problem: this.problem,
      state: this.sums.state(),
      sums: this.sums.snapshot(),
      stopped: this.stopped ?? 'histories',
      timings: this.timings(),
    });
  }

  /** Times of this session. */
  timings(): Timings {
    const played = this.sums.histories - this.earlierHistories;
    return {
      wallS: this.elapsedS(),
      workerS: this.workerMs / 1000,
      historiesPerSecond: played > 0 ? (1000 * played) / (this.lastMs - this.firstMs) : 0,
    };
  }
}

/** What a run stops by must not depend on batches that another shard plays, or on the time. */
function refuseUndivided({ run }: Setup): void {
  const what = run.until !== null ? 'until' : run.timeLimitS !== null ? 'time_limit' : null;
  if (what === null) return;
  const why =
    what === 'until' ? 'no shard knows the error of the whole' : 'shards must have all their histories';
  throw new EngineError('unsupported', `a run with ${what} cannot be split into shards: ${why}`);
}

function checkFits(
  { block, batches }: RunState,
  { cells, figures }: SumLengths,
  { first, end }: BatchRange,
): void {
  if (block.cellSum.length === cells && block.figureSum.length === figures && batches <= end - first) return;
  throw new EngineError('checkpoint', 'the state saved is not one of this setup');
}
