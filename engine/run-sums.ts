/** Sums of a run: batches added in order, block by block (see batch-plan.ts). */
import type { BatchPlan } from './batch-plan.js';
import type { TallyLayout } from './tally-layout.js';

/** What one batch gives back. */
export interface BatchResult {
  readonly histories: number;
  readonly cellSum: Float64Array;
  readonly cellSquare: Float64Array;
  readonly figureSum: Float64Array;
  readonly figureSquare: Float64Array;
  /** Counts of rare oddities. */
  readonly dopplerGivenUp: number;
  /** Milliseconds since the epoch, from a monotonic clock. */
  readonly startedMs: number;
  readonly endedMs: number;
}

/** The four arrays of sums. */
export interface Sums {
  readonly cellSum: Float64Array;
  readonly cellSquare: Float64Array;
  readonly figureSum: Float64Array;
  readonly figureSquare: Float64Array;
}

const ARRAYS = ['cellSum', 'cellSquare', 'figureSum', 'figureSquare'] as const;

const NO_CELLS = { cellSum: new Float64Array(0), cellSquare: new Float64Array(0) };

/** Zero sums for a layout. */
export function emptySums(layout: TallyLayout): Sums {
  return {
    cellSum: new Float64Array(layout.cells),
    cellSquare: new Float64Array(layout.cells),
    figureSum: new Float64Array(layout.figures),
    figureSquare: new Float64Array(layout.figures),
  };
}

/** Adds `from` to `to`. */
export function addSums(to: Sums, from: Sums): void {
  for (const name of ARRAYS) {
    const target = to[name];
    const source = from[name];
    for (let i = 0; i < target.length; i++) target[i] += source[i];
  }
}

export class RunSums {
  histories = 0;
  /** Batches merged so far; they are the first ones. */
  batches = 0;
  dopplerGivenUp = 0;
  private readonly total: Sums;
  private readonly block: Sums;

  constructor(
    layout: TallyLayout,
    private readonly plan: BatchPlan,
  ) {
    this.total = emptySums(layout);
    this.block = emptySums(layout);
  }

  /** Adds the next batch in order. */
  add(result: BatchResult): void {
    addSums(this.block, result);
    this.histories += result.histories;
    this.dopplerGivenUp += result.dopplerGivenUp;
    this.batches++;
    if (this.batches % this.plan.batchesPerBlock === 0) this.closeBlock();
  }

  /** Sums of the figures alone so far; the cells are left empty. */
  figures(layout: TallyLayout): Sums {
    const sums = emptySums({ ...layout, cells: 0 });
    addSums(sums, { ...this.total, ...NO_CELLS });
    addSums(sums, { ...this.block, ...NO_CELLS });
    return sums;
  }

  /** All sums so far. */
  snapshot(layout: TallyLayout): Sums {
    const sums = emptySums(layout);
    addSums(sums, this.total);
    addSums(sums, this.block);
    return sums;
  }

  private closeBlock(): void {
    addSums(this.total, this.block);
    for (const name of ARRAYS) this.block[name].fill(0);
  }
}
