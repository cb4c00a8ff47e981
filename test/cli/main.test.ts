/* eslint-disable no-control-regex -- escape sequences are what is looked for */
import {
  existsSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { hasTerminal, runCli, runInTerminal, runShell, type Outcome } from './run-cli.js';

const SETUP = `
title: Crystal behind a window
seed: spawned
source: {kind: beam, energy: 661.7 keV}
stack:
  - {name: window, material: aluminium, thickness: 0.5 mm}
  - {name: crystal, material: NaI, thickness: 2 cm, detector: {}}
tally: {energy_bins: {width: 10 keV}}
run: {histories: 30000}
`;
/** Never finished by itself in the time of a test. */
const ENDLESS = SETUP.replace('30000', '1e12');

let folder: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'thickset-cli-'));
  writeFileSync(join(folder, 'setup.yaml'), SETUP);
  writeFileSync(join(folder, 'endless.yaml'), ENDLESS);
});
afterAll(() => rmSync(folder, { recursive: true }));

const thickset = (...args: string[]): Promise<Outcome> => runCli(args, { cwd: folder });
const bytes = (...path: string[]): Buffer => readFileSync(join(folder, ...path));

describe('help', () => {
  async function help(...args: string[]): Promise<string> {
    const { code, stdout, stderr } = await thickset(...args, '--help');
    expect({ code, stderr }).toEqual({ code: 0, stderr: '' });
    return `\n${stdout}`;
  }

  test('of the program lists commands and exit codes', async () => {
    expect(await help()).toMatchInlineSnapshot(`
      "
      Usage: thickset [options] [command]

      Monte Carlo photon transport through stacks of layers, 1 keV to 20 MeV

      Options:
        -V, --version                 output the version number
        -h, --help                    display help for command

      Commands:
        run [options] <setup>         run a setup and write its result
        sweep [options] <sweep>       run a setup at many points and write one table
                                      of them
        size [options] <setup>        find the thickness of a layer that brings doses
                                      under their limits
        merge [options] <folders...>  put the shards of a run or sweep together
        summary [options] <folder>    show the figures and spectra of a finished run,
                                      or the points of a sweep, also while it runs
        material [options] <name>     show composition, attenuation coefficients and
                                      narrow-beam thicknesses of a material
        nuclide [options] [name]      show half-life, gamma, X-ray and annihilation
                                      lines of a nuclide; without a name, list all
        help [command]                display help for command

      Exit codes:
          0  done
          1  a fault of the program itself
          2  the command line cannot be understood
          3  the setup file has problems
          4  a file or folder cannot be read or written
          5  the run failed
          6  finished, but part of the answer is missing or fails its check
          7  stopped by Ctrl-C; what was finished is written
        130  stopped by a second Ctrl-C, or before anything was finished; nothing is written
      "
    `);
  });

  test('of run', async () => {
    expect((await help('run')).split('\nExit codes')[0]).toMatchInlineSnapshot(`
      "
      Usage: thickset run [options] <setup>

      run a setup and write its result

      Arguments:
        setup                 setup file (YAML)

      Options:
        --out <folder>        folder for the result
        --overwrite           replace the result that is in the folder
        --resume              go on from the state saved in the folder, if there is
                              one
        --checkpoint <time>   how often the state is saved (default: 30 s)
        --shard <i/n>         run part i of n only; thickset merge puts the parts
                              together
        --threads <number>    worker threads; default: one for each core
        --seed <text>         seed to use instead of that of the setup
        --histories <number>  histories to run instead of those of the setup
        --quiet               no progress and no warnings on stderr
        --json                print one JSON object instead of the summary
        -h, --help            display help for command
      "
    `);
  });

  test('of summary', async () => {
    expect((await help('summary')).split('\nExit codes')[0]).toMatchInlineSnapshot(`
      "
      Usage: thickset summary [options] <folder>

      show the figures and spectra of a finished run, or the points of a sweep, also
      while it runs

      Arguments:
        folder                  folder written by thickset run or thickset sweep

      Options:
        --spectra <which>       spectra to draw: those that leave and pulse heights,
                                every one, or none (choices: "main", "all", "none",
                                default: "main")
        --fwhm <[layer=]width>  width of the peaks instead of that of the setup, as in
                                "7 % at 661.7 keV"; none: as tallied; may be repeated
        --registered <file>     write the spectra that the detectors register to this
                                file (Arrow)
        --width <columns>       width of the text; default: that of the terminal
        --json                  print one JSON object instead
        -h, --help              display help for command
      "
    `);
  });

  test('the version is that of the package', async () => {
    const { version } = JSON.parse(readFileSync('package.json', 'utf8')) as { version: string };
    expect(await thickset('--version')).toEqual({ code: 0, stdout: `${version}\n`, stderr: '' });
  });
});

