import * as fs from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { Ajv } from 'ajv';
import { parse } from 'yaml';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { latinShares } from '../../cli/sweep/hypercube.js';
import { parsePath, resolvePath, withValue } from '../../cli/sweep/parameter-path.js';
import { readSweepFile } from '../../cli/sweep/sweep-reader.js';
import { sweepJsonSchema } from '../../cli/sweep/sweep-schema.js';
import type { Sweep } from '../../cli/sweep/sweep.js';
import { canonicalText, columnOf } from '../../cli/sweep/values.js';

let folder: string;
beforeAll(() => {
  folder = fs.mkdtempSync(join(tmpdir(), 'thickset-sweep-'));
  fs.writeFileSync(join(folder, 'base.yaml'), BASE);
  fs.mkdirSync(join(folder, 'below'));
  fs.writeFileSync(join(folder, 'below', 'base.yaml'), BASE);
});
afterAll(() => fs.rmSync(folder, { recursive: true }));

const BASE = `title: Shielded crystal
source: {kind: beam, energy: 661.7 keV}
stack:
  - {name: shield, material: lead, thickness: 1 cm}
  - {name: crystal, material: NaI, thickness: 5 cm, detector: {}}
run: {histories: 1e5}
`;

/** A sweep file with the given text. */
function file(text: string): string {
  const path = join(folder, 'sweep.yaml');
  fs.writeFileSync(path, text);
  return path;
}

const read = (text: string): Sweep => readSweepFile(file(text)).sweep;

/** The lines of the error of a bad sweep, without the folder. */
function problems(text: string): string[] {
  try {
    readSweepFile(file(text));
  } catch (error) {
    return (error as Error).message.replaceAll(`${folder}/`, '').split('\n');
  }
  return [];
}

const points = (sweep: Sweep) => Array.from({ length: sweep.points }, (_, point) => sweep.valuesOf(point));

describe('points', () => {
  test('of a grid are every value with every other, the last parameter changing first', () => {
    const sweep = read(`
base: base.yaml
vary:
  stack.shield.material: [lead, iron]
  stack.shield.thickness: {from: 1 cm, to: 3 cm, count: 3}
`);
    expect(points(sweep)).toEqual([
      ['lead', '1 cm'],
      ['lead', '2 cm'],
      ['lead', '3 cm'],
      ['iron', '1 cm'],
      ['iron', '2 cm'],
      ['iron', '3 cm'],
    ]);
    const { setup } = sweep.setupOf(4);
    expect(setup.stack[0]).toMatchObject({ name: 'shield', thicknessCm: 2, material: { name: 'iron' } });
    expect(setup.stack[1]).toMatchObject({ name: 'crystal', thicknessCm: 5 });
  });

  test('of a zip are first with first and second with second', () => {
    const sweep = read(`
base: base.yaml
combine: zip
vary:
  stack.shield.material: [lead, iron, iron]
  stack.shield.thickness: [1 cm, 2 cm, 4 cm]
`);
    expect(points(sweep)).toEqual([
      ['lead', '1 cm'],
      ['iron', '2 cm'],
      ['iron', '4 cm'],
    ]);
  });

  test('of a range go from end to end in equal steps or equal ratios, rounded to twelve figures', () => {
    const sweep = read(`
base: base.yaml
combine: zip
vary:
  stack.shield.thickness: {from: 0.1 cm, to: 0.4 cm, count: 4}
  source.energy: {from: 100 keV, to: 0.8 MeV, count: 4, spacing: log}
`);
    expect(points(sweep).map(([thickness]) => thickness)).toEqual(['0.1 cm', '0.2 cm', '0.3 cm', '0.4 cm']);
    expect(points(sweep).map(([, energy]) => energy)).toEqual(['100 keV', '200 keV', '400 keV', '800 keV']);
  });

  test('can be whole parts of a setup, switches and layers found by number', () => {
    const sweep = read(`
base: base.yaml
vary:
  physics.coherent: [true, false]
  'stack[1].detector': [{fwhm: 7 % at 662 keV}, {}]
`);
    expect(points(sweep)).toHaveLength(4);
    expect(sweep.setupOf(1).setup.physics.coherent).toBe(true);
    expect(sweep.setupOf(1).setup.stack[1].detector?.resolution).toBeNull();
    expect(sweep.setupOf(2).setup.physics.coherent).toBe(false);
    expect(sweep.setupOf(2).setup.stack[1].detector?.resolution).toMatchObject({ kind: 'at_energy' });
  });

  test('of a Latin hypercube hit every part of every range once', () => {
    const sweep = read(`
base: base.yaml
samples: 50
vary:
  stack.shield.thickness: {from: 1 cm, to: 51 cm}
  source.energy: {from: 10 keV, to: 1000 keV, spacing: log}
`);
    const thickness = points(sweep).map(([text]) => Math.floor(parseFloat(text as string) - 1));
    expect(thickness.sort((a, b) => a - b)).toEqual(Array.from({ length: 50 }, (_, i) => i));
    const decade = points(sweep).map(([, text]) =>
      Math.floor(25 * Math.log10(parseFloat(text as string) / 10)),
    );
    expect(decade.sort((a, b) => a - b)).toEqual(Array.from({ length: 50 }, (_, i) => i));
  });

  test('of a Latin hypercube are not correlated between parameters', () => {
    const [a, b] = [latinShares(2000, 'x', 'one'), latinShares(2000, 'x', 'two')];
    const correlation = (12 / 2000) * a.reduce((sum, share, i) => sum + (share - 0.5) * (b[i] - 0.5), 0);
    // Of independent samples the correlation is normal with sigma 1/√2000; 4 sigma, false alarm 6e-5, fixed seed.
    expect(Math.abs(correlation)).toBeLessThan(4 / Math.sqrt(2000));
  });
});

