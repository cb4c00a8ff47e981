import { describe, expect, test } from 'vitest';
import { displayWidth } from '../../cli/text/display-width.js';
import { chooseCountsAxis, energyTicks, roundUp } from '../../cli/text/plot-axes.js';
import { densityColumns, plotSpectrum } from '../../cli/text/spectrum-plot.js';

function bins(edges: readonly number[], mean: readonly number[]) {
  return { energyLowKeV: edges.slice(0, -1), energyHighKeV: edges.slice(1), mean };
}

function evenBins(count: number, widthKeV: number, height: (energyKeV: number) => number) {
  const edges = Array.from({ length: count + 1 }, (_, i) => i * widthKeV);
  return bins(
    edges,
    edges.slice(1).map((edge) => height(edge - widthKeV / 2)),
  );
}

/** A peak over a continuum that ends in an edge. */
const peaked = evenBins(350, 2, (energy) => {
  if (Math.abs(energy - 661) < 1) return 0.2;
  return energy < 477 ? 4e-4 * (1 + (energy / 477) ** 4) : energy < 600 ? 4e-5 : 0;
});

test('a spectrum with a high peak is drawn over whole decades', () => {
  const { lines, logarithmic } = plotSpectrum(peaked, { width: 72, unicode: true });
  expect(logarithmic).toBe(true);
  expect(`\n${lines.join('\n')}`).toMatchInlineSnapshot(`
    "
       1e-1 ┤
            │                                                           ▄
       1e-2 ┤                                                           █
            │                                                           █
       1e-3 ┤                                       ▁▁▁                 █
            │▅▅▅▅▅▅▅▅▅▅▅▅▅▅▅▅▅▅▅▅▅▅▅▅▆▆▆▆▆▆▆▇▇▇▇▇███████                █
       1e-4 ┤███████████████████████████████████████████                █
            │███████████████████████████████████████████▅▅▅▅▅▅▅▅▅▅▅     █
       1e-5 └┴────────┴────────┴────────┴────────┴────────┴────────┴───────┴
             0       100      200      300      400      500      600 keV"
  `);
});

test('the same spectrum in plain characters', () => {
  const { lines } = plotSpectrum(peaked, { width: 72, unicode: false });
  expect(lines.join('')).toMatch(/^[\x20-\x7e]*$/);
  expect(`\n${lines.join('\n')}`).toMatchInlineSnapshot(`
    "
       1e-1 +
            |                                                           :
       1e-2 +                                                           #
            |                                                           #
       1e-3 +                                                           #
            |::::::::::::::::::::::::::::::::###########                #
       1e-4 +###########################################                #
            |###########################################:::::::::::     #
       1e-5 ++--------+--------+--------+--------+--------+--------+-------+
             0       100      200      300      400      500      600 keV"
  `);
});

test('a flat spectrum with few bins is drawn over straight counts', () => {
  const { lines, logarithmic } = plotSpectrum(bins([0, 1, 2, 4], [1, 2, 1]), { width: 50, unicode: true });
  expect(logarithmic).toBe(false);
  expect(`\n${lines.join('\n')}`).toMatchInlineSnapshot(`
    "
          2 ┤           █████████
            │          ██████████
            │          ██████████
            │          ███████████
          1 ┤█████████████████████
            │█████████████████████
            │█████████████████████████████████████████
            │█████████████████████████████████████████
          0 └┴─────────┴──────────┴─────────┴────────┴
             0         1          2         3 keV"
  `);
});

test('unknown bins are drawn as empty ones', () => {
  const known = plotSpectrum(bins([0, 1, 2, 3], [1, 0, 2]), { width: 50, unicode: true });
  const unknown = plotSpectrum(bins([0, 1, 2, 3], [1, NaN, 2]), { width: 50, unicode: true });
  expect(unknown).toEqual(known);
});

test('an empty spectrum has no plot', () => {
  expect(plotSpectrum(bins([0, 1, 2], [0, 0]), { width: 60, unicode: true }).lines).toEqual([]);
});

test('the least content shows as a sliver', () => {
  const { lines } = plotSpectrum(bins([0, 10, 20], [1, 1e-9]), { width: 60, unicode: true });
  expect(lines.at(-3)).toMatch(/▁$/);
});

test.each([40, 57, 80, 119, 300])('no line is wider than %i cells', (width) => {
  for (const unicode of [true, false]) {
    const { lines } = plotSpectrum(peaked, { width, unicode });
    expect(Math.max(...lines.map(displayWidth))).toBeLessThanOrEqual(width);
  }
});

describe('columns share out the bins', () => {
  test.each([7, 64, 350, 1000])('%i columns hold the area of the spectrum', (columns) => {
    const density = densityColumns(peaked, columns);
    const area = density.reduce((sum, value) => sum + value, 0) * (700 / columns);
    const content = peaked.mean.reduce((sum, value) => sum + value, 0);
    // Only rounding of sums of at most 1000 terms.
    expect(Math.abs(area / content - 1)).toBeLessThan(1e-12);
  });

  test('uneven bins are taken by their width', () => {
    expect([...densityColumns(bins([0, 1, 4], [2, 3]), 4)]).toEqual([2, 1, 1, 1]);
  });
});

describe('the axes carry round numbers', () => {
  test.each([
    [0.00123, 0.002],
    [1, 1],
    [2.1, 2.5],
    [7, 10],
    [99, 100],
  ])('%f is rounded up to %f', (x, rounded) => {
    expect(roundUp(x)).toBe(rounded);
  });

  test('energy ticks are even and inside the range', () => {
    expect(energyTicks(0, 662, 7)).toEqual([0, 100, 200, 300, 400, 500, 600]);
    expect(energyTicks(12, 60, 5)).toEqual([20, 30, 40, 50, 60]);
  });

  test('a logarithmic axis has one label for each decade, on whole rows', () => {
    for (let decades = 1; decades <= 6; decades++) {
      const axis = chooseCountsAxis([...new Array<number>(50).fill(1.1), 1.1, 1.1, 0.9 * 10 ** decades * 10]);
      const rows = [...axis.labels.keys()];
      expect(rows.every(Number.isInteger)).toBe(true);
      expect([Math.min(...rows), Math.max(...rows)]).toEqual([0, axis.rows]);
    }
  });

  test('an axis never spans more than six decades', () => {
    const axis = chooseCountsAxis([1e-20, 1e-19, 1e-3, 1]);
    expect([...axis.labels.values()]).toEqual(['1e-6', '1e-5', '1e-4', '1e-3', '1e-2', '1e-1', '1e0']);
  });
});
