/**
 * Plays the points of a sweep: one after the other, or, with a time limit, in rounds. Points overlap, so that all
 * threads are busy; what a point gives depends on its own batches alone.
 */
import { EngineError, Run, type RunState, type Shard, type Simulator } from '../../engine/index.js';
import { ThicksetError } from '../errors.js';
import { entryOfRun, failedEntry, relativeErrorOf } from './point-entry.js';
import { pointsOf } from './points-table.js';
import type { PointEntry } from './records.js';
import { planRound, type PointInRound } from './rounds.js';
import type { Sweep } from './sweep.js';
import type { SweepFolder } from './sweep-folder.js';

/** A round takes a share of the time that is left, but not so little that handing out the points would show. */
const ROUND_SHARE = 0.1;
const SHORTEST_ROUND_S = 2;

export type SweepEnd = 'complete' | 'time_limit' | 'interrupted';

export interface SweepRunOptions {
  readonly shard: Shard | null;
  readonly checkpointS: number;
  readonly signal: AbortSignal;
  /** Called after every task with the points under way. */
  readonly onProgress?: (runner: SweepRunner, playing: readonly number[]) => void;
  /** Takes messages about saved states that are damaged. */
  readonly warn?: (message: string) => void;
}

export class SweepRunner {
  readonly entries: Map<number, PointEntry>;
  /** The points this process plays, in order. */
  readonly points: readonly number[];
  private readonly underWay = new Map<Run, number>();
  private readonly earlierWorkerS = new WeakMap<Run, number>();
  private readonly failedNow = new Set<number>();
  private readonly startMs = performance.now();
  private readonly earlierS: number;
  private savedMs = performance.now();

  constructor(
    readonly sweep: Sweep,
    private readonly folder: SweepFolder,
    private readonly simulator: Pick<Simulator, 'play' | 'threads'>,
    private readonly options: SweepRunOptions,
  ) {
    this.entries = new Map(folder.log?.points);
    this.earlierS = folder.log?.elapsedS ?? 0;
    this.points = pointsOf(sweep.points, options.shard);
  }

  /** Time of all sessions. */
  get elapsedS(): number {
    return this.earlierS + (performance.now() - this.startMs) / 1000;
  }

  /** @throws ThicksetError disk_full, output_not_writable; what was recorded before is kept */
  async run(): Promise<SweepEnd> {
    this.catchUp();
    const { timeLimitS } = this.sweep;
    const end = timeLimitS === null ? await this.playAll() : await this.playRounds(timeLimitS);
    if (end !== 'interrupted') this.folder.recordEnd({ kind: 'end', reason: end, elapsedS: this.elapsedS });
    if (end === 'complete') this.folder.removeStates();
    return end;
  }

  private left(): number[] {
    return this.points.filter((point) => {
      const status = this.entries.get(point)?.status;
      // What failed in an earlier session may have failed for lack of memory: it is tried again.
      return status !== 'done' && !this.failedNow.has(point);
    });
  }

  private async playAll(): Promise<SweepEnd> {
    const { signal } = this.options;
    await this.playPoints(new Map(this.left().map((point) => [point, Infinity])), signal);
    return signal.aborted && this.left().length > 0 ? 'interrupted' : 'complete';
  }

  private async playRounds(timeLimitS: number): Promise<SweepEnd> {
    const over = new AbortController();
    const { signal } = this.options;
    const stop = () => over.abort();
    signal.addEventListener('abort', stop);
    const timer = setTimeout(stop, Math.min(2 ** 31 - 1, 1000 * Math.max(0, timeLimitS - this.elapsedS)));
    try {
      for (let left = this.left(); left.length > 0; left = this.left()) {
        if (signal.aborted) return 'interrupted';
        const remainingS = timeLimitS - this.elapsedS;
        if (remainingS <= 0) return 'time_limit';
        const roundS = Math.min(remainingS, Math.max(SHORTEST_ROUND_S, ROUND_SHARE * remainingS));
        const points = left.map((point) => this.inRound(point));
        await this.playPoints(planRound(points, roundS * this.simulator.threads), over.signal);
      }
      return 'complete';
    } finally {
      clearTimeout(timer);
      signal.removeEventListener('abort', stop);
    }
  }

