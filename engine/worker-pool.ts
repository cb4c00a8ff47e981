/** Worker threads that play batches. */
import { fileURLToPath } from 'node:url';
import { availableParallelism } from 'node:os';
import { Piscina } from 'piscina';
import type { BatchTask } from './batch-worker.js';
import type { BatchResult } from './run-sums.js';

export class WorkerPool {
  readonly threads: number;
  private readonly pool: Piscina;
  /** Rejects when a thread cannot be kept alive, which the pool tells apart from a failed task. */
  private readonly broken: Promise<never>;

  /** @param threads worker threads; default: the processors this process may use */
  constructor(threads?: number) {
    this.threads = threads ?? availableParallelism();
    this.pool = new Piscina({
      filename: workerFile(),
      name: 'playBatches',
      minThreads: this.threads,
      maxThreads: this.threads,
      concurrentTasksPerWorker: 1,
    });
    this.broken = new Promise((_, reject) => this.pool.on('error', reject));
    // Nobody may be waiting when it happens.
    this.broken.catch(() => undefined);
  }

  /** Plays the batches of a task in one of the threads. Rejects when the thread fails or dies. */
  run(task: BatchTask): Promise<BatchResult[]> {
    return Promise.race([this.pool.run(task) as Promise<BatchResult[]>, this.broken]);
  }

  /** Ends the threads; tasks still under way are dropped. */
  async close(): Promise<void> {
    await this.pool.destroy();
  }
}

/** Threads run compiled code only: from the sources (in tests) the built worker is taken. */
function workerFile(): string {
  const here = import.meta.url;
  const file = here.endsWith('.ts') ? '../dist/engine/batch-worker.js' : './batch-worker.js';
  return fileURLToPath(new URL(file, here));
}
