/** A whole run: compile, play batches in worker threads, merge them in order, judge, and make the result. */
import { historiesOf, planBatches, type BatchPlan } from './batch-plan.js';
import { compile } from './compile.js';
import { topEnergyKeV } from './emission.js';
import { EngineError } from './errors.js';
import type { Problem } from './problem.js';
import type { Balance, QuantityRow, RunResult, SimulateOptions, StopReason } from './result.js';
import { RunSums, type BatchResult, type Sums } from './run-sums.js';
import type { Setup } from './setup.js';
import { FIGURE, type TallyLayout } from './tally-layout.js';
import { spectraOf, totalsOf } from './totals.js';
import { oddityWarnings, setupWarnings } from './warnings.js';
import { watchFor, type Watch } from './watch.js';
import { WorkerPool } from './worker-pool.js';

/** Energy book-keeping must close to this relative difference. */
const BALANCE_TOLERANCE = 1e-9;
/** Time a task should take, so that handing it over costs little and stopping does not wait. */
const TASK_MS = 40;
const MAX_TASK_BATCHES = 64;

/**
 * Runs a setup.
 *
 * @throws EngineError when a worker dies, or when the energy book-keeping does not close
 */
export async function simulate(setup: Setup, options: SimulateOptions = {}): Promise<RunResult> {
  const startMs = performance.now();
  const problem = compile(setup);
  const plan = planBatches(setup.run.histories, problem.tally.cells);
  const pool = new WorkerPool(
    options.threads === undefined ? undefined : Math.min(options.threads, plan.batches),
  );
  try {
    const run = new Run(setup, problem, plan, pool, options, startMs);
    await run.play();
    return run.result();
  } finally {
    await pool.close();
  }
}

class Run {
  private readonly sums: RunSums;
  private readonly watch: Watch;
  private readonly waiting = new Map<number, BatchResult>();
  private nextBatch = 0;
  private taskBatches = 1;
  private stopped: StopReason | null = null;
  private firstMs = Infinity;
  private lastMs = 0;
  private workerMs = 0;

  constructor(
    private readonly setup: Setup,
    private readonly problem: Problem,
    private readonly plan: BatchPlan,
    private readonly pool: WorkerPool,
    private readonly options: SimulateOptions,
    private readonly startMs: number,
  ) {
    this.sums = new RunSums(problem.tally, plan);
    this.watch = watchFor(setup, problem);
  }

  /** Hands out tasks, two ahead per thread, until all batches are played or something stops the run. */
  async play(): Promise<void> {
    const lanes = Array.from({ length: 2 * this.pool.threads }, () => this.lane());
    await Promise.all(lanes);
  }

  private async lane(): Promise<void> {
    while (this.stopped === null && this.nextBatch < this.plan.batches) {
      this.stopped = this.outsideStop();
      if (this.stopped !== null) return;
      const first = this.nextBatch;
      const count = Math.min(this.taskBatches, this.plan.batches - first);
      this.nextBatch += count;
      const histories = Array.from({ length: count }, (_, i) => historiesOf(this.plan, first + i));
      const results = await this.playTask(first, histories);
      results.forEach((result, i) => this.waiting.set(first + i, result));
      this.merge();
    }
  }

  private async playTask(first: number, histories: number[]): Promise<BatchResult[]> {
    try {
      return await this.pool.run({ problem: this.problem, first, histories });
    } catch (cause) {
      this.stopped ??= 'interrupted';
      throw new EngineError(
        'worker_failed',
        `a worker thread failed in batch ${first}: ${messageOf(cause)}`,
        { cause },
      );
    }
  }

  /** Merges what is next in order; a run that met its aim drops the batches after it. */
  private merge(): void {
    for (;;) {
      const result = this.waiting.get(this.sums.batches);
      if (!result || this.stopped === 'until') break;
      this.waiting.delete(this.sums.batches);
      this.sums.add(result);
      this.note(result);
      if (this.watch.met(this.sums)) this.stopped = 'until';
    }
    this.report();
  }

  private note(result: BatchResult): void {
    this.firstMs = Math.min(this.firstMs, result.startedMs);
    this.lastMs = Math.max(this.lastMs, result.endedMs);
    const tookMs = result.endedMs - result.startedMs;
    this.workerMs += tookMs;
    this.taskBatches = Math.max(1, Math.min(MAX_TASK_BATCHES, Math.round(TASK_MS / Math.max(tookMs, 0.01))));
  }

  private outsideStop(): StopReason | null {
    const { timeLimitS } = this.setup.run;
    if (this.options.signal?.aborted) return 'interrupted';
    if (timeLimitS !== null && this.elapsedS() >= timeLimitS) return 'time_limit';
    return null;
  }

  private elapsedS(): number {
    return (performance.now() - this.startMs) / 1000;
  }

  private report(): void {
    if (!this.options.onProgress || this.sums.histories === 0) return;
    const elapsedS = this.elapsedS();
    const { histories } = this.sums;
    const byCount = (elapsedS * (this.plan.histories - histories)) / histories;
    const byLimit = this.setup.run.timeLimitS === null ? Infinity : this.setup.run.timeLimitS - elapsedS;
    const byAim = elapsedS * (this.watch.workFactor(this.sums) - 1);
    this.options.onProgress({
      histories,
      historiesPlanned: this.plan.histories,
      elapsedS,
      remainingS: Math.max(0, Math.min(byCount, byLimit, byAim)),
      figure: this.watch.figure(this.sums),
    });
  }

  result(): RunResult {
    const { setup, problem, sums } = this;
    const figures = {
      setup,
      layout: problem.tally,
      historyWeight: problem.historyWeight,
      histories: sums.histories,
      sums: sums.snapshot(problem.tally),
    };
    const balance = balanceOf(figures.sums, problem.tally);
    if (balance.relativeError > BALANCE_TOLERANCE) {
      throw new EngineError(
        'balance',
        `energy is not conserved: in − deposited − out is ${balance.relativeError} of in`,
      );
    }
    return {
      setup,
      histories: sums.histories,
      batches: sums.batches,
      totals: sums.histories > 0 ? totalsOf(figures) : ([] as QuantityRow[]),
      spectra: sums.histories > 0 ? spectraOf(figures) : [],
      balance,
      warnings: [
        ...setupWarnings(setup, topEnergyKeV(problem.emission)),
        ...oddityWarnings(sums.dopplerGivenUp),
      ],
      timings: {
        wallS: this.elapsedS(),
        workerS: this.workerMs / 1000,
        historiesPerSecond: sums.histories > 0 ? (1000 * sums.histories) / (this.lastMs - this.firstMs) : 0,
      },
      stopped: this.stopped ?? 'histories',
    };
  }
}

function balanceOf(sums: Sums, layout: TallyLayout): Balance {
  const figure = (index: number) => sums.figureSum[index];
  let energyDepositedKeV = 0;
  for (let l = 0; l < layout.layers; l++) energyDepositedKeV += figure(layout.depositedFigure + l);
  const energyOutKeV =
    figure(FIGURE.transmittedEnergy) + figure(FIGURE.reflectedEnergy) + figure(FIGURE.sideEscapeEnergy);
  const energyInKeV = figure(FIGURE.sourceEnergy);
  const difference = Math.abs(energyInKeV - energyDepositedKeV - energyOutKeV);
  return {
    energyInKeV,
    energyDepositedKeV,
    energyOutKeV,
    relativeError: energyInKeV > 0 ? difference / energyInKeV : 0,
  };
}

function messageOf(cause: unknown): string {
  return cause instanceof Error ? cause.message : String(cause);
}
