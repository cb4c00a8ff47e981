import { expect, test } from 'vitest';
import { planRound, type PointInRound } from '../../cli/sweep/rounds.js';

const point = (change: Partial<PointInRound>): PointInRound => ({
  point: 0,
  batches: 10,
  batchesPlanned: 1000,
  relativeError: 0.1,
  secondsPerBatch: 1,
  ...change,
});

test('points that were never played come first, with one batch each', () => {
  const round = planRound(
    [point({ point: 0 }), point({ point: 1, batches: 0 }), point({ point: 2, batches: 0 })],
    1,
  );
  expect([...round]).toEqual([
    [1, 1],
    [2, 1],
  ]);
});

test('time goes where errors are largest, and brings them to one level', () => {
  const points = [0.04, 0.03, 0.01].map((relativeError, at) =>
    point({ point: at, relativeError, batches: 100 }),
  );
  expect([...planRound(points, 70)]).toEqual([[0, 170]]);
  const round = planRound(points, 200);
  expect([...round.keys()]).toEqual([0, 1]);
  const errors = [...round].map(([at, batches]) => points[at].relativeError * Math.sqrt(100 / batches));
  expect(errors[0] / errors[1]).toBeCloseTo(1, 2);
});

test('no time goes to points that are more precise than the least precise one can get in the round', () => {
  const points = [0.04, 0.03, 0.019].map((relativeError, at) =>
    point({ point: at, relativeError, batches: 100 }),
  );
  // A point grows by a factor of 4 at most: 0.04 gets to 0.02, and 0.03 need not get further.
  expect([...planRound(points, 1e9)]).toEqual([
    [0, 400],
    [1, 225],
  ]);
});

test.each([1, 10, 100, 1000])('a budget of %d s is kept, whatever a batch costs', (budgetS) => {
  const points = Array.from({ length: 30 }, (_, at) =>
    point({ point: at, relativeError: 0.3 / (at + 1), batches: 20, secondsPerBatch: 10 ** ((at % 4) - 2) }),
  );
  const round = planRound(points, budgetS);
  const costS = [...round].reduce(
    (sum, [at, batches]) => sum + (batches - points[at].batches) * points[at].secondsPerBatch,
    0,
  );
  expect(round.size).toBeGreaterThan(0);
  expect(costS).toBeLessThanOrEqual(Math.max(budgetS, 10));
});

test('a round without time for anything still gives the least precise point a batch', () => {
  const round = planRound([point({ point: 3, relativeError: 0.2 }), point({ point: 4 })], 0);
  expect([...round]).toEqual([[3, 11]]);
});

test('a point that has seen nothing yet is doubled, none gets more batches than planned', () => {
  const unseen = point({ point: 0, relativeError: Infinity, batches: 8 });
  const nearly = point({ point: 1, batches: 990, relativeError: 0.5 });
  const round = planRound([unseen, nearly], 1e6);
  expect(round.get(0)).toBe(16);
  expect(round.get(1)).toBe(1000);
});

test('points that see nothing take half of the time at most, the cheapest of them first', () => {
  const unseen = Array.from({ length: 10 }, (_, at) =>
    point({ point: at, relativeError: Infinity, secondsPerBatch: at + 1 }),
  );
  const round = planRound([...unseen, point({ point: 10, relativeError: 0.1, batches: 100 })], 120);
  expect([...round.keys()]).toEqual([0, 1, 2, 10]);
  expect(round.get(2)).toBe(20);
  expect(round.get(10)).toBe(160);
});
