import { beforeAll, describe, expect, test } from 'vitest';
import { displayWidth, prepareWidths, truncate } from '../../cli/text/display-width.js';
import { alignFigures, alignRight, renderTable, wrap } from '../../cli/text/text-table.js';

test('a table aligns its columns and leaves out those that are empty throughout', () => {
  const lines = renderTable([
    ['name', '', 'thickness'],
    ['window', '', '0.05 cm'],
    ['x', '', ''],
  ]);
  expect(lines).toEqual(['  name    thickness', '  window  0.05 cm', '  x']);
});

test('a table without rows has no lines', () => {
  expect(renderTable([])).toEqual([]);
});

test('figures stand with their decimal points, signs and units under each other', () => {
  const figures = [
    { value: '0.34121', error: '0.00048', unit: '' },
    { value: '561.2', error: '1.7', unit: 'keV' },
    { value: '4.123e-7', error: '0.019e-7', unit: '' },
    { value: 'unknown', error: '', unit: 'keV' },
    { value: '123500', error: '1200', unit: 'keV' },
    { value: '0', error: '', unit: '' },
  ];
  expect(`\n${alignFigures(figures, '±').join('\n')}`).toMatchInlineSnapshot(`
    "
          0.34121  ± 0.00048
        561.2      ± 1.7      keV
          4.123e-7 ± 0.019e-7
    unknown                   keV
     123500        ± 1200     keV
          0"
  `);
});

test('an empty cell stays empty when others are pushed to the right', () => {
  expect(alignRight(['5.3 %', '', '0.43 %'])).toEqual([' 5.3 %', '', '0.43 %']);
});

test('text is broken at spaces and no word is lost', () => {
  const text = 'They support design; they replace no measurement.';
  const lines = wrap(text, 20);
  expect(lines).toEqual(['They support design;', 'they replace no', 'measurement.']);
  expect(lines.join(' ')).toBe(text);
});

describe('with names in wide or combining characters', () => {
  beforeAll(() => prepareWidths(['鉛']));

  test.each([
    ['lead', 4],
    ['鉛', 2],
    ['cafe\u0301', 4],
    ['±µ²', 3],
    ['\x1b[1mbold\x1b[22m', 4],
    ['▁▂█', 3],
  ])('%s takes %i cells', (text, width) => {
    expect(displayWidth(text)).toBe(width);
  });

  test('columns still line up', () => {
    expect(
      renderTable(
        [
          ['鉛', '1'],
          ['iron', '2'],
        ],
        0,
      ),
    ).toEqual(['鉛    1', 'iron  2']);
  });

  test('a wide character is not cut in half', () => {
    expect(truncate('鉛鉛鉛', 5)).toBe('鉛鉛');
  });
});