describe('a command line that cannot be understood ends with 2, on stderr alone', () => {
  test.each([
    [[], 'Usage: thickset'],
    [['rum'], "error: unknown command 'rum'\n(Did you mean run?)"],
    [['run', '--out', 'o'], "error: missing required argument 'setup'"],
    [['run', 'setup.yaml'], "error: required option '--out <folder>' not specified"],
    [['run', 'setup.yaml', '--out', 'o', '--thread', '2'], "error: unknown option '--thread'"],
    [['run', 'setup.yaml', '--out', 'o', '--threads', '0'], 'must be a whole number from 1 to 256'],
    [['run', 'setup.yaml', '--out', 'o', '--threads', '1.5'], 'must be a whole number from 1 to 256'],
    [['run', 'setup.yaml', '--out', 'o', '--histories', '-5'], 'must be a whole number from 1 to'],
    [['run', 'setup.yaml', '--out', 'o', '--histories', 'many'], 'must be a whole number from 1 to'],
    [['run', 'setup.yaml', '--out', 'o', '--seed', ''], 'must be a text of 1 to 500 characters'],
    [['run', 'setup.yaml', 'second.yaml', '--out', 'o'], 'error: too many arguments'],
    [['summary', 'o', '--spectra', 'some'], 'Allowed choices are main, all, none'],
  ])('%j', async (args, words) => {
    const { code, stdout, stderr } = await thickset(...args);
    expect({ code, stdout }).toEqual({ code: 2, stdout: '' });
    expect(stderr).toContain(words);
    expect(existsSync(join(folder, 'o'))).toBe(false);
  });
});

describe('a run', () => {
  let first: Outcome;
  beforeAll(async () => {
    first = await thickset('run', 'setup.yaml', '--out', 'first', '--threads', '1');
  });

  test('writes its folder, prints the figures, and is silent on stderr', () => {
    expect({ code: first.code, stderr: first.stderr }).toEqual({ code: 0, stderr: '' });
    expect(readdirSync(join(folder, 'first')).sort()).toEqual([
      'manifest.json',
      'spectra.arrow',
      'totals.arrow',
    ]);
    expect(first.stdout).toMatch(
      /^Crystal behind a window\n30,000 histories, all planned histories done; seed spawned\n/,
    );
    expect(first.stdout).toMatch(/full_energy +crystal +661\.7 keV +0\.\d+ +\+\/- 0\.\d+ /);
    expect(first.stdout).toMatch(/idealised slab model/);
  });

  test.each(['2', '3', '8'])('gives the same files with %s threads', async (threads) => {
    const { code } = await thickset('run', 'setup.yaml', '--out', `threads-${threads}`, '--threads', threads);
    expect(code).toBe(0);
    expect(bytes(`threads-${threads}`, 'totals.arrow').equals(bytes('first', 'totals.arrow'))).toBe(true);
    expect(bytes(`threads-${threads}`, 'spectra.arrow').equals(bytes('first', 'spectra.arrow'))).toBe(true);
  });

  test('takes seed and histories from the command line', async () => {
    const args = ['run', 'setup.yaml', '--out', 'other', '--seed', 'other', '--histories', '2e4', '--json'];
    const { code, stdout, stderr } = await thickset(...args);
    expect({ code, stderr }).toEqual({ code: 0, stderr: '' });
    expect(JSON.parse(stdout)).toMatchObject({
      seed: 'other',
      histories: 20000,
      out: 'other',
      stopped: 'histories',
    });
    expect(bytes('other', 'totals.arrow').equals(bytes('first', 'totals.arrow'))).toBe(false);
    expect(JSON.parse(bytes('other', 'manifest.json').toString())).toMatchObject({
      seed: 'other',
      run: { histories: 20000 },
      setup: { text: SETUP },
    });
  });

  test('prints with --json what summary --json prints', async () => {
    const args = ['run', 'setup.yaml', '--out', 'json', '--json'];
    const run = JSON.parse((await thickset(...args)).stdout) as Record<string, unknown>;
    const summary = JSON.parse((await thickset('summary', 'json', '--json')).stdout) as Record<
      string,
      unknown
    >;
    expect(run).toEqual(summary);
    expect(Object.keys(run)).toEqual(
      expect.arrayContaining([
        'out',
        'totals',
        'timings',
        'histories',
        'seed',
        'warnings',
        'stopped',
        'balance',
      ]),
    );
  });

  test('shows the same figures as its summary, which draws the spectra too', async () => {
    const { code, stdout } = await thickset('summary', 'first');
    expect(code).toBe(0);
    const [figures] = stdout.split('\nTransmitted photons');
    expect(first.stdout.startsWith(figures)).toBe(true);
    expect(stdout).toContain('Pulse heights, crystal (per keV and photon');
    expect((await thickset('summary', 'first', '--spectra', 'none')).stdout).toBe(first.stdout);
  });

  test('tells warnings once on stderr, and not with --quiet', async () => {
    const warning = 'physics.doppler has no effect with bound_incoherent: false';
    const text = `${SETUP}physics: {bound_incoherent: false, doppler: true}\n`;
    writeFileSync(join(folder, 'warned.yaml'), text);
    const loud = await thickset('run', 'warned.yaml', '--out', 'loud', '--histories', '1000');
    expect({ code: loud.code, stderr: loud.stderr }).toEqual({ code: 0, stderr: `warning: ${warning}\n` });
    expect(loud.stdout).toContain(`Warnings\n  ${warning}\n`);
    const quiet = await thickset('run', 'warned.yaml', '--out', 'quiet', '--histories', '1000', '--quiet');
    expect({ code: quiet.code, stderr: quiet.stderr }).toEqual({ code: 0, stderr: '' });
  });
});

