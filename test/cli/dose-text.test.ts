import { describe, expect, it, test } from 'vitest';
import type { QuantityRow, RunResult } from '../../engine/result.js';
import { doseRates, readableRate } from '../../cli/dose-rates.js';
import { resultObject } from '../../cli/result/result-json.js';
import { packResult, readResult, writeResult } from '../../cli/result/stored-result.js';
import { makeStyle } from '../../cli/text/style.js';
import { summaryLines } from '../../cli/text/summary-text.js';
import { fixtureResult, fixtureSetup } from './result-fixture.js';
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';

const row = (
  quantity: string,
  layer: string | null,
  mean: number | null,
  stdError: number | null,
  unit: string,
  reliability?: QuantityRow['reliability'],
): QuantityRow => ({
  quantity,
  layer,
  lineKeV: null,
  mean,
  stdError,
  unit,
  ...(reliability ? { reliability } : {}),
});

const solid = { contributing: 5000, vov: 0.002 };
const TOTALS = [
  row('incident', null, 0.5, 0, '1'),
  row('transmitted', null, 1.25e-5, 2e-7, '1', solid),
  row('ambient_dose', 'desk', 4.4e-8, 9e-10, 'pSv', solid),
  row('ambient_dose_uncollided', 'desk', 4.6e-9, 0, 'pSv'),
  row('dose_transmission', 'desk', 0.0033, 7e-5, '1', solid),
  row('ambient_dose', null, 0.015, 0.0012, 'pSv·cm²', { contributing: 30, vov: 0.4 }),
  row('dose_transmission', null, null, null, '1'),
  row('half_value_layer_1', 'window', 0.77, 0.01, 'cm'),
];
const result = (changes: Partial<RunResult> = {}) =>
  fixtureResult({
    setup: {
      ...fixtureSetup,
      extent: null,
      stack: fixtureSetup.stack.map((layer) => ({ ...layer, radiusCm: null, detector: null })),
      source: { ...fixtureSetup.source, activityBq: 3.7e10, liveTimeS: null },
    },
    totals: TOTALS,
    spectra: [],
    balance: {
      energyInKeV: 1000,
      energyDepositedKeV: 990,
      energyOutKeV: 12,
      relativeError: 0.002,
      relativeStdError: 0.0015,
    },
    stopped: 'histories',
    ...changes,
  });

test('a summary shows doses, their merit, their rates, and what cannot be relied on', () => {
  const packed = packResult(result(), { setupText: null, threads: 2, finished: new Date(0) });
  const style = makeStyle({ interactive: true, colour: false, unicode: true, width: 100 });
  const text = summaryLines(packed, style, 'none').join('\n');
  expect(`\n${text.slice(text.indexOf('What came out'))}\n`).toMatchInlineSnapshot(`
    "
    What came out                      per photon                         error  merit
      transmitted                            1.250e-5 ± 0.020e-5          1.6 %   3.3

    Dose                               per photon                         error  merit
      ambient_dose                           0.0150   ± 0.0012   pSv·cm²  8.0 %  0.13   ?
      dose_transmission                unknown
      half_value_layer_1       window        0.770    ± 0.010    cm       1.3 %     5
      ambient_dose             desk          4.400e-8 ± 0.090e-8 pSv      2.0 %     2
      ambient_dose_uncollided  desk          4.6e-9              pSv
      dose_transmission        desk          0.003300 ± 0.000070          2.1 %   1.9

    With this source
                   per decay            per second            error
      incident     0.4427                    1.638e10         exact
      transmitted  1.107e-5 ± 0.018e-5  409500        ± 6600  1.6 %

    Dose rates with this source
      ambient_dose             desk    5.19 ± 0.11 µSv/h
      ambient_dose_uncollided  desk  542.5         nSv/h

    ? not reliable: fewer than 50 histories contributed, or so unequally (relative variance of the
    variance above 0.1) that the error itself is uncertain; run ten times the histories

    Warnings
      electrons of window fly further than it is thick

    Energy in and energy accounted for differ by 0.002 of the whole (standard error 0.0015).
    These figures come from an idealised slab model. They support design; they replace no measurement,
    no local code and no qualified expert.
    "
  `);
});

