import { expect, test } from 'vitest';
import { Clock, progressText } from '../../cli/sweep/sweep-progress.js';
import type { PointEntry } from '../../cli/sweep/records.js';
import type { SweepRunner } from '../../cli/sweep/sweep-runner.js';

/** A point whose one figure has a mean of 1 and this error. */
function entry(point: number, status: PointEntry['status'], error: number): [number, PointEntry] {
  const rows = [{ quantity: 'transmitted', layer: null, lineKeV: null, unit: '1' }];
  const numbers = { histories: 1, batches: 1, batchesPlanned: 1, workerS: 1, elapsedS: 1 };
  const words = { stopped: null, error: null, warnings: [], state: null };
  const figures = Float64Array.of(1, error);
  return [point, { point, status, ...numbers, ...words, watched: 0, rows, figures }];
}

const runner = (entries: readonly [number, PointEntry][], elapsedS: number) =>
  ({
    entries: new Map(entries),
    points: Array.from({ length: 200 }, (_, point) => point),
    sweep: { valuesOf: (point: number) => ['lead', `${point} mm`] },
    elapsedS,
  }) as unknown as SweepRunner;

test('progress tells points done and failed, the one at hand, the largest error and the time left', () => {
  const clock = new Clock({ timeLimitS: null });
  expect(progressText(runner([], 100), [0, 1], clock)).toBe('0 of 200 points, now 1 (lead, 0 cm)');
  const entries = [
    entry(0, 'done', 0.01),
    entry(1, 'done', 0.043),
    entry(2, 'failed', NaN),
    entry(3, 'playing', 0.02),
  ];
  expect(progressText(runner(entries, 160), [3], clock)).toBe(
    '2 of 200 points, 1 failed, now 4 (lead, 0.3 cm), largest error 4.3 % at point 2, 1 h 5 min left',
  );
});

test('with a time limit the time left is that to the limit', () => {
  const clock = new Clock({ timeLimitS: 36_000 });
  expect(clock.left(18_000, 3, 200)).toBe(18_000);
  expect(clock.left(40_000, 3, 200)).toBe(0);
});

test('the pace of earlier sessions does not count', () => {
  const clock = new Clock({ timeLimitS: null });
  expect(clock.left(1000, 100, 200)).toBeNull();
  expect(clock.left(1010, 110, 200)).toBe(90);
});