describe('a folder that exists', () => {
  test('is refused and left as it is, unless --overwrite is given', async () => {
    await thickset('run', 'setup.yaml', '--out', 'twice', '--histories', '1000');
    const before = bytes('twice', 'manifest.json');
    const refused = await thickset('run', 'setup.yaml', '--out', 'twice');
    expect(refused).toEqual({
      code: 4,
      stdout: '',
      stderr: 'twice: exists already; choose another folder with --out or replace it with --overwrite\n',
    });
    expect(bytes('twice', 'manifest.json').equals(before)).toBe(true);
    const replaced = await thickset(
      'run',
      'setup.yaml',
      '--out',
      'twice',
      '--overwrite',
      '--histories',
      '2000',
    );
    expect(replaced.code).toBe(0);
    expect(JSON.parse(bytes('twice', 'manifest.json').toString())).toMatchObject({ histories: 2000 });
    expect(readdirSync(join(folder, 'twice')).sort()).toEqual([
      'manifest.json',
      'spectra.arrow',
      'totals.arrow',
    ]);
  });

  test('and holds something else is refused even with --overwrite', async () => {
    mkdirSync(join(folder, 'thesis'));
    writeFileSync(join(folder, 'thesis', 'chapter.tex'), 'years of work');
    const { code, stderr } = await thickset('run', 'setup.yaml', '--out', 'thesis', '--overwrite');
    expect({ code, stderr }).toEqual({
      code: 4,
      stderr: 'thesis: holds something other than results; choose another folder with --out\n',
    });
    expect(bytes('thesis', 'chapter.tex').toString()).toBe('years of work');
  });
});

test('a setup with problems ends with 3 before a folder is made', async () => {
  writeFileSync(join(folder, 'bad.yaml'), SETUP.replace('0.5 mm', '-1 mm').replace('NaI', 'NaJ'));
  const { code, stdout, stderr } = await thickset('run', 'bad.yaml', '--out', 'never');
  expect({ code, stdout }).toEqual({ code: 3, stdout: '' });
  expect(stderr).toMatch(/^bad\.yaml: stack\[0\]\.thickness: .*\(line 6, column \d+\)/m);
  expect(stderr).toMatch(/^bad\.yaml: stack\[1\]\.material: .*NaI/m);
  expect(existsSync(join(folder, 'never'))).toBe(false);
});

test('a setup file that is not there ends with 3', async () => {
  const { code, stderr } = await thickset('run', 'nowhere.yaml', '--out', 'never');
  expect(code).toBe(3);
  expect(stderr).toMatch(/^nowhere\.yaml: /);
});

test('a summary of nothing ends with 4', async () => {
  expect(await thickset('summary', 'nowhere')).toEqual({
    code: 4,
    stdout: '',
    stderr:
      'nowhere/manifest.json: no results here; name a folder written by thickset run or thickset sweep\n',
  });
});