describe('dose rates', () => {
  const source = packResult(result(), { setupText: null, threads: 2, finished: new Date(0) }).manifest.source;

  it('are doses at points times photons per hour', () => {
    const [rate, ...others] = doseRates(TOTALS, source);
    // pSv × photons/decay × Bq × s/h × µSv/pSv
    expect(rate.mean).toBeCloseTo(4.4e-8 * 0.8854 * 3.7e10 * 3600 * 1e-6, 12);
    expect(rate.stdError! / rate.mean).toBeCloseTo(9e-10 / 4.4e-8, 12);
    expect(rate.unit).toBe('uSv/h');
    expect(others.map(({ row: { quantity } }) => quantity)).toEqual(['ambient_dose_uncollided']);
  });

  it('need an activity', () => {
    expect(doseRates(TOTALS, { ...source, activity_Bq: null })).toEqual([]);
  });

  it.each([
    [0.00025, 250, 'pSv/h'],
    [0.0025, 2.5, 'nSv/h'],
    [2.5, 2.5, 'µSv/h'],
    [999, 999, 'µSv/h'],
    [1000, 1, 'mSv/h'],
    [13_000, 13, 'mSv/h'],
    [4e6, 4, 'Sv/h'],
    [0, 0, 'µSv/h'],
  ])('%f µSv/h reads as %f %s', (micro, mean, unit) => {
    const readable = readableRate({ mean: micro, stdError: null, unit: 'uSv/h' });
    expect(readable.mean).toBeCloseTo(mean, 12);
    expect(readable.unit).toBe(unit);
  });
});

describe('--json', () => {
  const packed = packResult(result(), { setupText: null, threads: 2, finished: new Date(0) });
  const object = resultObject(packed, null) as Record<string, Record<string, unknown>[]>;

  it('holds dose rates, reliability, figures of merit and the caution', () => {
    expect(object.dose_rates[0]).toMatchObject({ quantity: 'ambient_dose', layer: 'desk', unit: 'uSv/h' });
    expect(object.reliability).toContainEqual({
      quantity: 'ambient_dose',
      layer: null,
      contributing: 30,
      vov: 0.4,
    });
    const merit = object.precision.find(({ quantity }) => quantity === 'transmitted')!;
    const { worker_s } = packed.manifest.timings;
    expect(merit.figure_of_merit_per_s).toBeCloseTo(1 / ((2e-7 / 1.25e-5) ** 2 * worker_s), 6);
    expect(object.caution).toMatch(/they replace no measurement, no local code and no qualified expert/);
  });

  it('lists unreliable figures, and not those that the setup leaves open', () => {
    expect(object.not_converged).toEqual([
      {
        quantity: 'ambient_dose',
        layer: null,
        line_keV: null,
        relative_error: expect.closeTo(0.08, 9),
        reason: 'unreliable',
      },
    ]);
  });
});

test('a depth profile is written and read back unchanged, with the reliability of the figures', () => {
  const folder = join(mkdtempSync(join(tmpdir(), 'thickset-depth-')), 'out');
  const depth = [
    {
      layer: 'window',
      depthLowCm: 0,
      depthHighCm: 0.025,
      quantity: 'air_kerma',
      mean: 1.5,
      stdError: 0.1,
      unit: 'pGy·cm²',
    },
    {
      layer: 'window',
      depthLowCm: 0.025,
      depthHighCm: 0.05,
      quantity: 'air_kerma',
      mean: null,
      stdError: null,
      unit: 'pGy·cm²',
    },
  ];
  try {
    writeResult(folder, result({ depth }));
    const stored = readResult(folder);
    expect(stored.depth).toEqual(depth);
    expect(stored.totals).toEqual(TOTALS);
  } finally {
    rmSync(join(folder, '..'), { recursive: true });
  }
});
