import * as fs from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { ThicksetError } from '../../cli/errors.js';
import { checkResultFolder, replaceResult, type FileSystem } from '../../cli/result/result-folder.js';
import { packResult, readResult } from '../../cli/result/stored-result.js';
import { fixtureResult } from './result-fixture.js';

let scratch: string;
beforeEach(() => {
  scratch = fs.mkdtempSync(join(tmpdir(), 'thickset-folder-'));
});
afterEach(() => fs.rmSync(scratch, { recursive: true }));

const record = { setupText: null, threads: 1, finished: new Date(0) };
const earlier = packResult(fixtureResult({ histories: 1 }), record).files;
const later = packResult(fixtureResult({ histories: 2, totals: [] }), record).files;

/** Every path below the folder with its content. */
function snapshot(folder: string): Record<string, string> {
  const names = fs.readdirSync(folder, { recursive: true }) as string[];
  return Object.fromEntries(
    names.sort().map((name) => {
      const path = join(folder, name);
      return [name, fs.statSync(path).isDirectory() ? 'folder' : fs.readFileSync(path).toString('base64')];
    }),
  );
}

type Call = keyof FileSystem;
const CALLS = [
  'mkdirSync',
  'openSync',
  'writeFileSync',
  'fsyncSync',
  'closeSync',
  'copyFileSync',
  'renameSync',
] as const satisfies Call[];

/** The real file system, but the nth call of one kind fails; `calls` counts them. */
function failing(call: Call, nth: number, code: string): { system: FileSystem; calls: () => number } {
  let count = 0;
  const system = {
    ...fs,
    [call]: (...parameters: unknown[]) => {
      if (++count === nth) {
        throw Object.assign(new Error(`${code}: injected, ${call}`), { code });
      }
      return (fs[call] as (...args: unknown[]) => unknown)(...parameters);
    },
  };
  return { system, calls: () => count };
}

function errorOf(action: () => void): ThicksetError | null {
  try {
    action();
    return null;
  } catch (error) {
    expect(error).toBeInstanceOf(ThicksetError);
    return error as ThicksetError;
  }
}

describe.each(['ENOSPC', 'EIO'])('when a call fails with %s', (code) => {
  const errorCode = code === 'ENOSPC' ? 'disk_full' : 'output_not_writable';

  test.each(CALLS)('%s in a new folder, at whichever moment, nothing is left behind', (call) => {
    const whole = failing(call, 0, code);
    replaceResult(join(scratch, 'counted', 'deep', 'out'), earlier, whole.system);
    fs.rmSync(join(scratch, 'counted'), { recursive: true });
    for (let nth = 1; nth <= whole.calls(); nth++) {
      const error = errorOf(() =>
        replaceResult(join(scratch, 'a', 'b', 'out'), later, failing(call, nth, code).system),
      );
      // After the last rename everything is in place: only its flush can still fail, and then the result is whole.
      const written = fs.existsSync(join(scratch, 'a', 'b', 'out'));
      expect(error?.code, `${call} ${nth}`).toBe(errorCode);
      expect(snapshot(scratch), `${call} ${nth}`).toEqual(
        written ? { a: 'folder', 'a/b': 'folder', 'a/b/out': 'folder', ...inFolder('a/b/out', later) } : {},
      );
      fs.rmSync(join(scratch, 'a'), { recursive: true, force: true });
    }
    expect(whole.calls() > 0).toBe(call !== 'copyFileSync');
  });

  test.each(CALLS)(
    '%s while a result is replaced, the folder holds the earlier or the new one, whole',
    (call) => {
      const folder = join(scratch, 'out');
      replaceResult(folder, earlier);
      const whole = failing(call, 0, code);
      replaceResult(folder, earlier, whole.system);
      for (let nth = 1; nth <= whole.calls(); nth++) {
        replaceResult(folder, earlier);
        const error = errorOf(() => replaceResult(folder, later, failing(call, nth, code).system));
        expect(error?.code, `${call} ${nth}`).toBe(errorCode);
        const { manifest } = readResult(folder);
        expect(snapshot(folder), `${call} ${nth}`).toEqual(
          inFolder('', manifest.histories === 1 ? earlier : later),
        );
      }
      expect(whole.calls()).toBeGreaterThan(0);
    },
  );
});

