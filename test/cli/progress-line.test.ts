import { expect, test } from 'vitest';
import type { Progress } from '../../engine/result.js';
import { makeProgressLine, progressText } from '../../cli/text/progress-line.js';

const progress: Progress = {
  histories: 1_234_000,
  historiesPlanned: 5_000_000,
  elapsedS: 10,
  remainingS: 30.2,
  figure: {
    quantity: 'full_energy',
    layer: 'crystal',
    lineKeV: 661.657,
    mean: 0.12345,
    stdError: 0.0012,
    unit: '1',
  },
};

test('the line tells histories done, the figure with its error, and the time left', () => {
  expect(progressText(progress, '±')).toBe(
    '1,234,000 of 5,000,000 histories (24 %), full_energy crystal 661.657 keV 0.1235 ± 0.0012 (0.97 %), 31 s left',
  );
});

test('what is not known yet is left out', () => {
  expect(progressText({ ...progress, figure: null, remainingS: null }, '±')).toBe(
    '1,234,000 of 5,000,000 histories (24 %)',
  );
  const figure = { quantity: 'transmitted', layer: null, lineKeV: null, mean: 0, stdError: null, unit: '1' };
  expect(progressText({ ...progress, figure, remainingS: null }, '±')).toBe(
    '1,234,000 of 5,000,000 histories (24 %), transmitted 0',
  );
});

test('the line is rewritten five times per second at most, inside the width, and removed at the end', () => {
  const written: string[] = [];
  let now = 0;
  const line = makeProgressLine(
    (text) => written.push(text),
    40,
    '±',
    () => now,
  );
  line.clear();
  for (now = 0; now < 1000; now += 10) {
    line.update(progress);
  }
  expect(written).toHaveLength(5);
  expect(written[0]).toBe('\r\x1b[K1,234,000 of 5,000,000 histories (24 %)');
  line.clear();
  line.clear();
  expect(written.slice(5)).toEqual(['\r\x1b[K']);
});
