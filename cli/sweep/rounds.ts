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
/** Share of a round for points that have seen nothing while others have. */
const BLIND_SHARE = 0.5;
/** No Monte Carlo figure gets more precise than this. */
const LEAST_ERROR = 1e-9;
const BISECTIONS = 60;

/**
 * The batches each point should have after the round; points that get none are left out.
 *
 * @param points those that are not done
 * @param budgetS time of all threads together
 */
export function planRound(points: readonly PointInRound[], budgetS: number): Map<number, number> {
  const fresh = points.filter(({ batches }) => batches === 0);
  if (fresh.length > 0) return new Map(fresh.map(({ point }) => [point, 1]));
  const seen = points.filter(({ relativeError }) => relativeError < Infinity);
  const blind = doubled(
    points.filter(({ relativeError }) => relativeError === Infinity),
    seen.length > 0 ? BLIND_SHARE * budgetS : budgetS,
  );
  const round = [...blind, ...levelled(seen, budgetS - costOf(blind))];
  const chosen = round.length > 0 ? round : [least(points)];
  return new Map(chosen.map(([{ point }, batches]) => [point, batches]));
}

/** A point with the batches it should have. */
type Target = readonly [PointInRound, number];

function costOf(targets: readonly Target[]): number {
  return targets.reduce(
    (sum, [{ batches, secondsPerBatch }, aim]) => sum + (aim - batches) * secondsPerBatch,
    0,
  );
}

/** Points that have seen nothing yet are doubled, the cheapest first: some will never see anything. */
function doubled(points: readonly PointInRound[], budgetS: number): Target[] {
  const targets = points
    .map((entry): Target => [entry, Math.min(entry.batchesPlanned, 2 * entry.batches)])
    .sort((a, b) => costOf([a]) - costOf([b]));
  let spentS = 0;
  return targets.filter((target) => (spentS += costOf([target])) <= budgetS);
}

/** Brings the least precise points down to one error, by bisection over its logarithm. */
function levelled(points: readonly PointInRound[], budgetS: number): Target[] {
  const targets = (error: number) =>
    points.flatMap((entry): Target[] => {
      const batches = batchesFor(entry, error);
      return batches > entry.batches ? [[entry, batches]] : [];
    });
  const largest = points.reduce((most, { relativeError }) => Math.max(most, relativeError), LEAST_ERROR);
  // Lower than what the least precise point can reach in this round would be time spent on the wrong points.
  const lowest = points.reduce((most, entry) => Math.max(most, errorAfter(entry)), LEAST_ERROR);
  let [low, high] = [Math.log(lowest), Math.log(largest)];
  if (costOf(targets(lowest)) <= budgetS) return targets(lowest);
  for (let i = 0; i < BISECTIONS; i++) {
    const middle = (low + high) / 2;
    if (costOf(targets(Math.exp(middle))) > budgetS) low = middle;
    else high = middle;
  }
  return targets(Math.exp(high));
}

/** The error of a point that grows as much as it may. */
function errorAfter({ batches, batchesPlanned, relativeError }: PointInRound): number {
  return relativeError * Math.sqrt(batches / Math.min(batchesPlanned, MOST_GROWTH * batches));
}

/** Batches for a point to reach an error, within what it may grow in one round. */
function batchesFor({ batches, batchesPlanned, relativeError }: PointInRound, error: number): number {
  // Rounded down: a point that needs less than a batch more is good enough.
  const wanted = Math.floor(batches * (relativeError / error) ** 2);
  return Math.min(batchesPlanned, MOST_GROWTH * batches, wanted);
}

/** One more batch for the least precise point, so that every round gets on. */
function least(points: readonly PointInRound[]): Target {
  const worst = points.reduce((a, b) => (b.relativeError > a.relativeError ? b : a));
  return [worst, worst.batches + 1];
}
