import * as fs from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { arrowFiles, runKilled, sizeOf, startCli } from './kills.js';
import { runCli, runShell } from './run-cli.js';

const BASE = `title: Shielded crystal
source: {kind: beam, energy: 661.7 keV}
stack:
  - {name: shield, material: lead, thickness: 1 cm}
  - {name: crystal, material: NaI, thickness: 5 cm, detector: {}}
tally: {energy_bins: {width: 10 keV}}
run: {histories: 3e4}
`;

const SWEEP = `base: base.yaml
vary:
  stack.shield.thickness: {from: 0.5 cm, to: 2 cm, count: 6}
  source.energy: [300 keV, 661.7 keV, 1.3 MeV]
`;

let folder: string;
const inside = (...names: string[]) => join(folder, ...names);
const thickset = (...args: string[]) => runCli(args, { cwd: folder });
const sweep = (...args: string[]) => thickset('sweep', ...args, '--quiet');

beforeAll(async () => {
  folder = fs.mkdtempSync(join(tmpdir(), 'thickset-sweep-'));
  fs.writeFileSync(inside('base.yaml'), BASE);
  fs.writeFileSync(inside('sweep.yaml'), SWEEP);
  fs.writeFileSync(inside('base-long.yaml'), BASE.replace('3e4', '1e7'));
  fs.writeFileSync(inside('long.yaml'), 'base: base-long.yaml\nvary: {stack.shield.thickness: [1 cm]}\n');
  expect(await sweep('sweep.yaml', '--out', 'whole')).toMatchObject({ code: 0, stderr: '' });
});
afterAll(() => fs.rmSync(folder, { recursive: true }));

test('a sweep killed at random moments and resumed ends with the files of an undisturbed one', async () => {
  const args = ['sweep', 'sweep.yaml', '--out', 'killed', '--resume', '--quiet', '--checkpoint', '50 ms'];
  const { code, killed } = await runKilled(args, {
    cwd: folder,
    kills: 8,
    seed: 'sweep',
    lifeMs: [600, 1300],
  });
  expect(code).toBe(0);
  expect(killed).toBeGreaterThan(0);
  expect(arrowFiles(inside('killed'))).toEqual(arrowFiles(inside('whole')));
  expect(fs.readdirSync(inside('killed')).sort()).toEqual(['journal.bin', 'manifest.json', 'points.arrow']);
});

test('Ctrl-C ends a sweep with 7 and what it has', async () => {
  const { child, ended, until } = startCli(
    ['sweep', 'long.yaml', '--out', 'stopped', '--checkpoint', '50 ms'],
    folder,
  );
  // What the sweep is takes 1 kB, the state of a point another one.
  await until(() => sizeOf(inside('stopped', 'journal.bin')) > 4000);
  child.kill('SIGINT');
  expect(await ended).toBe(7);
  const { stdout } = await thickset('summary', 'stopped');
  expect(stdout).toMatch(
    /^Shielded crystal\n1 points: 1 not done; seed thickset\nstopped: go on with --resume, /,
  );
});

test('a running sweep has a summary, and is refused to a second process', async () => {
  const { child, ended, until } = startCli(
    ['sweep', 'long.yaml', '--out', 'held', '--checkpoint', '50 ms'],
    folder,
  );
  try {
    await until(() => sizeOf(inside('held', 'journal.bin')) > 4000);
    const { code, stderr } = await sweep('long.yaml', '--out', 'held', '--resume');
    expect(code).toBe(4);
    expect(stderr).toMatch(
      new RegExp(`^held: in use by process ${child.pid} since .*; wait for it to end\n$`),
    );
    const live = await thickset('summary', 'held');
    expect(live.stdout).toMatch(
      /^Shielded crystal\n1 points: 1 not done; .*\nrunning now, .* so far, largest error/,
    );
  } finally {
    child.kill('SIGKILL');
    await ended;
  }
  expect((await thickset('summary', 'held')).stdout).toContain('\nstopped: go on with --resume, ');
});

test.skipIf(process.platform === 'win32')(
  'a full disk ends a sweep with a clear error, and space found later lets it go on to the same table',
  async () => {
    // The limit on the size of files, 8 kB, fails a write like a full disk does.
    const command = 'ulimit -f 16; exec $THICKSET sweep sweep.yaml --out full --quiet';
    const { code, stderr } = await runShell(command, { cwd: folder });
    expect({ code, stderr }).toEqual({
      code: 4,
      stderr: 'full: no space left; free some space and run again\n',
    });
    const state = JSON.parse((await thickset('summary', 'full', '--json')).stdout) as {
      status: { done: number };
    };
    expect(state.status.done).toBeGreaterThan(0);
    expect(state.status.done).toBeLessThan(18);
    expect((await sweep('sweep.yaml', '--out', 'full', '--resume')).code).toBe(0);
    expect(arrowFiles(inside('full'))).toEqual(arrowFiles(inside('whole')));
  },
);

