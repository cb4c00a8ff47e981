/** What `thickset run` and `thickset summary` tell of detectors, as users meet it. */
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import polars from 'nodejs-polars';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { runCli, type Outcome } from './run-cli.js';

let folder: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'thickset-detectors-'));
});
afterAll(() => rmSync(folder, { recursive: true }));

async function run(name: string, setup: string, ...options: string[]): Promise<Outcome> {
  writeFileSync(join(folder, `${name}.yaml`), setup);
  return runCli(['run', `${name}.yaml`, '--out', name, '--threads', '1', '--quiet', ...options], {
    cwd: folder,
  });
}

async function json(...args: string[]): Promise<Result> {
  const { code, stdout, stderr } = await runCli([...args, '--json'], { cwd: folder });
  expect({ code, stderr }).toEqual({ code: 0, stderr: '' });
  return JSON.parse(stdout) as Result;
}

interface Value {
  readonly mean: number;
  readonly std_error: number;
}

interface Counts extends Value {
  readonly per_second: Value;
  readonly in_live_time: Value;
}

interface Result {
  readonly totals: readonly (Value & { quantity: string; layer: string | null; line_keV: number | null })[];
  readonly rates: readonly (Omit<Counts, keyof Value> & { quantity: string; layer: string | null })[];
  readonly response: readonly {
    layer: string;
    tally: string;
    fwhm: object | null;
    threshold_keV: number | null;
    registered: Counts;
    windows: readonly { name: string; gross: Counts; net: Counts | null }[];
  }[];
  readonly peaks: readonly {
    feature: string;
    layer: string;
    line_keV: number;
    mean: number | null;
    status: string;
  }[];
}

const PROBE = `
title: Two crystals
seed: two-1
source: {kind: beam, nuclide: Cs-137, minimum_energy: 100 keV, activity: 2 kBq, live_time: 300 s}
stack:
  - name: thin
    material: NaI
    thickness: 5 mm
    detector: {fwhm: 8 % at 661.7 keV, threshold: 20 keV}
  - name: thick
    material: CsI
    thickness: 5 cm
    detector: {windows: [{name: peak, from: 600 keV, to: 720 keV}]}
tally: {coincidence: true}
run: {histories: 1e5}
`;

