/** Setups in which something at random is wrong: the reader either takes them or says what is wrong, and never fails. */
import { readFileSync } from 'node:fs';
import seedrandom from 'seedrandom';
import { describe, expect, it } from 'vitest';
import { parse, stringify } from 'yaml';
import { SetupError } from '../../cli/errors.js';
import { checkSetup, parseSetup } from '../../cli/setup-reader.js';

const REFERENCE: unknown = parse(readFileSync('cli/examples/reference.yaml', 'utf8'));
/** Values that are right in one place and wrong in most. */
const STRANGERS: readonly unknown[] = [
  ...[
    null,
    '',
    ' ',
    0,
    -1,
    1,
    1.5,
    NaN,
    Infinity,
    true,
    'x',
    [],
    {},
    [null],
    [[]],
    { a: 1 },
    { kind: 'beam' },
  ],
  ...[
    '1 cm',
    '-1 cm',
    '0 keV',
    '1 keV',
    '100 MeV',
    '5 %',
    '7 % at 661.7 keV',
    'vacuum',
    'lead',
    'crystal',
    'NaN keV',
  ],
  ...[
    'full_energy',
    'ambient_dose',
    '1e6',
    '../x.csv',
    '\u001b[2J',
    'x'.repeat(1000),
    '1 g/cm2',
    'deep',
    'log',
  ],
];

type Container = Record<string, unknown> | unknown[];

/** Every mapping and list in the value. */
function containers(value: unknown): Container[] {
  if (typeof value !== 'object' || value === null) return [];
  return [value as Container, ...Object.values(value).flatMap(containers)];
}

function mutate(setup: unknown, random: () => number): void {
  const pick = <T>(items: readonly T[]): T => items[Math.floor(random() * items.length)];
  const container = pick(containers(setup).filter((inner) => Object.keys(inner).length > 0));
  const key = pick(Object.keys(container)) as keyof Container;
  const action = random();
  const record = container as Record<string, unknown>;
  if (action < 0.6) record[key] = structuredClone(pick(STRANGERS));
  else if (action < 0.8) delete record[key];
  else if (Array.isArray(container)) container.push(structuredClone(container[0]));
  else record[`${String(key)}x`] = record[key];
}

/** What the reader says: nothing, or the problems. */
function verdict(read: () => unknown): string {
  try {
    read();
    return 'accepted';
  } catch (error) {
    if (!(error instanceof SetupError)) throw error;
    return error.problems.length > 0 && error.format() !== '' ? 'refused' : 'refused without a word';
  }
}

describe('Of 3000 setups with one to three things changed at random', () => {
  it('each is accepted or refused with a reason, as an object and as text alike', () => {
    const random = seedrandom('setup-mutations');
    const count = { accepted: 0, refused: 0 };
    for (let i = 0; i < 3000; i++) {
      const setup = structuredClone(REFERENCE);
      for (let changes = 1 + Math.floor(3 * random()); changes > 0; changes--) mutate(setup, random);
      const asObject = verdict(() => checkSetup(setup));
      expect(['accepted', 'refused'], JSON.stringify(setup)).toContain(asObject);
      count[asObject as keyof typeof count]++;
      if (i % 50 === 0)
        expect(verdict(() => parseSetup(stringify(setup, { aliasDuplicateObjects: false })))).toBe(asObject);
    }
    // Most changes hurt, some do not; were it otherwise, the changes would test nothing.
    expect(count.refused).toBeGreaterThan(2000);
    expect(count.accepted).toBeGreaterThan(100);
  });
});
