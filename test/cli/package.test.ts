import { execFileSync } from 'node:child_process';
import {
  existsSync,
  mkdirSync,
  mkdtempSync,
  readFileSync,
  rmSync,
  symlinkSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { dirname, join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';

/** A folder elsewhere into which the packed package is installed. */
let elsewhere: string;
let files: string[];
let unpackedBytes: number;

interface PackReport {
  readonly filename: string;
  readonly unpackedSize: number;
  readonly files: readonly { readonly path: string }[];
}

const SETUP = 'source: {kind: beam, energy: 1 MeV}\nstack: [{name: wall, material: lead, thickness: 3 cm}]\n';

/** What a user's `npm install` would bring: the packages that the package depends on, and theirs. */
function linkDependencies(modules: string): void {
  const listed = execFileSync('npm', ['ls', '--omit=dev', '--all', '--parseable'], { encoding: 'utf8' });
  const root = join(process.cwd(), 'node_modules');
  for (const path of listed.split('\n').filter((line) => line.startsWith(root) && existsSync(line))) {
    const place = join(modules, path.slice(root.length));
    // A package inside another one comes with its outer one.
    if (!path.slice(root.length).includes('node_modules')) {
      mkdirSync(dirname(place), { recursive: true });
      symlinkSync(path, place);
    }
  }
}

beforeAll(() => {
  elsewhere = mkdtempSync(join(tmpdir(), 'thickset-packed-'));
  // Without scripts: the build that `prepare` starts would take the files away from tests that run beside this one.
  const report = execFileSync(
    'npm',
    ['pack', '--ignore-scripts', '--json', '--pack-destination', elsewhere],
    {
      encoding: 'utf8',
    },
  );
  const [packed] = JSON.parse(report) as PackReport[];
  files = packed.files.map(({ path }) => path);
  unpackedBytes = packed.unpackedSize;
  const place = join(elsewhere, 'node_modules', 'thickset');
  mkdirSync(place, { recursive: true });
  execFileSync('tar', ['-xzf', join(elsewhere, packed.filename), '-C', place, '--strip-components=1']);
  linkDependencies(join(elsewhere, 'node_modules'));
  writeFileSync(join(elsewhere, 'setup.yaml'), SETUP);
  writeFileSync(join(elsewhere, 'package.json'), '{"type": "module"}');
});
afterAll(() => rmSync(elsewhere, { recursive: true }));

function node(...args: string[]): string {
  return execFileSync(process.execPath, args, { cwd: elsewhere, encoding: 'utf8' });
}

test('the package holds built files, data, readme and licence, and nothing else', () => {
  const rest = files.filter(
    (path) => !/^dist\/(cli|engine|geometry|materials)\/.+\.(js|d\.ts|arrow)$/.test(path),
  );
  expect(rest.sort()).toEqual([
    'LICENSE',
    'README.md',
    'dist/materials/data/README.md',
    'dist/setup.schema.json',
    'dist/sweep.schema.json',
    'package.json',
  ]);
  expect(files).toContain('dist/cli/main.js');
});

test('the package is small', () => {
  // Data below 4 MB, and code.
  expect(unpackedBytes).toBeLessThan(6e6);
});

test('the installed program runs a setup and shows it', () => {
  const { bin } = JSON.parse(readFileSync(join(elsewhere, 'node_modules/thickset/package.json'), 'utf8')) as {
    bin: { thickset: string };
  };
  const program = join('node_modules/thickset', bin.thickset);
  const run = node(program, 'run', 'setup.yaml', '--out', 'out', '--histories', '20000', '--json');
  expect(JSON.parse(run)).toMatchObject({ histories: 20000, stopped: 'histories' });
  expect(node(program, 'summary', 'out')).toMatch(/transmitted +0\.\d+ +\+\/- 0\.\d+/);
  expect(node(program, 'material', 'lead')).toContain('lead');
});

test('the installed package is a library', () => {
  writeFileSync(
    join(elsewhere, 'use.js'),
    `import { readSetup, readResult, simulate, writeResult } from 'thickset';
     const setup = readSetup('setup.yaml');
     const result = await simulate({ ...setup, run: { ...setup.run, histories: 20000 } }, { threads: 1 });
     writeResult('by-program', result);
     const { manifest, totals } = readResult('by-program');
     console.log(JSON.stringify({ histories: manifest.histories, same: totals.length === result.totals.length }));`,
  );
  expect(JSON.parse(node('use.js'))).toEqual({ histories: 20000, same: true });
});