describe('a run with a nuclide, an activity and two detectors', () => {
  let result: Result;
  beforeAll(async () => {
    expect((await run('two', PROBE)).code).toBe(0);
    result = await json('summary', 'two');
  });

  test('tells rates and counts of every figure that grows with the source', () => {
    // Cs-137: 0.8501 photons of 661.6553 keV per decay (DDEP, as "thickset nuclide Cs-137" lists it); 2000 decays per s.
    const rate = result.rates.find(({ quantity }) => quantity === 'incident')!;
    expect(rate.per_second.mean).toBeCloseTo(0.8501 * 2000, 6);
    expect(rate.in_live_time.mean).toBeCloseTo(0.8501 * 2000 * 300, 4);
    const isFull = (row: { quantity: string; layer: string | null }) =>
      row.quantity === 'full_energy' && row.layer === 'thick';
    const perPhoton = result.totals.find(isFull)!;
    const { per_second: perSecond } = result.rates.find(isFull)!;
    expect(perSecond.mean / perPhoton.mean).toBeCloseTo(1700.2, 6);
    expect(perSecond.std_error / perPhoton.std_error).toBeCloseTo(1700.2, 6);
    expect(result.rates.map(({ quantity }) => quantity)).not.toContain('peak_to_total');
  });

  test('tells what each detector registers, of all pulses and of those alone', () => {
    expect(result.response.map(({ layer, tally }) => [layer, tally])).toEqual([
      ['thin', 'pulse_height'],
      ['thin', 'anticoincidence'],
      ['thick', 'pulse_height'],
      ['thick', 'anticoincidence'],
    ]);
    const [thin, alone, thick] = result.response;
    expect(thin.fwhm).toEqual({ kind: 'at_energy', fwhm_keV: (8 * 661.7) / 100, at_keV: 661.7 });
    expect(thin.threshold_keV).toBe(20);
    expect(alone.registered.mean).toBeLessThan(thin.registered.mean);
    const [window] = thick.windows;
    expect(window.net!.mean).toBeLessThan(window.gross.mean);
    expect(window.gross.in_live_time.mean).toBeCloseTo(window.gross.mean * 1700.2 * 300, 4);
  });

  test('takes another width without a new run, for all detectors or one', async () => {
    const all = await json('summary', 'two', '--fwhm', '13 % at 661.7 keV');
    expect(all.response.map(({ fwhm }) => fwhm)).toEqual(
      new Array(4).fill({ kind: 'at_energy', fwhm_keV: (13 * 661.7) / 100, at_keV: 661.7 }),
    );
    const one = await json('summary', 'two', '--fwhm', 'thick={a: 1 keV, b: 2, c: 0}', '--fwhm', 'thin=none');
    expect(one.response.map(({ fwhm }) => fwhm)).toEqual([
      null,
      null,
      { kind: 'formula', a: 1, b: 2, c: 0 },
      { kind: 'formula', a: 1, b: 2, c: 0 },
    ]);
    // A wide peak spills out of its window.
    const gross = ({ response }: Result) => response[2].windows[0].gross.mean;
    expect(gross(all)).toBeLessThan(gross(one));
    expect(all.totals).toEqual(result.totals);
  });

  test.each([
    [['7 %'], 'usage: --fwhm must be a width at an energy'],
    [['{a: 1, b: 2}'], '--fwhm: c is missing'],
    [['thing=7 % at 661.7 keV'], 'no detector "thing"; did you mean thin?'],
    [['[{energy: 10 keV, fwhm: 1 keV}]'], 'needs 2 entries or more, has 1'],
    [['7 % at 661.7'], 'needs a unit'],
  ])('refuses --fwhm %s', async ([width], message) => {
    const { code, stdout, stderr } = await runCli(['summary', 'two', '--fwhm', width], { cwd: folder });
    expect({ code, stdout }).toEqual({ code: 2, stdout: '' });
    expect(stderr).toContain(message.replace('usage: ', ''));
  });

  test('writes the registered spectra as an Arrow table once', async () => {
    const args = ['summary', 'two', '--registered', 'registered.arrow', '--json'];
    expect((await runCli(args, { cwd: folder })).code).toBe(0);
    const table = polars.readIPC(readFileSync(join(folder, 'registered.arrow')));
    const thin = table.filter(
      polars
        .col('layer')
        .eq(polars.lit('thin'))
        .and(polars.col('tally').eq(polars.lit('pulse_height'))),
    );
    const sum = thin.getColumn('mean').sum();
    expect(sum / result.response[0].registered.mean).toBeCloseTo(1, 10);
    expect((await runCli(args, { cwd: folder })).stderr).toContain('registered.arrow exists already');
  });

  test('finds peaks and says what it does not find', () => {
    const of = (feature: string) =>
      result.peaks.filter((row) => row.feature === feature && row.layer === 'thick');
    expect(of('full_energy')).toMatchObject([{ line_keV: 661.6553, status: 'seen' }]);
    expect(of('compton_edge')).toMatchObject([{ status: 'seen' }]);
    expect(of('peak_to_compton')).toMatchObject([{ status: 'unresolved', mean: null }]);
    expect(of('single_escape')).toEqual([]);
  });

  test('shows all that as text', async () => {
    const { stdout } = await runCli(['summary', 'two', '--width', '100'], { cwd: folder });
    expect(stdout).toContain('Registered, thin\n  FWHM 52.94 keV at 661.7 keV, above 20 keV\n');
    expect(stdout).toMatch(/peak, net +600 to 720 keV/);
    expect(stdout).toMatch(/Compton edge, seen at +661\.655 keV +477\.3 keV/);
    expect(stdout).toContain('Pulse heights as registered, thin');
    expect(stdout).toContain('Pulse heights of all detectors added up');
    expect(Math.max(...stdout.split('\n').map((line) => line.length))).toBeLessThanOrEqual(100);
  });
});

test('a width for a run without detectors is refused', async () => {
  const bare = `source: {kind: beam, energy: 1 MeV}\nstack: [{material: lead, thickness: 1 cm}]\nrun: {histories: 1000}\n`;
  expect((await run('bare', bare)).code).toBe(0);
  const { code, stderr } = await runCli(['summary', 'bare', '--fwhm', '7 % at 661.7 keV'], { cwd: folder });
  expect(code).toBe(2);
  expect(stderr).toContain('the run has no detector');
});