  private inRound(point: number): PointInRound {
    const entry = this.entries.get(point);
    const { batches = 0, batchesPlanned = 0, workerS = 0 } = entry ?? {};
    return {
      point,
      batches,
      batchesPlanned,
      relativeError: entry ? relativeErrorOf(entry) : Infinity,
      secondsPerBatch: batches > 0 ? workerS / batches : 0,
    };
  }

  /** Plays points up to so many batches each. */
  private async playPoints(targets: ReadonlyMap<number, number>, signal: AbortSignal): Promise<void> {
    const waiting = targets.entries();
    await this.simulator.play({
      next: () => {
        for (let item = waiting.next(); !item.done; item = waiting.next()) {
          const run = this.begin(...item.value);
          if (run !== null) return run;
        }
        return null;
      },
      onTask: () => this.attend(),
      onOver: (run) => this.end(run),
      signal,
    });
  }

  /** The run of a point; null for one that cannot be played, which is recorded. */
  private begin(point: number, batches: number): Run | null {
    try {
      const { setup } = this.sweep.setupOf(point);
      const run = new Run(setup, { from: this.stateOf(point), spectra: this.sweep.spectra, batches });
      this.underWay.set(run, point);
      this.earlierWorkerS.set(run, this.entries.get(point)?.workerS ?? 0);
      return run;
    } catch (cause) {
      this.fail(point, cause);
      return null;
    }
  }

  private stateOf(point: number): RunState | null {
    if (!this.sweep.spectra) return this.entries.get(point)?.state ?? null;
    try {
      return this.folder.readState(point);
    } catch (cause) {
      if (!(cause instanceof EngineError)) throw cause;
      this.options.warn?.(
        `the saved state of point ${point + 1} is damaged, ${cause.message}: it begins anew`,
      );
      return null;
    }
  }

  private end(run: Run): void {
    const point = this.underWay.get(run)!;
    this.underWay.delete(run);
    if (run.failure !== null) this.fail(point, run.failure);
    else if (run.batches > 0) this.record(point, run);
  }

  private fail(point: number, cause: unknown): void {
    // Errors of the folder are not those of the point.
    if (cause instanceof ThicksetError && cause.code !== 'setup') throw cause;
    const message = cause instanceof Error ? cause.message : String(cause);
    this.failedNow.add(point);
    this.keep(failedEntry(point, message, this.elapsedS));
  }

  private record(point: number, run: Run): void {
    let result;
    try {
      result = run.result();
    } catch (cause) {
      if (!(cause instanceof EngineError)) throw cause;
      return this.fail(point, cause);
    }
    const workerS = (this.earlierWorkerS.get(run) ?? 0) + run.workerMs / 1000;
    const entry = entryOfRun(point, run, result, { workerS, elapsedS: this.elapsedS });
    if (!this.sweep.spectra) return this.keep(run.isComplete ? entry : { ...entry, state: run.state() });
    if (!run.isComplete) this.folder.writeState(point, run.state());
    this.folder.writeSpectra(point, result.spectra);
    this.keep(entry);
    if (run.isComplete) this.folder.removeState(point);
  }

  private keep(entry: PointEntry): void {
    this.folder.record(entry);
    this.entries.set(entry.point, entry);
  }

  /** Saves what is under way from time to time, and reports. */
  private attend(): void {
    if (performance.now() - this.savedMs >= 1000 * this.options.checkpointS) {
      for (const [run, point] of this.underWay) if (run.batches > 0) this.record(point, run);
      this.folder.renewLock();
      this.savedMs = performance.now();
    }
    this.options.onProgress?.(this, [...this.underWay.values()]);
  }

  /** A state file may be ahead of the journal by what was played just before the process was killed. */
  private catchUp(): void {
    if (!this.sweep.spectra) return;
    for (const point of this.left()) {
      const state = this.entries.has(point) ? this.stateOf(point) : null;
      if (state === null || state.batches === this.entries.get(point)!.batches) continue;
      const run = this.begin(point, state.batches);
      if (run !== null) this.end(run);
    }
  }
}
