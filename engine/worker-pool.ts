/** Worker threads that play batches. */
import { fileURLToPath } from 'node:url';
import { availableParallelism } from 'node:os';
import { Piscina } from 'piscina';
import type { BatchTask } from './batch-worker.js';
import type { BatchResult } from './run-sums.js';

export class WorkerPool {
  readonly threads: number;
  private readonly pool: Piscina;
  /** Ends the waiting for tasks in hand when a thread cannot be kept alive, which the pool tells of by itself. */
  private readonly waiting = new Set<(cause: unknown) => void>();
  private broken: { readonly cause: unknown } | null = null;

  /** @param threads worker threads; default: the processors this process may use */
  constructor(threads?: number) {
    this.threads = threads ?? availableParallelism();
    this.pool = new Piscina({
      filename: workerFile(),
      name: 'playBatches',
      minThreads: this.threads,
      maxThreads: this.threads,
      // The next task waits in the thread: between two of them it would be idle for 2 ms otherwise.
      concurrentTasksPerWorker: 2,
    });
    this.pool.on('error', (cause: unknown) => {
      this.broken = { cause };
      for (const reject of this.waiting) reject(cause);
    });
  }

  /** A thread could not be kept alive: nothing more can be played. */
  get isBroken(): boolean {
    return this.broken !== null;
  }

  /** Plays the batches of a task in one of the threads. Rejects when the thread fails or dies. */
  async run(task: BatchTask): Promise<BatchResult[]> {
    if (this.broken !== null) throw this.broken.cause;
    let giveUp: (cause: unknown) => void = () => undefined;
    try {
      // No race against a promise that lasts: it would hold on to the results of every task.
      return await new Promise<BatchResult[]>((resolve, reject) => {
        giveUp = reject;
        this.waiting.add(giveUp);
        (this.pool.run(task) as Promise<BatchResult[]>).then(resolve, reject);
      });
    } finally {
      this.waiting.delete(giveUp);
    }
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
