/** Efficiency against energy: a run of its own for each energy of a grid, all in one set of threads. */
import { EngineError } from './errors.js';
import type { Progress, QuantityRow, RunResult, StopReason, Timings, Warning } from './result.js';
import { Run } from './run.js';
import type { Setup } from './setup.js';
import { Simulator } from './simulator.js';

/** One energy of a curve. */
export interface CurvePoint {
  readonly energyKeV: number;
  /** Its run can be done by itself with this seed and this one energy, to the same bits. */
  readonly seed: string;
  readonly histories: number;
  readonly batches: number;
  /** The totals of its run, all with the energy as their line. */
  readonly totals: readonly QuantityRow[];
  readonly balance: RunResult['balance'];
  readonly warnings: readonly Warning[];
  readonly stopped: StopReason;
}

export interface EfficiencyCurve {
  readonly setup: Setup;
  /** Ascending in energy; energies that were not finished are left out. */
  readonly points: readonly CurvePoint[];
  readonly timings: Timings;
  /** interrupted: some energies are missing. */
  readonly stopped: 'histories' | 'interrupted';
}

export interface CurveOptions {
  readonly threads?: number;
  readonly signal?: AbortSignal;
  readonly onProgress?: (progress: Progress) => void;
  /** Points that an earlier, interrupted curve of the same setup has already. */
  readonly from?: readonly CurvePoint[];
  /** Called with all points so far whenever one is finished. */
  readonly onPoint?: (points: readonly CurvePoint[]) => void;
}

/** The seed of the run at one energy: any other way to ask for this energy gives the same run. */
export function curveSeed(seed: string, energyKeV: number): string {
  return `${seed} at ${energyKeV} keV`;
}

/**
 * The setup of the run at one energy of a curve. A time limit is shared out among the energies.
 *
 * @param setup one with an energy grid
 */
export function curveSetup(setup: Setup, energyKeV: number): Setup {
  const energies = setup.energyGridKeV ?? [];
  const { timeLimitS } = setup.run;
  return {
    ...setup,
    seed: curveSeed(setup.seed, energyKeV),
    source: {
      ...setup.source,
      emission: { ...setup.source.emission, lines: [{ energyKeV, perDecay: 1 }], continuum: [] },
    },
    run: { ...setup.run, timeLimitS: timeLimitS === null ? null : timeLimitS / Math.max(1, energies.length) },
    energyGridKeV: null,
  };
}

/**
 * Runs a setup at every energy of its grid.
 *
 * @throws EngineError for a setup without a grid, when a worker fails twice, or when the energy book-keeping does not
 *   close
 */
export async function simulateEfficiency(setup: Setup, options: CurveOptions = {}): Promise<EfficiencyCurve> {
  const energies = setup.energyGridKeV;
  if (!energies) throw new EngineError('unsupported', 'the setup has no grid of energies');
  const startMs = performance.now();
  const points = new Map((options.from ?? []).map((point) => [point.energyKeV, point]));
  const sorted = () => [...points.values()].sort((a, b) => a.energyKeV - b.energyKeV);
  const energyOf = new Map<Run, number>();
  const meter = new Meter(setup, energies.length, points.size);
  const left = energies.filter((energy) => !points.has(energy));
  if (left.length > 0) {
    const simulator = new Simulator(options.threads);
    try {
      await simulator.play({
        signal: options.signal,
        next: () => {
          const energyKeV = left.shift();
          if (energyKeV === undefined) return null;
          const run = new Run(curveSetup(setup, energyKeV), { spectra: false });
          energyOf.set(run, energyKeV);
          return run;
        },
        onTask: (run) => options.onProgress?.(meter.progress(run)),
        onOver: (run) => {
          meter.over(run);
          if (run.failure !== null) throw run.failure;
          if (run.stopped === 'interrupted' || run.histories === 0) return;
          const point = pointOf(energyOf.get(run)!, run.result());
          points.set(point.energyKeV, point);
          options.onPoint?.(sorted());
        },
      });
    } finally {
      await simulator.close();
    }
  }
  return {
    setup,
    points: sorted(),
    timings: meter.timings(startMs),
    stopped: points.size < energies.length ? 'interrupted' : 'histories',
  };
}

function pointOf(energyKeV: number, result: RunResult): CurvePoint {
  const { histories, batches, balance, warnings, stopped } = result;
  const totals = result.totals.map((row) => ({ ...row, lineKeV: energyKeV }));
  return { energyKeV, seed: result.setup.seed, histories, batches, totals, balance, warnings, stopped };
}

/** Work done over all energies. */
class Meter {
  private readonly startMs = performance.now();
  private histories = 0;
  private workerS = 0;
  private readonly underWay = new Set<Run>();

  constructor(
    private readonly setup: Setup,
    private readonly energies: number,
    private done: number,
  ) {}

  over(run: Run): void {
    this.underWay.delete(run);
    this.histories += run.histories;
    this.workerS += run.workerMs / 1000;
    this.done++;
  }

  /** Seen from the run a task of which came back. */
  progress(run: Run): Progress {
    this.underWay.add(run);
    const each = this.setup.run.histories;
    const inHand = [...this.underWay].reduce((sum, under) => sum + under.histories, 0);
    const histories = Math.min(this.done * each + inHand, this.energies * each);
    const elapsedS = (performance.now() - this.startMs) / 1000;
    const played = this.histories + inHand;
    return {
      histories,
      historiesPlanned: this.energies * each,
      elapsedS,
      remainingS: played > 0 ? (elapsedS * (this.energies * each - histories)) / played : null,
      figure: run.progress()?.figure ?? null,
    };
  }

  timings(startMs: number): Timings {
    const wallS = (performance.now() - startMs) / 1000;
    return { wallS, workerS: this.workerS, historiesPerSecond: wallS > 0 ? this.histories / wallS : 0 };
  }
}
