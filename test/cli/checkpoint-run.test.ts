import * as fs from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { arrowFiles, runKilled, startCli } from './kills.js';
import { runCli, runShell } from './run-cli.js';

const SETUP = `title: Crystal
source: {kind: point, distance: 10 cm, energy: 661.7 keV}
stack:
  - {name: window, material: aluminium, thickness: 0.5 mm}
  - {name: crystal, material: NaI, thickness: 5 cm, detector: {}}
tally: {energy_bins: {width: 10 keV}}
run: {histories: 1.5e6}
`;

let folder: string;
const thickset = (...args: string[]) => runCli(args, { cwd: folder });
const names = (of: string) => fs.readdirSync(join(folder, of)).sort();

beforeAll(async () => {
  folder = fs.mkdtempSync(join(tmpdir(), 'thickset-checkpoint-'));
  fs.writeFileSync(join(folder, 'setup.yaml'), SETUP);
  const { code } = await thickset('run', 'setup.yaml', '--out', 'whole', '--quiet');
  expect(code).toBe(0);
});
afterAll(() => fs.rmSync(folder, { recursive: true }));

test('a run killed at random moments and resumed ends with the files of an undisturbed one', async () => {
  const args = ['run', 'setup.yaml', '--out', 'killed', '--resume', '--quiet', '--checkpoint', '100 ms'];
  const { code, killed } = await runKilled(args, { cwd: folder, kills: 5, seed: 'run', lifeMs: [500, 1800] });
  expect(code).toBe(0);
  expect(killed).toBeGreaterThan(1);
  expect(arrowFiles(join(folder, 'killed'))).toEqual(arrowFiles(join(folder, 'whole')));
  expect(names('killed')).toEqual(['manifest.json', 'spectra.arrow', 'totals.arrow']);
});

describe('a run that was stopped before its end', () => {
  const checkpoint = () => join(folder, 'stopped', 'checkpoint.bin');
  beforeAll(async () => {
    const args = ['run', 'setup.yaml', '--out', 'stopped', '--quiet', '--checkpoint', '20 ms'];
    const { child, ended, until } = startCli(args, folder);
    await until(() => fs.existsSync(join(folder, 'stopped', 'checkpoint-previous.bin')));
    child.kill('SIGINT');
    expect(await ended).toBe(7);
  });

  test('leaves its result so far, and two states to go on from', () => {
    expect(names('stopped')).toEqual([
      'checkpoint-previous.bin',
      'checkpoint.bin',
      'manifest.json',
      'spectra.arrow',
      'totals.arrow',
    ]);
  });

  test('is not overwritten by a new run without being asked', async () => {
    const { code, stderr } = await thickset('run', 'setup.yaml', '--out', 'stopped');
    expect({ code, stderr }).toEqual({
      code: 4,
      stderr:
        'stopped: holds an unfinished run; go on with --resume, replace it with --overwrite, ' +
        'or choose another folder with --out\n',
    });
  });

  test.each([
    ['--seed', 'other', 'seed was thickset, is other'],
    ['--histories', '2e6', 'run.histories was 1500000, is 2000000'],
    ['--shard', '1/2', 'shard was not there, is 1/2'],
  ])('is not resumed with another %s', async (option, value, change) => {
    const args = ['run', 'setup.yaml', '--out', 'stopped', '--resume', option, value];
    const { code, stderr } = await thickset(...args);
    expect(code).toBe(2);
    expect(stderr).toContain(`stopped: holds another run: ${change}`);
  });

  test('is not resumed by a changed setup, and says what has changed', async () => {
    fs.writeFileSync(join(folder, 'changed.yaml'), SETUP.replace('5 cm', '6 cm').replace('0.5 mm', '1 mm'));
    const { code, stderr } = await thickset('run', 'changed.yaml', '--out', 'stopped', '--resume');
    expect(code).toBe(2);
    expect(stderr).toMatch(
      /holds another run: stack\.window\.thickness was 0\.05 cm, is 0\.1 cm; stack\.crystal\.thickness was 5 cm, is 6 cm; undo/,
    );
  });

  test('is resumed from the state before when the last one is torn or damaged, to the same end', async () => {
    const whole = arrowFiles(join(folder, 'whole'));
    const bytes = fs.readFileSync(checkpoint());
    const torn = bytes.subarray(0, bytes.length - 1000);
    const flipped = Buffer.from(bytes);
    flipped[bytes.length >> 1] ^= 4;
    for (const [name, damaged] of Object.entries({ torn, flipped })) {
      fs.cpSync(join(folder, 'stopped'), join(folder, name), { recursive: true });
      fs.writeFileSync(join(folder, name, 'checkpoint.bin'), damaged);
      const { code, stderr } = await thickset('run', 'setup.yaml', '--out', name, '--resume');
      expect(code).toBe(0);
      expect(stderr).toContain(`warning: ${name}/checkpoint.bin is damaged, its checksum does not fit`);
      expect(arrowFiles(join(folder, name))).toEqual(whole);
    }
  });

  test('is not resumed when both states are damaged, rather than begun anew in silence', async () => {
    fs.cpSync(join(folder, 'stopped'), join(folder, 'lost'), { recursive: true });
    for (const name of ['checkpoint.bin', 'checkpoint-previous.bin']) {
      fs.truncateSync(join(folder, 'lost', name), 100);
    }
    const { code, stderr } = await thickset('run', 'setup.yaml', '--out', 'lost', '--resume', '--quiet');
    expect(code).toBe(4);
    expect(stderr).toBe('saved state: its checksum does not fit; start anew in another folder\n');
  });
});

