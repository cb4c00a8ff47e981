/** Sums of a run: batches added in order, block by block (see batch-plan.ts). */
import type { BatchPlan } from './batch-plan.js';
import type { TallyLayout } from './tally-layout.js';

/** Counts of rare oddities that batches give back and runs add up. */
export const ODDITIES = ['dopplerGivenUp', 'strayed'] as const;

export type Oddities = Record<(typeof ODDITIES)[number], number>;

/** What one batch gives back. */
export interface BatchResult extends Readonly<Oddities> {
  readonly histories: number;
  readonly cellSum: Float64Array;
  readonly cellSquare: Float64Array;
  readonly figureSum: Float64Array;
  readonly figureSquare: Float64Array;
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

export const SUM_ARRAYS = ['cellSum', 'cellSquare', 'figureSum', 'figureSquare'] as const;

/** Lengths of the arrays of sums. */
export type SumLengths = Pick<TallyLayout, 'cells' | 'figures'>;

/** Everything a run has to remember at a batch boundary to go on to the same end. */
export interface RunState {
  readonly histories: number;
  /** Batches merged so far; they are the first ones of the run or shard. */
  readonly batches: number;
  readonly oddities: Readonly<Oddities>;
  /** Sums to be added up in order: one of all whole blocks together, or, in a shard, one of each whole block. */
  readonly closed: readonly Sums[];
  /** Sums of the block in hand. */
  readonly block: Sums;
}

const NO_CELLS = { cellSum: new Float64Array(0), cellSquare: new Float64Array(0) };

/** Zero sums. */
export function emptySums({ cells, figures }: SumLengths): Sums {
  return {
    cellSum: new Float64Array(cells),
    cellSquare: new Float64Array(cells),
    figureSum: new Float64Array(figures),
    figureSquare: new Float64Array(figures),
  };
}

/** Adds `from` to `to`; arrays of `to` that are empty stay so. */
export function addSums(to: Sums, from: Sums): void {
  for (const name of SUM_ARRAYS) {
    const target = to[name];
    const source = from[name];
    for (let i = 0; i < target.length; i++) target[i] += source[i];
  }
}

function copyOf(sums: Sums): Sums {
  return {
    cellSum: sums.cellSum.slice(),
    cellSquare: sums.cellSquare.slice(),
    figureSum: sums.figureSum.slice(),
    figureSquare: sums.figureSquare.slice(),
  };
}

const noOddities = (): Oddities => Object.fromEntries(ODDITIES.map((name) => [name, 0])) as Oddities;

export class RunSums {
  histories = 0;
  /** Batches merged so far; they are the first ones. */
  batches = 0;
  readonly oddities: Oddities = noOddities();
  private closed: Sums[] = [];
  private block: Sums;

  /**
   * @param keepBlocks keeps the blocks apart, for a shard that is to be merged
   * @param from goes on from there; the state may be read but not changed afterwards
   */
  constructor(
    private readonly lengths: SumLengths,
    private readonly plan: BatchPlan,
    private readonly keepBlocks = false,
    from: RunState | null = null,
  ) {
    this.block = from ? copyOf(from.block) : emptySums(lengths);
    if (!from) return;
    this.histories = from.histories;
    this.batches = from.batches;
    Object.assign(this.oddities, from.oddities);
    this.closed = from.closed.map(copyOf);
  }

  /** Adds the next batch in order. */
  add(result: BatchResult): void {
    addSums(this.block, result);
    this.histories += result.histories;
    for (const name of ODDITIES) this.oddities[name] += result[name];
    this.batches++;
    if (this.batches % this.plan.batchesPerBlock === 0) this.closeBlock();
  }

  /** Sums of the figures alone so far; the cells are left empty. */
  figures(layout: SumLengths): Sums {
    const sums = emptySums({ ...layout, cells: 0 });
    for (const part of [...this.closed, this.block]) addSums(sums, { ...part, ...NO_CELLS });
    return sums;
  }

  /** All sums so far. */
  snapshot(): Sums {
    const sums = emptySums(this.lengths);
    for (const part of [...this.closed, this.block]) addSums(sums, part);
    return sums;
  }

  /** What to remember; its arrays change as batches are added. */
  state(): RunState {
    const { histories, batches, oddities, closed, block } = this;
    return { histories, batches, oddities: { ...oddities }, closed, block };
  }

  private closeBlock(): void {
    if (this.keepBlocks || this.closed.length === 0) {
      this.closed.push(this.block);
      this.block = emptySums(this.lengths);
      return;
    }
    addSums(this.closed[0], this.block);
    for (const name of SUM_ARRAYS) this.block[name].fill(0);
  }
}
