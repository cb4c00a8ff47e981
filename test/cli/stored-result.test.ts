import { execFileSync } from 'node:child_process';
import { mkdtempSync, readdirSync, readFileSync, rmSync, truncateSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { tableFromIPC } from 'apache-arrow';
import polars from 'nodejs-polars';
import { afterAll, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import type { ThicksetError } from '../../cli/errors.js';
import { resultObject } from '../../cli/result/result-json.js';
import { decodeSpectra, decodeTotals, encodeSpectra, encodeTotals } from '../../cli/result/result-tables.js';
import { packResult, readResult, writeResult } from '../../cli/result/stored-result.js';
import { fixtureResult, fixtureSpectra } from './result-fixture.js';

let scratch: string;
beforeAll(() => {
  scratch = mkdtempSync(join(tmpdir(), 'thickset-stored-'));
});
afterAll(() => rmSync(scratch, { recursive: true }));

const record = { setupText: 'title: x\n', threads: 2, finished: new Date('2024-05-06T07:08:09Z') };

describe('what is written is read back unchanged', () => {
  test('figures, unknown ones as null', () => {
    const { totals } = fixtureResult();
    expect(decodeTotals(encodeTotals(totals))).toEqual(totals);
    expect(totals.some((row) => row.mean === null)).toBe(true);
  });

  test('spectra with every bin, empty ones too', () => {
    expect(decodeSpectra(encodeSpectra(fixtureSpectra))).toEqual(fixtureSpectra);
    expect(fixtureSpectra.some(({ mean }) => mean.every((value) => value === 0))).toBe(true);
  });

  test('an unknown bin, in memory not a number, in the file null', () => {
    const [first] = fixtureSpectra;
    const mean = first.mean.map((value, bin) => (bin === 3 ? NaN : value));
    const bytes = encodeSpectra([{ ...first, mean }]);
    expect(decodeSpectra(bytes)[0].mean).toEqual(mean);
    expect(tableFromIPC(bytes).getChild('mean')?.get(3)).toBeNull();
    expect(tableFromIPC(bytes).getChild('mean')?.nullCount).toBe(1);
  });

  test('nothing at all', () => {
    expect(decodeTotals(encodeTotals([]))).toEqual([]);
    expect(decodeSpectra(encodeSpectra([]))).toEqual([]);
  });

  test('a whole folder', () => {
    const folder = join(scratch, 'whole');
    const result = fixtureResult();
    const manifest = writeResult(folder, result, record);
    expect(readResult(folder)).toEqual({ manifest, totals: result.totals, spectra: result.spectra });
    expect(readdirSync(folder).sort()).toEqual(['manifest.json', 'spectra.arrow', 'totals.arrow']);
  });
});

describe('another Arrow reader finds', () => {
  test('the same figures', () => {
    const { totals } = fixtureResult();
    const frame = polars.readIPC(Buffer.from(encodeTotals(totals)));
    expect(frame.columns).toEqual(['quantity', 'layer', 'line_keV', 'mean', 'std_error', 'unit']);
    expect(frame.toRecords()).toEqual(
      totals.map(({ quantity, layer, lineKeV, mean, stdError, unit }) => ({
        quantity,
        layer,
        line_keV: lineKeV,
        mean,
        std_error: stdError,
        unit,
      })),
    );
  });

  test('the same spectra', () => {
    const frame = polars.readIPC(Buffer.from(encodeSpectra(fixtureSpectra)));
    expect(frame.columns).toEqual([
      'tally',
      'layer',
      'energy_low_keV',
      'energy_high_keV',
      'mean',
      'std_error',
    ]);
    expect(frame.toRecords()).toEqual(
      fixtureSpectra.flatMap((spectrum) =>
        Array.from(spectrum.mean, (mean, bin) => ({
          tally: spectrum.tally,
          layer: spectrum.layer,
          energy_low_keV: spectrum.energyLowKeV[bin],
          energy_high_keV: spectrum.energyHighKeV[bin],
          mean,
          std_error: spectrum.stdError[bin],
        })),
      ),
    );
  });
});

test('every column says its unit and what it means', () => {
  for (const bytes of [encodeTotals(fixtureResult().totals), encodeSpectra(fixtureSpectra)]) {
    for (const field of tableFromIPC(bytes).schema.fields) {
      expect([...field.metadata.keys()]).toEqual(['unit', 'description']);
      expect(field.metadata.get('description')).not.toBe('');
    }
  }
});

describe('the Arrow files depend on the figures alone', () => {
  test('a later write in the same process gives the same bytes', () => {
    const [first, second] = [packResult(fixtureResult(), record), packResult(fixtureResult(), record)];
    expect(first.files).toEqual(second.files);
  });

  test('times and threads change nothing in them', () => {
    const timings = { wallS: 1, workerS: 2, historiesPerSecond: 3 };
    const first = packResult(fixtureResult(), record).files;
    const second = packResult(fixtureResult({ timings }), {
      ...record,
      threads: 8,
      finished: new Date(0),
    }).files;
    expect(second.get('totals.arrow')).toEqual(first.get('totals.arrow'));
    expect(second.get('spectra.arrow')).toEqual(first.get('spectra.arrow'));
    expect(second.get('manifest.json')).not.toEqual(first.get('manifest.json'));
  });
});

test('the manifest holds what is needed to understand and repeat the run', () => {
  const { manifest } = packResult(fixtureResult(), record);
  const expected = execFileSync('sha256sum', { input: record.setupText }).toString().split(' ')[0];
  expect(manifest).toMatchObject({
    title: 'Crystal behind an aluminium window',
    seed: 'window-1',
    histories: 800_000,
    batches: 80,
    stopped: 'time_limit',
    run: {
      histories: 1_000_000,
      until: { quantity: 'full_energy', relative_error: 0.005 },
      time_limit_s: 600,
    },
    source: {
      kind: 'point',
      shape: { distance_cm: 25, offset_cm: 0 },
      nuclide: 'Cs-137',
      photons_per_decay: 0.8854,
      activity_Bq: 37000,
      live_time_s: 600,
    },
    extent: { kind: 'radius', radius_cm: 3.81 },
    physics: { bound_incoherent: true, doppler: false, cutoff_keV: 1 },
    timings: { wall_s: 600.4, threads: 2, finished: '2024-05-06T07:08:09.000Z' },
    setup: { text: record.setupText, sha256: expected },
  });
  expect(manifest.stack.map(({ material }) => material)).toEqual(['aluminium', null, 'NaI']);
});

test('the JSON object has the rows of totals.arrow and names what is not converged', () => {
  const stored = packResult(fixtureResult(), record);
  const object = resultObject(stored, 'out') as Record<string, unknown[]>;
  expect(object.totals[1]).toEqual({
    quantity: 'transmitted',
    layer: null,
    line_keV: null,
    mean: 0.00123412,
    std_error: 0.0000352,
    unit: '1',
  });
  expect(object.totals).toHaveLength(stored.totals.length);
  expect(object.not_converged).toContainEqual({
    quantity: 'full_energy',
    layer: 'crystal',
    line_keV: 661.657,
    relative_error: 0.0000112 / 0.0012098,
    reason: 'short_of_until',
  });
  expect(object).toMatchObject({ out: 'out', histories: 800_000, seed: 'window-1', stopped: 'time_limit' });
  expect(object.timings).toMatchObject({ wall_s: 600.4, histories_per_second: 1338.7 });
  expect(object.warnings).toHaveLength(1);
});

describe('a folder that is no whole result is refused', () => {
  let folder: string;
  let counter = 0;
  beforeEach(() => {
    folder = join(scratch, `broken-${counter++}`);
    writeResult(folder, fixtureResult(), record);
  });

  function refusal(): string {
    try {
      readResult(folder);
    } catch (error) {
      return `${(error as ThicksetError).code}: ${(error as ThicksetError).format().replaceAll(scratch, '')}`;
    }
    return 'none';
  }

  function editManifest(edit: (manifest: Record<string, unknown>) => unknown): void {
    const path = join(folder, 'manifest.json');
    writeFileSync(
      path,
      JSON.stringify(edit(JSON.parse(readFileSync(path, 'utf8')) as Record<string, unknown>)),
    );
  }

  test('no folder', () => {
    rmSync(folder, { recursive: true });
    expect(refusal()).toMatch(/^result_missing: \/broken-0\/manifest.json: no results here; /);
  });

  test('a file instead of a folder', () => {
    rmSync(folder, { recursive: true });
    writeFileSync(folder, '');
    expect(refusal()).toMatch(/^result_missing/);
  });

  test('a manifest that is cut off', () => {
    truncateSync(join(folder, 'manifest.json'), 100);
    expect(refusal()).toMatch(/^result_damaged: .*manifest\.json: damaged, it is no manifest of a result/);
  });

  test('a manifest of something else', () => {
    writeFileSync(join(folder, 'manifest.json'), '{"name": "app"}');
    expect(refusal()).toMatch(/^result_damaged: .*the format is not "thickset result 1"/);
  });

  test('a manifest without its source', () => {
    editManifest((manifest) => ({ ...manifest, source: undefined }));
    expect(refusal()).toMatch(/^result_damaged: .*source missing/);
  });

  test('figures of another run', () => {
    writeFileSync(join(folder, 'totals.arrow'), encodeTotals(fixtureResult().totals.slice(1)));
    expect(refusal()).toMatch(
      /^result_damaged: .*totals\.arrow: damaged, it is not the file that manifest\.json lists/,
    );
  });

  test('spectra cut off by a full disk', () => {
    truncateSync(join(folder, 'spectra.arrow'), 1000);
    expect(refusal()).toMatch(/^result_damaged: .*spectra\.arrow/);
  });

  test('figures gone', () => {
    rmSync(join(folder, 'totals.arrow'));
    expect(refusal()).toMatch(/^result_missing: .*totals\.arrow/);
  });
});