test('resuming a finished run plays nothing and shows its result', async () => {
  const before = fs.statSync(join(folder, 'whole', 'manifest.json')).mtimeMs;
  const { code, stdout } = await thickset('run', 'setup.yaml', '--out', 'whole', '--resume', '--json');
  expect(code).toBe(0);
  expect(JSON.parse(stdout)).toMatchObject({ histories: 1.5e6, stopped: 'histories' });
  expect(fs.statSync(join(folder, 'whole', 'manifest.json')).mtimeMs).toBe(before);
  const other = await thickset('run', 'setup.yaml', '--out', 'whole', '--resume', '--seed', 'b');
  expect(other.stderr).toContain('seed was thickset, is b');
});

test.skipIf(process.platform === 'win32')(
  'a full disk costs a run neither its course nor its figures, and leaves no half-made folder',
  async () => {
    // The limit on the size of files, 4 kB, fails a write like a full disk does.
    const command = 'ulimit -f 8; exec $THICKSET run setup.yaml --out full --checkpoint "50 ms" --json';
    const { code, stdout, stderr } = await runShell(command, { cwd: folder });
    expect(code).toBe(4);
    expect(stderr).toBe(
      'warning: the state of the run is not saved: full: no space left; the run goes on\n' +
        'full: no space left; free some space and run again\n',
    );
    expect(JSON.parse(stdout)).toMatchObject({ out: null, histories: 1.5e6 });
    expect(fs.existsSync(join(folder, 'full'))).toBe(false);
  },
);

test('a folder in which a process works is refused, one whose process was killed is not', async () => {
  const args = ['run', 'setup.yaml', '--out', 'held', '--histories', '1e8', '--quiet'];
  const { child, ended, until } = startCli(args, folder);
  try {
    await until(() => fs.existsSync(join(folder, 'held', '.lock')));
    const second = await thickset('run', 'setup.yaml', '--out', 'held', '--overwrite');
    expect(second.code).toBe(4);
    expect(second.stderr).toMatch(
      new RegExp(`^held: in use by process ${child.pid} since .*; wait for it to end\n$`),
    );
  } finally {
    child.kill('SIGKILL');
    await ended;
  }
  const third = await thickset('run', 'setup.yaml', '--out', 'held', '--histories', '1000', '--quiet');
  expect(third.code).toBe(0);
  expect(names('held')).toEqual(['manifest.json', 'spectra.arrow', 'totals.arrow']);
});

describe('shards of a run', () => {
  beforeAll(async () => {
    for (const part of ['1', '2', '3']) {
      const args = ['run', 'setup.yaml', '--out', `part${part}`, '--shard', `${part}/3`, '--threads', '1'];
      expect((await thickset(...args)).stdout).toContain(`Shard ${part} of 3`);
    }
  });

  test('merged in any order give the files of the undivided run', async () => {
    const { code } = await thickset('merge', 'part3', 'part1', 'part2', '--out', 'merged');
    expect(code).toBe(0);
    expect(arrowFiles(join(folder, 'merged'))).toEqual(arrowFiles(join(folder, 'whole')));
  });

  test.each([
    ['one is missing', ['part1', 'part3'], 'missing of 3 shards: 2; run what is missing'],
    ['one is there twice', ['part1', 'part2', 'part2'], 'shard given twice: 2 in part2 and part2'],
    ['a folder holds no shard', ['part1', 'whole'], 'whole: holds no shard'],
  ])('are refused when %s', async (_, parts, message) => {
    const { code, stderr } = await thickset('merge', ...parts, '--out', 'never');
    expect(code).toBe(4);
    expect(stderr).toContain(message);
    expect(fs.existsSync(join(folder, 'never'))).toBe(false);
  });

  test('of different seeds or divisions are refused', async () => {
    const other = ['run', 'setup.yaml', '--shard', '2/3', '--threads', '1', '--seed', 'other'];
    await thickset(...other, '--out', 'other');
    const mixed = await thickset('merge', 'part1', 'other', 'part3', '--out', 'never');
    expect(mixed.stderr).toContain('other: holds another run than part1: seed was thickset, is other');
    await thickset('run', 'setup.yaml', '--shard', '2/2', '--threads', '1', '--out', 'half');
    const uneven = await thickset('merge', 'part1', 'half', '--out', 'never');
    expect(uneven.stderr).toContain('shards of different divisions: part1 is of 3, half is of 2');
  });

  test('have no summary of their own', async () => {
    const { code, stderr } = await thickset('summary', 'part1');
    expect(code).toBe(4);
    expect(stderr).toContain('part1: a shard of a run has no figures of its own; put all shards together');
  });

  test('of a run with an aim are refused before anything is played', async () => {
    const until = 'until: {quantity: transmitted, relative_error: 1 %}';
    fs.writeFileSync(join(folder, 'aimed.yaml'), SETUP.replace('1.5e6}', `1.5e6, ${until}}`));
    const { code, stderr } = await thickset('run', 'aimed.yaml', '--out', 'never', '--shard', '1/3');
    expect(code).toBe(5);
    expect(stderr).toContain(
      'a run with until cannot be split into shards: no shard knows the error of the whole',
    );
    expect(fs.existsSync(join(folder, 'never'))).toBe(false);
  });
});
