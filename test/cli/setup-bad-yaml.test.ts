/** Files that are no setups, are made to do harm, or lack a whole section. */
import { describe, expect, it } from 'vitest';
import { BEAM, WALL, more, stack, problemsOf } from './setup-cases.js';

describe('The YAML reader', () => {
  it.each([
    ['an empty file', '', 'is empty; a setup needs at least source and stack'],
    ['a file of comments', '# nothing\n', 'is empty; a setup needs at least source and stack'],
    [
      'a text instead of keys',
      'hello',
      'must be a mapping with keys such as title, seed, source, got hello (line 1, column 1)',
    ],
    [
      'a list instead of keys',
      '- 1\n- 2\n',
      'must be a mapping with keys such as title, seed, source, got a list (line 1, column 1)',
    ],
    [
      'a bracket that is not closed',
      'source: {kind: beam\nstack: []\n',
      'is not YAML: wrong indentation, or a bracket that is not closed above (line 2, column 1); indent all keys of a section alike',
    ],
    [
      'a quote that is not closed',
      `${WALL}\nsource: {kind: "beam, energy: 1 MeV}\n`,
      'is not YAML: a quote, a bracket or a comma is missing (line 3, column 1)',
    ],
    [
      'a tab as indentation',
      `source:\n\tkind: beam\n`,
      'is not YAML: a tab cannot indent (line 2, column 1); indent with spaces',
    ],
    [
      'two values on one line',
      `title: a: b\n`,
      'is not YAML: a second "key:" where a value should be (line 1, column 8); begin a new line with the indentation of its neighbours, or put the value in quotes',
    ],
    [
      'a second document',
      `${BEAM}\n${WALL}\n---\n${BEAM}\n`,
      'is not YAML: the file holds more than one document (line 3, column 1); remove the lines "---" and "..."',
    ],
    [
      'an older YAML',
      `%YAML 1.1\n---\n${BEAM}\n${WALL}\n`,
      'YAML 1.1 is not allowed in a setup file (line 1, column 1); remove the line "%YAML"',
    ],
    [
      'a key given twice',
      `${BEAM}\n${WALL}\nseed: a\nseed: b\n`,
      'seed: is given twice, first on line 3 (line 4, column 1); remove one of them',
    ],
    [
      'a key given twice in a layer',
      stack('material: lead, thickness: 1 cm, thickness: 2 cm'),
      'stack[0].thickness: is given twice, first on line 3 (line 3, column 39); remove one of them',
    ],
    [
      'an anchor',
      `source: &s {kind: beam, energy: 1 MeV}\n${WALL}\n`,
      'source: anchors (&name) are not allowed in a setup file (line 1, column 12); remove the anchor',
    ],
    [
      'an alias',
      `source: &s {kind: beam, energy: 1 MeV}\n${WALL}\nextent: *s\n`,
      [
        'source: anchors (&name) are not allowed in a setup file (line 1, column 12); remove the anchor',
        'extent: aliases (*name) are not allowed in a setup file (line 3, column 9); write the value again',
      ].join('\n'),
    ],
    [
      'a merge key',
      stack('<<: {material: lead}, thickness: 1 cm'),
      [
        'stack[0].material: is missing (line 3, column 5); add it, as in material: NaI',
        'stack[0]: merge keys (<<) are not allowed in a setup file (line 3, column 6); write the keys out',
      ].join('\n'),
    ],
    [
      'a tag',
      `${more('title: !!js/function "function () {}"')}`,
      'title: tags (!name) are not allowed in a setup file (line 3, column 22); remove the tag',
    ],
    [
      'a tag of a known type',
      `${more('seed: !!str 5')}`,
      'seed: tags (!name) are not allowed in a setup file (line 3, column 13); remove the tag',
    ],
    [
      'the key __proto__',
      more('__proto__: {isAdmin: true}'),
      '"__proto__" cannot be used as a name (line 3, column 1); choose another one',
    ],
    [
      'the key constructor in a section',
      more('run: {constructor: {prototype: {x: 1}}}'),
      'run: "constructor" cannot be used as a name (line 3, column 7); choose another one',
    ],
    [
      'the key prototype among materials',
      more('materials: {prototype: {formula: Fe, density: 7 g/cm3}}'),
      'materials: "prototype" cannot be used as a name (line 3, column 13); choose another one',
    ],
    [
      'a material named toString',
      more('materials: {toString: {formula: Fe, density: 7 g/cm3}}'),
      'materials.toString: "toString" cannot be used as a name (line 3, column 13); choose another one',
    ],
    [
      'a key that is a list',
      more('? [a, b]\n: 1'),
      'every key must be a text (line 3, column 3); put the key in quotes',
    ],
    ['nesting without end', `source: ${'['.repeat(100000)}`, 'is nested too deeply for a setup'],
    [
      'an escape sequence in the title',
      more('title: "\\e[2J"'),
      'title: must not hold line breaks or control characters, got \\u001b[2J (line 3, column 8)',
    ],
  ])('refuses %s', (_, text, problems) => {
    expect(problemsOf(text)).toBe(problems);
  });
});

describe('The reader of sections', () => {
  it.each([
    [
      'no source',
      WALL,
      'source: is missing (line 1, column 1); add it, as in source: {kind: beam, energy: 661.7 keV}',
    ],
    [
      'no stack',
      BEAM,
      'stack: is missing (line 1, column 1); add it, as in stack: [{material: lead, thickness: 5 cm}]',
    ],
    [
      'an unknown section',
      more('tallies: {}'),
      'tallies: unknown key (line 3, column 1); keys here: title, seed, source, materials, stack, extent, tally, physics, run',
    ],
    [
      'an unknown section far from any',
      more('zebra: 1'),
      'zebra: unknown key (line 3, column 1); keys here: title, seed, source, materials, stack, extent, tally, physics, run',
    ],
    [
      'a number as title',
      more('title: 42'),
      'title: must be a text, got 42 (line 3, column 8); put it in quotes',
    ],
    ['an empty title', more('title: "  "'), 'title: must not be empty (line 3, column 8)'],
    [
      'a fraction as seed',
      more('seed: 1.5'),
      'seed: must be a text, got 1.5 (line 3, column 7); put it in quotes',
    ],
    [
      'a section without content',
      more('physics:'),
      'physics: must be a mapping with keys such as coherent, bound_incoherent, doppler, got nothing (line 3, column 9)',
    ],
    [
      'a list where a mapping is needed',
      more('run: [1]'),
      'run: must be a mapping with keys such as histories, until, time_limit, got a list (line 3, column 6)',
    ],
    [
      'a mapping where a list is needed',
      `${BEAM}\nstack: {material: lead}\n`,
      'stack: must be a list, got a mapping (line 2, column 8)',
    ],
  ])('refuses %s', (_, text, problems) => {
    expect(problemsOf(text)).toBe(problems);
  });
});