describe('the seed of a point', () => {
  const seeds = (text: string) => {
    const sweep = read(text);
    return new Map(points(sweep).map((values, at) => [values.map(canonicalText).join(), sweep.seedOf(at)]));
  };
  const small =
    'base: base.yaml\nvary:\n  stack.shield.thickness: [1 cm, 2 cm]\n  source.energy: [100 keV]\n';

  test('does not change when points are added, reordered or written in other units', () => {
    const few = seeds(small);
    const many = seeds(
      small.replace('[1 cm, 2 cm]', '[0.5 cm, 20 mm, 10 mm]').replace('[100 keV]', '[50 keV, 0.1 MeV]'),
    );
    for (const [values, seed] of few) expect(many.get(values)).toBe(seed);
    expect(new Set(many.values()).size).toBe(6);
  });

  test('does not depend on the order of the parameters', () => {
    const turned = read(
      'base: base.yaml\nvary:\n  source.energy: [100 keV]\n  stack.shield.thickness: [2 cm]\n',
    );
    expect(turned.seedOf(0)).toBe(read(small).seedOf(1));
  });

  test('follows from the seed of the sweep', () => {
    expect(read(`seed: a\n${small}`).seedOf(0)).toMatch(/^a\/[0-9a-f]{16}$/);
    expect(read(`seed: b\n${small}`).seedOf(0)).not.toBe(read(`seed: a\n${small}`).seedOf(0));
  });
});

describe('the example', () => {
  const text = fs.readFileSync('cli/examples/sweep/shield.yaml', 'utf8');
  const schema = sweepJsonSchema();

  test('is a sweep, and shows every key there is', () => {
    const { sweep } = readSweepFile('cli/examples/sweep/shield.yaml');
    expect(sweep.points).toBe(16);
    expect(sweep.setupOf(15).setup.stack[0]).toMatchObject({ thicknessCm: 5, material: { name: 'steel' } });
    const keys = Object.keys(schema.properties as object);
    expect(keys.length).toBeGreaterThan(8);
    for (const key of keys) expect(text).toMatch(new RegExp(`^(# )?${key}:`, 'm'));
  });

  test('is accepted by the JSON Schema, which refuses what is no sweep', () => {
    const validate = new Ajv({ strict: true, allowUnionTypes: true, strictRequired: false }).compile(schema);
    expect(validate(parse(text)), JSON.stringify(validate.errors)).toBe(true);
    for (const bad of [
      'base: a.yaml',
      'base: a.yaml\nvary: {x: 3}',
      'base: a.yaml\nvary: {x: [3]}\ncombine: all',
    ]) {
      expect(validate(parse(bad)), bad).toBe(false);
    }
  });
});

