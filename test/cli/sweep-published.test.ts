import * as fs from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import polars from 'nodejs-polars';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { readSweepFile } from '../../cli/sweep/sweep-reader.js';
import { Run } from '../../engine/index.js';
import { publishedRows } from '../published/csv.js';
import { makePlayer } from './sweep-in-process.js';

const player = makePlayer(2);
let folder: string;
const inside = (...names: string[]) => join(folder, ...names);
const column = (name: string, of: string): unknown[] =>
  polars
    .readIPC(fs.readFileSync(inside(name, 'points.arrow')))
    .getColumn(of)
    .toArray();

beforeAll(() => {
  folder = fs.mkdtempSync(join(tmpdir(), 'thickset-published-'));
});
afterAll(async () => {
  await player.close();
  fs.rmSync(folder, { recursive: true });
});

describe('narrow-beam attenuation, swept over materials and energies', () => {
  const published = publishedRows('narrow-beam');
  const HISTORIES = 1e5;

  beforeAll(async () => {
    const list = (of: (row: (typeof published)[number]) => string) => `[${published.map(of).join(', ')}]`;
    // One mean free path each, where the transmission tells the coefficient best.
    const thickness = list((row) => `${(1 / Number(row.mass_attenuation_cm2_per_g)).toPrecision(4)} g/cm2`);
    fs.writeFileSync(
      inside('foils.yaml'),
      `seed: foils
base:
  source: {kind: beam, energy: 60 keV}
  stack: [{name: foil, material: aluminium, thickness: 1 g/cm2}]
  run: {histories: ${HISTORIES}, transport: analog}
combine: zip
vary:
  stack.foil.material: ${list((row) => row.material)}
  source.energy: ${list((row) => `${row.energy_keV} keV`)}
  stack.foil.thickness: ${thickness}
`,
    );
    await player.play(inside('foils.yaml'), inside('foils'));
  });

  test.each(published.map((row, at) => [row.material, Number(row.energy_keV), at] as const))(
    'of %s at %d keV is the published one',
    (_material, _energyKeV, at) => {
      const expected = Number(published[at].mass_attenuation_cm2_per_g);
      const perArea = column('foils', 'stack.foil.thickness')[at] as number;
      const uncollided = column('foils', 'uncollided.mean')[at] as number;
      const found = -Math.log(uncollided) / perArea;
      // 0.3 %: the table's four figures and its own interpolation. The rest is statistics of −ln(T) at one mean free
      // path, sigma = √((e − 1)/N); 4 sigma, false alarm 6e-5 for each of 16 points, seed fixed.
      const tolerance = 0.003 + 4 * Math.sqrt((Math.E - 1) / HISTORIES);
      expect(Math.abs(found / expected - 1)).toBeLessThan(tolerance);
    },
  );
});

test('the efficiency curve of a crystal, swept over energies, is that of single runs to the bit', async () => {
  fs.writeFileSync(
    inside('curve.yaml'),
    `base:
  seed: curve
  source: {kind: point, distance: 25 cm, energy: 662 keV}
  stack:
    - {name: can, material: aluminium, thickness: 0.5 mm, radius: 4.1 cm}
    - {name: crystal, material: NaI, thickness: 3 in, detector: {fwhm: 7 % at 661.7 keV}}
  extent: {radius: 3.81 cm}
  run: {histories: 2e4}
vary:
  source.energy: {from: 30 keV, to: 3 MeV, count: 15, spacing: log}
`,
  );
  await player.play(inside('curve.yaml'), inside('curve'));
  const { sweep } = readSweepFile(inside('curve.yaml'));
  const singles = Array.from({ length: sweep.points }, (_, point) => new Run(sweep.setupOf(point).setup));
  const waiting = [...singles];
  await player.simulator.play({ next: () => waiting.shift() ?? null });
  for (const quantity of ['full_energy', 'interacting', 'peak_to_total']) {
    const [means, errors] = ['mean', 'std_error'].map((part) =>
      column('curve', `${quantity}.crystal.${part}`),
    );
    singles.forEach((run, point) => {
      const row = run
        .result()
        .totals.find((total) => total.quantity === quantity && total.layer === 'crystal');
      expect([means[point], errors[point]], `${quantity} of point ${point + 1}`).toEqual([
        row?.mean,
        row?.stdError,
      ]);
    });
  }
  const peaks = column('curve', 'full_energy.crystal.mean') as number[];
  // The whole crystal stops 30 keV photons that come through the can, and lets more and more escape above.
  expect(peaks[4]).toBeGreaterThan(peaks[9]);
  expect(peaks[9]).toBeGreaterThan(peaks[14]);
});
