import { expect, test } from 'vitest';
import { makeStyle } from '../../cli/text/style.js';
import { describeTerminal } from '../../cli/text/terminal.js';

const screen = { isTTY: true, columns: 132 };
const utf8 = { TERM: 'xterm', LANG: 'en_GB.UTF-8' };

test('a terminal gets colours, block characters and its own width', () => {
  expect(describeTerminal(screen, utf8)).toEqual({
    interactive: true,
    colour: true,
    unicode: true,
    width: 132,
  });
});

test('a file or pipe gets plain ASCII, 80 wide', () => {
  expect(describeTerminal({ columns: 132 }, utf8)).toEqual({
    interactive: false,
    colour: false,
    unicode: false,
    width: 80,
  });
});

test('NO_COLOR takes the colours away and nothing else, an empty one does nothing', () => {
  expect(describeTerminal(screen, { ...utf8, NO_COLOR: '1' })).toMatchObject({
    colour: false,
    interactive: true,
  });
  expect(describeTerminal(screen, { ...utf8, NO_COLOR: '' }).colour).toBe(true);
});

test('a dumb terminal gets neither colours nor rewritten lines', () => {
  expect(describeTerminal(screen, { TERM: 'dumb' })).toMatchObject({ colour: false, interactive: false });
});

test.runIf(process.platform === 'linux').each([
  [{ LANG: 'C' }, false],
  [{ LANG: 'C', LC_ALL: 'C.UTF-8' }, true],
  [{ LC_ALL: 'C', LANG: 'en_GB.UTF-8' }, false],
  [{}, false],
])('block characters follow the locale %o: %s', (env, unicode) => {
  expect(describeTerminal(screen, { TERM: 'xterm', ...env }).unicode).toBe(unicode);
});

test('a very narrow terminal is taken as 40 wide', () => {
  expect(describeTerminal({ isTTY: true, columns: 5 }, utf8).width).toBe(40);
});

test('a style without colours adds no escape sequences', () => {
  const style = makeStyle({ interactive: false, colour: false, unicode: false, width: 80 });
  expect([style.heading('a'), style.note('b'), style.alert('c'), style.drawing('d')]).toEqual([
    'a',
    'b',
    'c',
    'd',
  ]);
  expect(style.plusMinus).toBe('+/-');
});

test('a style with colours marks headings', () => {
  expect(makeStyle({ interactive: true, colour: true, unicode: true, width: 80 }).heading('a')).toBe(
    '\x1b[1ma\x1b[22m',
  );
});