test.runIf(existsSync('/proc/version'))(
  'a folder that cannot be made ends with 4 before the run',
  async () => {
    // Nobody can make folders in /proc, whatever its permissions say.
    const { code, stdout, stderr } = await thickset('run', 'setup.yaml', '--out', '/proc/thickset', '--json');
    expect({ code, stdout }).toEqual({ code: 4, stdout: '' });
    expect(stderr).toMatch(
      /^\/proc\/thickset: cannot be written \(.*\); choose another folder with --out\n$/,
    );
  },
);

test('figures that cannot be written are shown all the same', async () => {
  await thickset('run', 'setup.yaml', '--out', 'blocked', '--histories', '1000');
  rmSync(join(folder, 'blocked', 'totals.arrow'));
  mkdirSync(join(folder, 'blocked', 'totals.arrow'));
  const args = ['run', 'setup.yaml', '--out', 'blocked', '--overwrite', '--json'];
  const { code, stdout, stderr } = await thickset(...args);
  expect(code).toBe(4);
  expect(JSON.parse(stdout)).toMatchObject({ out: null, histories: 30000 });
  expect(stderr).toMatch(/^blocked: cannot be written \(.*\); choose another folder with --out\n$/);
});

test('a reader that stops early is no error', async () => {
  await thickset('run', 'setup.yaml', '--out', 'piped', '--histories', '1000');
  const { code, stderr } = await runShell('$THICKSET summary piped --spectra all | head -n 1', {
    cwd: folder,
  });
  expect({ code, stderr }).toEqual({ code: 0, stderr: '' });
});

describe.runIf(hasTerminal)('in a terminal', () => {
  const inTerminal = (args: string[], env?: Record<string, string>) =>
    runInTerminal(args, { cwd: folder, env });

  test('colours and block characters are used, with NO_COLOR only the latter', async () => {
    await thickset('run', 'setup.yaml', '--out', 'shown', '--histories', '5000');
    const coloured = await inTerminal(['summary', 'shown']).outcome;
    expect(coloured.stdout).toContain('\x1b[1mPulse heights, crystal\x1b[22m');
    expect(coloured.stdout).toContain('█');
    const plain = await inTerminal(['summary', 'shown'], { NO_COLOR: '1' }).outcome;
    expect(plain.stdout).not.toContain('\x1b');
    expect(plain.stdout).toContain('█');
    expect(plain.stdout).toContain('±');
  });

  test('progress is shown on one line, which is gone at the end; --quiet shows none', async () => {
    const args = ['run', 'setup.yaml', '--threads', '1', '--histories', '2e5'];
    const { code, stdout } = await inTerminal([...args, '--out', 'watched']).outcome;
    expect(code).toBe(0);
    expect(stdout).toMatch(
      /\r\x1b\[K[\d,]+ of 200,000 histories \(\d+ %\), full_energy crystal 661\.7 keV 0\.\d+ ± /,
    );
    expect(stdout).toContain('\r\x1b[K\x1b[1mCrystal behind a window');
    const quiet = await inTerminal([...args, '--out', 'unwatched', '--quiet']).outcome;
    expect(quiet.stdout).not.toContain('\x1b[K');
  });

  test('Ctrl-C finishes the batches in hand, writes what there is and says so', async () => {
    const session = inTerminal(['run', 'endless.yaml', '--out', 'interrupted']);
    await session.seen(' histories (0 %)');
    session.type('\x03');
    const { code, stdout } = await session.outcome;
    expect(code).toBe(7);
    expect(stdout).toContain('Finishing the batches in hand; press Ctrl-C again to stop at once.');
    expect(stdout).toMatch(/Interrupted after [\d,]+0,000 histories; their result is in interrupted\./);
    const summary = await thickset('summary', 'interrupted', '--json');
    expect(JSON.parse(summary.stdout)).toMatchObject({ stopped: 'interrupted' });
  });

  test('a second Ctrl-C stops at once and leaves nothing behind', async () => {
    // Fine bins make batches so large that one takes seconds.
    writeFileSync(join(folder, 'slow.yaml'), ENDLESS.replace('width: 10 keV', 'width: 0.01 keV'));
    const session = inTerminal(['run', 'slow.yaml', '--out', 'killed']);
    await session.seen(' histories (0 %)');
    session.type('\x03');
    await session.seen('Finishing the batches in hand');
    session.type('\x03');
    const { code } = await session.outcome;
    expect(code).toBe(130);
    expect(readdirSync(folder).filter((name) => name.includes('killed'))).toEqual([]);
  });
});