describe('the precision', () => {
  test('of a point is that of its leading figure, or of the figure named', () => {
    const vary = 'vary: {stack.shield.thickness: [1 cm]}\n';
    const leading = read(`base: base.yaml\nprecision: 1 %\n${vary}`).setupOf(0).setup;
    expect(leading.run.until).toEqual({ quantity: 'full_energy', layer: null, relativeError: 0.01 });
    const named = 'precision: {quantity: deposited_energy, layer: shield, relative_error: 0.02}\n';
    expect(read(`base: base.yaml\n${named}${vary}`).setupOf(0).setup.run.until).toEqual({
      quantity: 'deposited_energy',
      layer: 'shield',
      relativeError: 0.02,
    });
  });
});

test('a time limit of the base is left out with a warning, for it would make points depend on the machine', () => {
  fs.writeFileSync(join(folder, 'limited.yaml'), BASE.replace('1e5}', '1e5, time_limit: 10 s}'));
  const { sweep, warnings } = readSweepFile(
    file('base: limited.yaml\nvary: {stack.shield.thickness: [1 cm, 2 cm]}\n'),
  );
  expect(sweep.setupOf(0).setup.run.timeLimitS).toBeNull();
  expect(warnings).toMatchObject([{ code: 'point_time_limit', count: 2 }]);
});

test('a base below the folder of the sweep file is taken, and a base may stand in the sweep file', () => {
  const below = read('base: below/base.yaml\nvary: {stack.shield.thickness: [1 cm]}\n');
  expect(below.title).toBe('Shielded crystal');
  const inline = read(`base:\n${BASE.replace(/^/gm, '  ')}\nvary: {stack.shield.thickness: [1 cm]}\n`);
  expect(inline.setupOf(0).setup.stack).toEqual(below.setupOf(0).setup.stack);
});

