/**
 * How the time of a sweep with a limit is spent: in rounds, each of which brings the least precise points down to one
 * common relative error, as low as the round has time for. Errors fall as one over the root of the batches.
 */

/** A point between two rounds. */
export interface PointInRound {
  readonly point: number;
  readonly batches: number;
  readonly batchesPlanned: number;
  /** Of the figure watched; Infinity while it is not known. */
  readonly relativeError: number;
  /** Of one thread. */
  readonly secondsPerBatch: number;
}

/** An error of few batches is a rough guess: no point grows by more than this factor in a round. */
const MOST_GROWTH = 4;
const BISECTIONS = 40;

/**
 * The batches each point should have after the round; points that get none are left out.
 *
 * @param points those that are not done
 * @param budgetS time of all threads together
 */
export function planRound(points: readonly PointInRound[], budgetS: number): Map<number, number> {
  const fresh = points.filter(({ batches }) => batches === 0);
  if (fresh.length > 0) return new Map(fresh.map(({ point }) => [point, 1]));
  const targets = (error: number) =>
    points.flatMap((entry) => {
      const batches = batchesFor(entry, error);
      return batches > entry.batches ? [[entry, batches] as const] : [];
    });
  const costS = (error: number) =>
    targets(error).reduce(
      (sum, [entry, batches]) => sum + (batches - entry.batches) * entry.secondsPerBatch,
      0,
    );
  const errors = points.map(({ relativeError }) => relativeError).filter(Number.isFinite);
  // The bisection runs over the logarithm of the error; the upper end costs least.
  let [low, high] = [-20, Math.log(Math.max(1e-6, ...errors))];
  for (let i = 0; i < BISECTIONS; i++) {
    const middle = (low + high) / 2;
    if (costS(Math.exp(middle)) > budgetS) low = middle;
    else high = middle;
  }
  const chosen = targets(Math.exp(high));
  const round = chosen.length > 0 ? chosen : [least(points)];
  return new Map(round.map(([{ point }, batches]) => [point, batches]));
}

/** Batches for a point to reach an error, within what it may grow in one round. */
function batchesFor({ batches, batchesPlanned, relativeError }: PointInRound, error: number): number {
  const wanted = relativeError === Infinity ? 2 * batches : batches * (relativeError / error) ** 2;
  // Rounded down: a point that needs less than a batch more is good enough.
  return Math.min(batchesPlanned, MOST_GROWTH * batches, Math.floor(wanted));
}

/** One more batch for the least precise point, so that every round gets on. */
function least(points: readonly PointInRound[]): readonly [PointInRound, number] {
  const worst = points.reduce((a, b) => (b.relativeError > a.relativeError ? b : a));
  return [worst, worst.batches + 1];
}