test('shards merged by command are the undivided sweep to the bit, and a missing one is told', async () => {
  for (const part of ['1/2', '2/2']) {
    expect((await sweep('sweep.yaml', '--out', `part-${part[0]}`, '--shard', part)).code).toBe(0);
  }
  expect(await thickset('merge', 'part-2', '--out', 'merged')).toMatchObject({
    code: 4,
    stderr: 'missing of 2 shards: 1; run what is missing, then merge all of them\n',
  });
  const { code, stdout } = await thickset('merge', 'part-2', 'part-1', '--out', 'merged');
  expect(code).toBe(0);
  expect(stdout).toContain('18 points: 18 done; seed thickset');
  expect(arrowFiles(inside('merged'))).toEqual(arrowFiles(inside('whole')));
});

test('a sweep with problems ends with 3 before a folder is made', async () => {
  fs.writeFileSync(inside('bad.yaml'), SWEEP.replace('0.5 cm', '-0.5 cm'));
  const { code, stderr } = await sweep('bad.yaml', '--out', 'bad');
  expect(code).toBe(3);
  expect(stderr).toContain(
    'bad.yaml: vary["stack.shield.thickness"]: must be more than 0, got -0.5 cm (line 3,',
  );
  expect(fs.existsSync(inside('bad'))).toBe(false);
});

test('a sweep without a folder is refused with what is missing', async () => {
  const { code, stderr } = await sweep('sweep.yaml');
  expect({ code, stderr }).toEqual({ code: 2, stderr: 'option --out <folder> is missing\n' });
});

describe('--dry-run', () => {
  test('lists the points with the time they will take, and writes nothing', async () => {
    const { code, stdout } = await thickset('sweep', 'sweep.yaml', '--dry-run');
    expect(code).toBe(0);
    expect(stdout).toMatch(/^ {2}point {2}thickness {2}energy\n {2}1 {6}0\.5 cm {5}300 keV\n/);
    expect(stdout).toMatch(
      /\n18 points, all of them fine; expected time: .* with \d+ threads?, by a trial of 18 points\.\n$/,
    );
  });

  test('gives one object with --json, for a shard too', async () => {
    const { stdout } = await thickset('sweep', 'sweep.yaml', '--dry-run', '--json', '--shard', '2/7');
    const dry = JSON.parse(stdout) as {
      expected_s: number;
      points: number;
      table: { point: number; seed: string }[];
    };
    expect(dry.points).toBe(18);
    expect(dry.expected_s).toBeGreaterThan(0);
    expect(dry.table.map(({ point }) => point)).toEqual([2, 9, 16]);
    expect(dry.table[0].seed).toMatch(/^thickset\/[0-9a-f]{16}$/);
  });
});

test('the summary of a sweep shows its points, and --json has all of their figures', async () => {
  const { stdout } = await thickset('summary', 'whole');
  expect(stdout).toMatch(
    /^Shielded crystal\n18 points: 18 done; seed thickset\nended, .* so far, largest error [\d.]+ % at point \d+\n/,
  );
  expect(stdout).toMatch(
    /\n {2}point {2}thickness {2}energy {5}full_energy crystal +error\n {2}1 {6}0\.5 cm {5}300 keV/,
  );
  const object = JSON.parse((await thickset('summary', 'whole', '--json')).stdout) as {
    table: { figures: Record<string, { mean: number; std_error: number; unit: string }> }[];
  };
  expect(object).toMatchObject({
    out: 'whole',
    state: 'ended',
    points: 18,
    status: { done: 18, failed: 0, unfinished: 0, not_begun: 0 },
    parameters: [
      { name: 'stack.shield.thickness', unit: 'cm' },
      { name: 'source.energy', unit: 'keV' },
    ],
    caution: expect.stringContaining('no qualified expert') as string,
  });
  expect(object.table).toHaveLength(18);
  const { mean, std_error: error, unit } = object.table[3].figures['deposited_energy.shield'];
  expect(mean).toBeGreaterThan(0);
  expect(error).toBeLessThan(mean);
  expect(unit).toBe('keV');
});
