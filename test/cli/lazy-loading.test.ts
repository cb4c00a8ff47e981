import { existsSync, readFileSync } from 'node:fs';
import { dirname, join, relative } from 'node:path';
import { expect, test } from 'vitest';

/** Built files and packages that are loaded with a built file, dynamic imports apart. */
function loadedWith(file: string, seen = new Set<string>()): Set<string> {
  if (seen.has(file)) {
    return seen;
  }
  seen.add(file);
  for (const [, name] of readFileSync(file, 'utf8').matchAll(/^(?:import|export)\b[^;]*?from '([^']+)';/gm)) {
    if (name.startsWith('.')) {
      loadedWith(join(dirname(file), name), seen);
    } else {
      seen.add(name);
    }
  }
  return seen;
}

const loaded = (file: string): string[] =>
  [...loadedWith(join('dist', file))].map((name) => (existsSync(name) ? relative('dist', name) : name));

test('the walk through the imports sees packages and folders', () => {
  const run = loaded('cli/run-command.js');
  expect(run).toEqual(expect.arrayContaining(['zod', 'yaml', 'piscina', 'apache-arrow', 'engine/run.js']));
});

test('summary loads neither the engine nor the setup reader, so that it starts quickly', () => {
  const heavy = loaded('cli/summary-command.js').filter((name) =>
    /^(zod|yaml|piscina|ml-matrix|string-width|materials\/(?!nearest\.js)|geometry\/|engine\/(?!setup\.js|reliability-verdict\.js))/.test(
      name,
    ),
  );
  expect(heavy).toEqual([]);
});

test('the program loads a command only when it is asked for', () => {
  const heavy = loaded('cli/main.js').filter(
    (name) => !/^(node:|commander$|fastest-levenshtein$|cli\/|materials\/nearest\.js$)/.test(name),
  );
  expect(heavy).toEqual([]);
  expect(loaded('cli/main.js').filter((name) => /-command/.test(name))).toEqual([]);
});