describe('bad sweeps are told with all their problems:', () => {
  const base = 'base: base.yaml\n';
  test.each<[string, string, string[]]>([
    [
      'values that no setup takes, each at its place, once',
      `${base}vary:\n  stack.shield.thickness: [1 cm, -2 cm, 3]\n  stack.shield.material: [lead, leed, iron]\n`,
      [
        'sweep.yaml: vary["stack.shield.thickness"][1]: must be more than 0, got -2 cm (line 3, column 34)',
        'sweep.yaml: vary["stack.shield.thickness"][2]: needs a unit, got 3 (line 3, column 41); write one of',
        'sweep.yaml: vary["stack.shield.material"][1]: unknown material "leed" (line 4, column 33); did you mean lead?',
      ],
    ],
    [
      'a layer that is not there',
      `${base}vary:\n  stack.shild.thickness: [1 cm]\n`,
      [
        'sweep.yaml: vary["stack.shild.thickness"]: unknown entry of stack "shild" (line 3, column 3); did you mean shield?',
      ],
    ],
    [
      'a key that is not there',
      `${base}vary:\n  source.enrgy: [1 MeV]\n`,
      ['sweep.yaml: vary["source.enrgy"]: unknown key (line 3, column 3); did you mean energy?'],
    ],
    [
      'a path through a value',
      `${base}vary:\n  source.energy.low: [1 MeV]\n`,
      [
        'sweep.yaml: vary["source.energy.low"]: leads nowhere: source.energy is a single value (line 3, column 3)',
      ],
    ],
    [
      'a path that is none',
      `${base}vary:\n  stack[: [1 cm]\n`,
      ['sweep.yaml: vary["stack["]: is no path into a setup (line 3, column 3); write it as in'],
    ],
    [
      'a list position that is not there',
      `${base}vary:\n  'stack[7].thickness': [1 cm]\n`,
      ['leads nowhere: stack has 2 entries, numbered from 0 (line 3, column 3)'],
    ],
    [
      'ranges that are none',
      `${base}vary:\n  stack.shield.thickness: {from: 3 cm, to: 1 cm, count: 4}\n  source.energy: {from: 1 keV, to: 3 cm, count: 2}\n`,
      [
        'vary["stack.shield.thickness"].to: must be above from, 3 cm, got 1 cm (line 3, column 44)',
        'vary["source.energy"].to: must be of the same kind as from, 1 keV, got 3 cm (line 4, column 36)',
      ],
    ],
    [
      'a range without a number of values',
      `${base}vary:\n  stack.shield.thickness: {from: 1 cm, to: 3 cm}\n`,
      ['vary["stack.shield.thickness"].count: is missing (line 3, column 27); add it'],
    ],
    [
      'a range of names',
      `${base}vary:\n  stack.shield.material: {from: lead, to: iron, count: 2}\n`,
      [
        'vary["stack.shield.material"].from: must be a number, with its unit where it has one, got lead',
        'vary["stack.shield.material"].to: must be a number, with its unit where it has one, got iron',
      ],
    ],
    [
      'equal values in a grid, whatever their unit',
      `${base}vary:\n  stack.shield.thickness: [1 cm, 10 mm]\n`,
      [
        'vary["stack.shield.thickness"][1]: "1 cm" is given twice, first in vary["stack.shield.thickness"][0]',
      ],
    ],
    [
      'equal points in a zip',
      `${base}combine: zip\nvary:\n  stack.shield.thickness: [1 cm, 2 cm, 1 cm]\n`,
      [
        'vary["stack.shield.thickness"][2]: points 1 and 3 are the same (line 4, column 40); remove one of them',
      ],
    ],
    [
      'lists of different length in a zip',
      `${base}combine: zip\nvary:\n  stack.shield.thickness: [1 cm, 2 cm]\n  source.energy: [1 MeV]\n`,
      ['combine: zip needs lists of equal length, but stack.shield.thickness has 2, source.energy has 1'],
    ],
    [
      'too many points',
      `${base}vary:\n  stack.shield.thickness: {from: 1 cm, to: 2 cm, count: 1000}\n  source.energy: {from: 10 keV, to: 1 MeV, count: 101}\n`,
      ['vary: asks for 101000 points, the limit is 100000 (line 2, column 1); take fewer values, or samples'],
    ],
    [
      'a parameter inside another',
      `${base}vary:\n  stack.crystal: [{name: crystal, material: NaI, thickness: 1 cm}]\n  stack.crystal.thickness: [1 cm]\n`,
      ['vary["stack.crystal.thickness"]: lies in stack.crystal, which is varied too (line 4, column 3)'],
    ],
    [
      'samples of a grid, and counts in samples',
      `${base}samples: 5\ncombine: grid\nvary:\n  stack.shield.thickness: {from: 1 cm, to: 2 cm, count: 3}\n`,
      [
        'combine: does not go with samples (line 3, column 1); remove one of them',
        'vary["stack.shield.thickness"].count: does not go with samples, which says how many values there are',
      ],
    ],
    [
      'a base that is not there',
      'base: nowhere.yaml\nvary: {source.energy: [1 MeV]}\n',
      ['sweep.yaml: base: file "nowhere.yaml" does not exist (line 1, column 7)'],
    ],
    [
      'a base outside the folder',
      'base: ../base.yaml\nvary: {source.energy: [1 MeV]}\n',
      ['sweep.yaml: base: must lie in the folder of the sweep file or below it, got ../base.yaml'],
    ],
    [
      'no base and nothing to vary',
      'title: nothing\n',
      ['sweep.yaml: base: is missing', 'sweep.yaml: vary: is missing'],
    ],
    ['an empty file', '', ['sweep.yaml: is empty; a sweep needs at least base and vary']],
    [
      'an unknown key',
      `${base}very: {}\n`,
      ['sweep.yaml: very: unknown key (line 2, column 1); did you mean vary?'],
    ],
    [
      'a precision of a figure that the setup does not give',
      `${base}precision: {quantity: side_escape, relative_error: 1 %}\nvary: {source.energy: [1 MeV]}\n`,
      ['sweep.yaml: precision.quantity: side_escape needs layers with an edge (line 2, column 23)'],
    ],
    [
      'problems of the base, told with its own file and place',
      'base: broken.yaml\nvary:\n  source.energy: [1 MeV, 2 MeV]\n',
      ['broken.yaml: stack[0].thickness: must be more than 0, got 0 cm (line 4, column 47)'],
    ],
    [
      'problems that only some points have, with how many',
      `${base}vary:\n  source.kind: [beam, disc]\n  source.energy: [1 MeV, 2 MeV]\n`,
      [
        'base.yaml: source.distance: is missing (in point 3 and 1 more) (line 2, column 9); add it',
        'base.yaml: source.radius: is missing (in point 3 and 1 more) (line 2, column 9); add it',
      ],
    ],
    [
      'an efficiency curve, which is a sweep of its own',
      'base: curve.yaml\nvary: {stack.shield.thickness: [1 cm]}\n',
      [
        'curve.yaml: source.energies: is a sweep of its own (line 2, column 32); give source.energy, and vary it',
      ],
    ],
  ])('%s', (_, text, expected) => {
    fs.writeFileSync(join(folder, 'broken.yaml'), BASE.replace('1 cm', '0 cm'));
    const curve = 'energies: {from: 100 keV, to: 1 MeV, count: 5}';
    fs.writeFileSync(join(folder, 'curve.yaml'), BASE.replace('energy: 661.7 keV', curve));
    const told = problems(text);
    expect(told).toHaveLength(expected.length);
    expected.forEach((words, at) => expect(told[at]).toContain(words));
  });
});

