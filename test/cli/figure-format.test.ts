import { describe, expect, test } from 'vitest';
import {
  formatActivity,
  formatCount,
  formatDuration,
  formatFigure,
  formatNumber,
  formatPercent,
  relativeError,
} from '../../cli/text/figure-format.js';

describe('a figure shows its error to two significant figures and its value to the same place', () => {
  test.each([
    [0.341213, 0.000478, '0.34121', '0.00048'],
    [12.3456, 0.0961, '12.346', '0.096'],
    [12.3456, 0.0996, '12.35', '0.10'],
    [1.23456, 0.996, '1.2', '1.0'],
    [0.5, 0.123, '0.50', '0.12'],
    [123456, 1234, '123500', '1200'],
    [1.23456e6, 1234, '1.2346e6', '0.0012e6'],
    [4.1234e-7, 1.93e-9, '4.123e-7', '0.019e-7'],
    [9.99996e-5, 4.1e-8, '0.000100000', '0.000000041'],
    [999999.96, 1.2, '1.0000000e6', '0.0000012e6'],
    [-0.0012, 0.00034, '-0.00120', '0.00034'],
    [0.0001, 2.3, '0.0', '2.3'],
    [-0.001, 2.3, '0.0', '2.3'],
    [0, 0.02, '0.000', '0.020'],
    [1e-30, 1e-31, '1.00e-30', '0.10e-30'],
    [0.1 + 0.2, 0.00001, '0.300000', '0.000010'],
  ])('%f with an error of %f reads %s and %s', (mean, error, value, errorText) => {
    expect(formatFigure(mean, error)).toEqual({ value, error: errorText });
  });

  test.each([
    ['an error of 0', 1, 0, { value: '1', error: '' }],
    ['no error', 0.123456, null, { value: '0.1235', error: '' }],
    ['an error that is only rounding of the sum', 1.0000000001, 1e-16, { value: '1', error: '' }],
    ['no mean', null, null, { value: 'unknown', error: '' }],
    ['a mean that is no number', NaN, 1, { value: 'unknown', error: '' }],
  ])('a figure with %s shows none', (_, mean, error, text) => {
    expect(formatFigure(mean, error)).toEqual(text);
  });
});

test.each([
  [0, '0'],
  [1, '1'],
  [661.657, '661.7'],
  [37000, '37000'],
  [1e6, '1e6'],
  [0.0001, '0.0001'],
  [0.00001234, '1.234e-5'],
  [-1234567, '-1.235e6'],
])('the number %f reads %s', (x, text) => {
  expect(formatNumber(x)).toBe(text);
});

test.each([
  [0.00432, '0.43 %'],
  [0.07, '7.0 %'],
  [0.0999, '10 %'],
  [1.234, '120 %'],
  [12, '> 999 %'],
  [0, '0.0 %'],
  [null, 'unknown'],
])('the relative error %s reads %s', (fraction, text) => {
  expect(formatPercent(fraction)).toBe(text);
});

test.each([
  [0.4213, '0.42 s'],
  [9.96, '10 s'],
  [59.6, '1 min'],
  [200, '3 min 20 s'],
  [3600, '1 h'],
  [7523, '2 h 5 min'],
])('%f seconds read %s', (seconds, text) => {
  expect(formatDuration(seconds)).toBe(text);
});

test.each([
  [0, '0'],
  [999, '999'],
  [1000, '1,000'],
  [1234567, '1,234,567'],
])('the count %i reads %s', (n, text) => {
  expect(formatCount(n)).toBe(text);
});

test.each([
  [0.5, '0.5 Bq'],
  [37000, '37 kBq'],
  [3.7e10, '37 GBq'],
  [1e16, '10000 TBq'],
])('%f becquerel read %s', (becquerel, text) => {
  expect(formatActivity(becquerel)).toBe(text);
});

test('the relative error of 0 or of something unknown is unknown', () => {
  expect([relativeError(0, 1), relativeError(null, 1), relativeError(2, null), relativeError(-2, 1)]).toEqual(
    [null, null, null, 0.5],
  );
});
