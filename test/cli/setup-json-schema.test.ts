/** The JSON Schema that editors use, and the reference file. */
import { readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { Ajv } from 'ajv';
import { describe, expect, it } from 'vitest';
import { parse } from 'yaml';
import { setupJsonSchema } from '../../cli/setup-schema.js';
import { BEAM, detector, layer, more, source, WALL } from './setup-cases.js';

const EXAMPLES = 'cli/examples';
const files = readdirSync(EXAMPLES).filter((name) => name.endsWith('.yaml'));
const schema = setupJsonSchema();
const validate = new Ajv({ strict: true, allowUnionTypes: true, strictRequired: false }).compile(schema);

interface Node {
  readonly properties?: Readonly<Record<string, Node>>;
  readonly description?: string;
}

/** Every property of the schema with the keys that lead to it. */
function properties(node: unknown, path: string): [string, Node][] {
  if (typeof node !== 'object' || node === null) return [];
  const own = Object.entries((node as Node).properties ?? {}).map(([key, inner]): [string, Node] => [
    `${path}.${key}`,
    inner,
  ]);
  const parts = Object.entries(node).filter(([key]) => key !== 'properties' && key !== 'examples');
  return [
    ...own,
    ...own.flatMap(([key, inner]) => properties(inner, key)),
    ...parts.flatMap(([, inner]) => properties(inner, path)),
  ];
}

describe('The JSON Schema', () => {
  it.each(files)('accepts %s', (name) => {
    validate(parse(readFileSync(join(EXAMPLES, name), 'utf8')));
    expect(validate.errors).toBeNull();
  });

  it.each([
    ['no stack', BEAM],
    ['an unknown key', more('tallies: {}')],
    ['an unknown kind', source('kind: pont, energy: 1 MeV')],
    ['two kinds of energy', source('kind: beam, energy: 1 MeV, nuclide: Cs-137')],
    ['no kind of energy', source('kind: beam')],
    ['a key of another kind', source('kind: beam, energy: 1 MeV, distance: 1 cm')],
    ['a missing unit', layer('material: lead, thickness: 7.62')],
    ['an unknown unit', layer('material: lead, thickness: 7.62 ft')],
    ['an empty stack', `${BEAM}\nstack: []\n`],
    ['a width table of one row', detector('{fwhm: [{energy: 662 keV, fwhm: 7 %}]}')],
    ['an extent of width alone', more('extent: {width: 1 cm}')],
    ['an unknown dose', more('tally: {dose: [air_karma]}')],
    ['a switch that is a word', more('physics: {coherent: "no"}')],
    ['a seed that is a list', `${BEAM}\n${WALL}\nseed: [1]\n`],
  ])('refuses %s', (_, text) => {
    expect(validate(parse(text))).toBe(false);
  });

  it('describes every key', () => {
    const described = properties(schema, '');
    expect(described.length).toBeGreaterThan(80);
    const silent = described.filter(([path, { description }]) => !description && !path.endsWith('.kind'));
    expect(silent.map(([path]) => path)).toEqual([]);
  });
});

describe('The reference file', () => {
  it('shows every key of the language', () => {
    const text = readFileSync(join(EXAMPLES, 'reference.yaml'), 'utf8');
    const keys = new Set(properties(schema, '').map(([path]) => path.slice(path.lastIndexOf('.') + 1)));
    expect(keys.size).toBeGreaterThan(60);
    expect(
      [...keys].filter((key) => !new RegExp(`\\b${key}: `).test(text) && !text.includes(`${key}:\n`)),
    ).toEqual([]);
  });
});