const CURVE = `
title: Small crystal
seed: small-1
source: {kind: beam, energies: {from: 50 keV, to: 2 MeV, count: 8}}
stack: [{name: crystal, material: germanium, thickness: 2 cm, detector: {}}]
run: {histories: 1e4}
`;

describe('a setup with a grid of energies', () => {
  let out: Outcome;
  beforeAll(async () => {
    out = await run('curve', CURVE);
  });

  test('shows table, plot and polynomials', () => {
    expect(out).toMatchObject({ code: 0, stderr: '' });
    expect(out.stdout).toContain('8 energies from 50 to 2000 keV, one after the other');
    expect(out.stdout).toContain('Efficiency, crystal');
    expect(out.stdout.match(/^ +[\d.]+ {2}[\d.]+ \+\/- [\d.]+ +[\d.]+ %/gm)).toHaveLength(8);
    expect(out.stdout).toContain('Efficiency against energy');
    expect(out.stdout).toMatch(/full energy, 50 to 2000 keV: chi-square [\d.]+ for \d degrees of freedom/);
    expect(Math.max(...out.stdout.split('\n').map((line) => line.length))).toBeLessThanOrEqual(80);
  });

  test('gives the same in --json and as Arrow tables', async () => {
    const { efficiency, efficiency_fits: fits } = (await json('summary', 'curve')) as unknown as {
      efficiency: Record<string, number | string>[];
      efficiency_fits: { quantity: string; coefficients: number[]; covariance: number[][] }[];
    };
    const table = polars.readIPC(readFileSync(join(folder, 'curve', 'efficiency.arrow'))).toRecords();
    expect(table).toEqual(efficiency);
    expect(table.map((row) => row.energy_keV)[0]).toBe(50);
    const rows = polars.readIPC(readFileSync(join(folder, 'curve', 'efficiency_fit.arrow'))).toRecords();
    for (const fit of fits) {
      const own = rows.filter(({ quantity }) => quantity === fit.quantity);
      expect(own.map(({ coefficient }) => coefficient)).toEqual(fit.coefficients);
      fit.covariance.forEach((line, k) =>
        line.forEach((value, l) => expect(own[k][`covariance_${l}`]).toBe(value)),
      );
    }
  });

  test('has the figures of single runs with the seeds it names', async () => {
    const manifest = JSON.parse(readFileSync(join(folder, 'curve', 'manifest.json'), 'utf8')) as {
      energies: { energy_keV: number; seed: string }[];
    };
    const [first] = manifest.energies;
    const single = CURVE.replace(/energies: \{.*\}\}/, `energy: ${first.energy_keV} keV}`);
    expect((await run('single', single, '--seed', first.seed)).code).toBe(0);
    const full = (result: Result) => result.totals.find(({ quantity }) => quantity === 'full_energy');
    expect(full(await json('summary', 'single'))).toEqual(full(await json('summary', 'curve')));
  });

  test('is not run again when it is finished, nor split into shards', async () => {
    const again = await run('curve', CURVE, '--resume');
    expect(again).toMatchObject({ code: 0, stdout: out.stdout });
    const shard = await run('shard', CURVE, '--shard', '1/2');
    expect(shard.stderr).toContain('an efficiency curve cannot be split into shards');
    expect(shard.code).not.toBe(0);
  });

  test('goes on with --resume from the energies there are', async () => {
    const path = join(folder, 'curve', 'manifest.json');
    const whole = readFileSync(join(folder, 'curve', 'efficiency.arrow'));
    const manifest = JSON.parse(readFileSync(path, 'utf8')) as { stopped: string; energies: unknown[] };
    // As it is when the run was interrupted after five energies.
    writeFileSync(
      path,
      JSON.stringify({ ...manifest, stopped: 'interrupted', energies: manifest.energies.slice(0, 5) }),
    );
    const resumed = await run('curve', CURVE, '--resume');
    expect(resumed).toMatchObject({ code: 0, stderr: '' });
    expect(readFileSync(join(folder, 'curve', 'efficiency.arrow')).equals(whole)).toBe(true);
  });

  test('needs a detector', async () => {
    const { code, stderr } = await run('blind', CURVE.replace(', detector: {}', ''));
    expect(stderr).toContain('an efficiency curve needs a detector; add detector: {} to a layer');
    expect(code).not.toBe(0);
  });
});