describe('paths', () => {
  test.each([
    ['stack.outer wall.thickness', ['stack', 'outer wall', 'thickness']],
    ['source.lines[0].energy', ['source', 'lines', 0, 'energy']],
    ['stack["Pb 0.5"].material', ['stack', 'Pb 0.5', 'material']],
    ['seed', ['seed']],
  ])('%s has its steps', (text, steps) => expect(parsePath(text)).toEqual(steps));

  test.each(['', '.', '.a', 'a..b', 'a.', 'a[', 'a[x]', 'a["b]', 'a]'])('"%s" is none', (text) => {
    expect(parsePath(text)).toBeNull();
  });

  test('leave what is beside them as it is', () => {
    const raw = { a: [{ name: 'x', b: 1 }, { name: 'y' }], c: { d: 2 } };
    const path = resolvePath(raw, ['a', 'y', 'b', 'deep']) as (string | number)[];
    expect(path).toEqual(['a', 1, 'b', 'deep']);
    const changed = withValue(raw, path, 3) as typeof raw;
    expect(changed).toEqual({
      a: [
        { name: 'x', b: 1 },
        { name: 'y', b: { deep: 3 } },
      ],
      c: { d: 2 },
    });
    expect(changed.c).toBe(raw.c);
    expect(raw.a[1]).toEqual({ name: 'y' });
  });
});

test('columns are numbers in one unit where all values are, texts otherwise', () => {
  expect(columnOf(['10 mm', '2 cm', '1 m'])).toEqual({ unit: 'cm', values: [1, 2, 100] });
  expect(columnOf([1, '2e3'])).toEqual({ unit: '', values: [1, 2000] });
  expect(columnOf(['1 cm', '2 g/cm2'])).toEqual({ unit: null, values: ['1 cm', '2 g/cm2'] });
  expect(columnOf(['lead', true, { fwhm: '7 %' }])).toEqual({
    unit: null,
    values: ['lead', 'true', '{fwhm: 7 %}'],
  });
});
