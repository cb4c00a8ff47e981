/**
 * Worker threads that are started once and play any number of runs. Runs are begun in order, the next as soon as the
 * ones before have no batch left to give out: all threads are busy whether runs are long or short.
 */
import type { BatchTask } from './batch-worker.js';
import { EngineError } from './errors.js';
import type { Run } from './run.js';
import { WorkerPool } from './worker-pool.js';

/** Tasks given out ahead for each thread, so that none waits for the next. */
const TASKS_PER_THREAD = 2;

export interface Playlist {
  /** The next run to begin; null when there is none. Called only when a thread would be idle otherwise. */
  readonly next: () => Run | null;
  /** Called after each task that came back. */
  readonly onTask?: (run: Run) => void;
  /** Called once for each run when it is over; a failed one has `failure` set. */
  readonly onOver?: (run: Run) => void;
  /** Aborting finishes the tasks in hand; runs that are not over then have `stopped: 'interrupted'`. */
  readonly signal?: AbortSignal;
}

export class Simulator {
  readonly threads: number;
  private readonly pool: WorkerPool;

  /** @param threads worker threads; default: the processors this process may use */
  constructor(threads?: number) {
    this.pool = new WorkerPool(threads);
    this.threads = this.pool.threads;
  }

  /** Plays all runs of a list. Rejects when one of its functions throws, or when no thread can be kept alive. */
  async play(list: Playlist): Promise<void> {
    const desk = new Desk(list);
    const lanes = Array.from({ length: TASKS_PER_THREAD * this.threads }, () => this.lane(desk));
    for (const lane of await Promise.allSettled(lanes)) {
      if (lane.status === 'rejected') throw lane.reason;
    }
  }

  private async lane(desk: Desk): Promise<void> {
    try {
      await this.playJobs(desk);
    } catch (cause) {
      desk.close();
      throw cause;
    }
  }

  private async playJobs(desk: Desk): Promise<void> {
    for (let job = desk.take(); job !== null; job = desk.take()) {
      const { run, task } = job;
      try {
        const results = await this.pool.run(task);
        run.give(task, results);
      } catch (cause) {
        // What fails one batch fails its run; without threads there is no run to go on with.
        if (this.pool.isBroken) throw workersFailed(cause);
        run.fail(task, cause);
      }
      desk.taken(run);
    }
  }

  /** Ends the threads; tasks still under way are dropped. */
  async close(): Promise<void> {
    await this.pool.close();
  }
}

function workersFailed(cause: unknown): EngineError {
  const why = cause instanceof Error ? cause.message : String(cause);
  return new EngineError('worker_failed', `the worker threads failed: ${why}`, { cause });
}

/** Hands out the tasks of the runs under way, and begins the next run where there are none. */
class Desk {
  private readonly underWay = new Set<Run>();
  private exhausted = false;
  private closed = false;

  constructor(private readonly list: Playlist) {}

  /** Gives out nothing more. */
  close(): void {
    this.closed = true;
  }

  take(): { run: Run; task: BatchTask } | null {
    if (this.closed) return null;
    if (this.list.signal?.aborted) {
      this.interruptAll();
      return null;
    }
    for (;;) {
      for (const run of [...this.underWay]) {
        const task = run.take();
        if (task !== null) return { run, task };
        this.endIfOver(run);
      }
      const run = this.exhausted ? null : this.list.next();
      if (run === null) {
        this.exhausted = true;
        return null;
      }
      this.underWay.add(run);
    }
  }

  taken(run: Run): void {
    this.list.onTask?.(run);
    this.endIfOver(run);
  }

  private interruptAll(): void {
    for (const run of [...this.underWay]) {
      run.stop('interrupted');
      this.endIfOver(run);
    }
  }

  private endIfOver(run: Run): void {
    if (!this.underWay.has(run) || !run.isOver) return;
    this.underWay.delete(run);
    this.list.onOver?.(run);
  }
}