function inFolder(folder: string, files: ReadonlyMap<string, Uint8Array>): Record<string, string> {
  return Object.fromEntries(
    [...files].map(([name, content]) => [join(folder, name), Buffer.from(content).toString('base64')]),
  );
}

test('a full disk is named as such, with a way out', () => {
  const { system } = failing('writeFileSync', 1, 'ENOSPC');
  expect(
    errorOf(() => replaceResult(join(scratch, 'out'), later, system))
      ?.format()
      .replace(scratch, ''),
  ).toBe('/out: no space left; free some space and run again');
});

test('files of an earlier result that the new one has not are removed, foreign ones stay', () => {
  const folder = join(scratch, 'out');
  const depth = new Map([...earlier, ['depth.arrow', Buffer.from('x')]]);
  const manifest = JSON.parse(Buffer.from(earlier.get('manifest.json') as Uint8Array).toString()) as {
    files: Record<string, string>;
  };
  manifest.files['depth.arrow'] = '';
  manifest.files['../kept.arrow'] = '';
  depth.set('manifest.json', Buffer.from(JSON.stringify(manifest)));
  replaceResult(folder, depth);
  fs.writeFileSync(join(folder, 'notes.txt'), 'mine');
  fs.writeFileSync(join(scratch, 'kept.arrow'), 'outside');
  replaceResult(folder, later);
  expect(fs.readdirSync(folder).sort()).toEqual([
    'manifest.json',
    'notes.txt',
    'spectra.arrow',
    'totals.arrow',
  ]);
  expect(fs.existsSync(join(scratch, 'kept.arrow'))).toBe(true);
});

describe('before a run, a folder', () => {
  function refusal(name: string, overwrite: boolean): string {
    const error = errorOf(() => checkResultFolder(join(scratch, name), overwrite));
    return error === null ? 'none' : `${error.code}: ${error.format().replaceAll(`${scratch}/`, '')}`;
  }

  test('that does not exist is fine and is not made yet', () => {
    expect(refusal('new/deep', false)).toBe('none');
    expect(snapshot(scratch)).toEqual({});
  });

  test('that holds a result is refused, unless it may be replaced', () => {
    replaceResult(join(scratch, 'out'), earlier);
    expect(refusal('out', false)).toBe(
      'output_exists: out: exists already; choose another folder with --out or replace it with --overwrite',
    );
    expect(refusal('out', true)).toBe('none');
  });

  test('that is empty is refused, unless it may be replaced', () => {
    fs.mkdirSync(join(scratch, 'out'));
    expect(refusal('out', false)).toMatch(/^output_exists/);
    expect(refusal('out', true)).toBe('none');
  });

  test.each([
    ['files of its own', 'thesis.tex', ''],
    ['a manifest of something else', 'manifest.json', '{"name": "app"}'],
  ])('that holds %s is never replaced', (_, name, content) => {
    fs.mkdirSync(join(scratch, 'home'));
    fs.writeFileSync(join(scratch, 'home', name), content);
    const words =
      'output_foreign: home: holds something other than results; choose another folder with --out';
    expect(refusal('home', true)).toBe(words);
    expect(refusal('home', false)).toBe(words);
  });

  test('whose name is that of a file is refused', () => {
    fs.writeFileSync(join(scratch, 'out'), '');
    expect(refusal('out', true)).toMatch(/^output_foreign: out: is not a folder/);
    expect(refusal('out/inside', true)).toMatch(/^output_foreign: out: is not a folder/);
  });

  test('that cannot be written is refused', () => {
    const { system } = failing('accessSync', 1, 'EACCES');
    const error = errorOf(() => checkResultFolder(join(scratch, 'out'), false, system));
    expect(error?.code).toBe('output_not_writable');
  });
});
