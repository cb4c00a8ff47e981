import * as fs from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import polars from 'nodejs-polars';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { mergeSweep } from '../../cli/sweep/merge-sweep.js';
import { readSweepFile } from '../../cli/sweep/sweep-reader.js';
import { readSweepLog } from '../../cli/sweep/sweep-log.js';
import { viewSweep } from '../../cli/sweep/sweep-summary.js';
import { encodeSpectra } from '../../cli/result/result-tables.js';
import { EngineError, Run, simulate, type Simulator } from '../../engine/index.js';
import { arrowFiles } from './kills.js';
import { makePlayer } from './sweep-in-process.js';

const BASE = `title: Shielded crystal
source: {kind: beam, energy: 661.7 keV}
stack:
  - {name: shield, material: lead, thickness: 1 cm}
  - {name: crystal, material: NaI, thickness: 5 cm, detector: {}}
tally: {energy_bins: {width: 10 keV}}
run: {histories: 2e4}
`;

const SWEEP = `base: base.yaml
vary:
  stack.shield.thickness: {from: 0.5 cm, to: 2 cm, count: 4}
  source.energy: [300 keV, 661.7 keV, 1.3 MeV]
`;

const player = makePlayer(2);
let folder: string;
const inside = (...names: string[]) => join(folder, ...names);
const tableOf = (name: string) => polars.readIPC(fs.readFileSync(inside(name, 'points.arrow')));
const column = (name: string, of: string): unknown[] => tableOf(name).getColumn(of).toArray();

/** Writes a sweep file and plays it. */
function play(text: string, out: string, given: Parameters<typeof player.play>[2] = {}) {
  const path = inside(`${out}.yaml`);
  fs.writeFileSync(path, text);
  return player.play(path, inside(out), given);
}

async function errorOf(action: () => unknown): Promise<string> {
  try {
    await action();
  } catch (error) {
    return (error as Error).message.replaceAll(`${folder}/`, '');
  }
  throw new Error('nothing was thrown');
}

beforeAll(async () => {
  folder = fs.mkdtempSync(join(tmpdir(), 'thickset-sweep-'));
  fs.writeFileSync(inside('base.yaml'), BASE);
  expect((await play(SWEEP, 'whole')).end).toBe('complete');
});
afterAll(async () => {
  await player.close();
  fs.rmSync(folder, { recursive: true });
});

describe('the table of a sweep', () => {
  test('has a row for each point, and columns for the parameters and figures', () => {
    const table = tableOf('whole');
    expect(table.height).toBe(12);
    const facts = [
      'point',
      'stack.shield.thickness',
      'source.energy',
      'status',
      'stopped',
      'histories',
      'seed',
    ];
    expect(table.columns.slice(0, 7)).toEqual(facts);
    const figures = ['transmitted.mean', 'transmitted.std_error', 'full_energy.crystal.mean', 'error'];
    expect(table.columns).toEqual(expect.arrayContaining(figures));
    expect(column('whole', 'stack.shield.thickness').slice(0, 4)).toEqual([0.5, 0.5, 0.5, 1]);
    expect(column('whole', 'source.energy').slice(0, 4)).toEqual([300, 661.7, 1300, 300]);
    expect(new Set(column('whole', 'status'))).toEqual(new Set(['done']));
  });

  test('gives every point the very figures of a single run of its setup and seed', async () => {
    const { sweep } = readSweepFile(inside('whole.yaml'));
    for (const point of [0, 4, 11]) {
      const { setup } = sweep.setupOf(point);
      expect(setup.seed).toBe(column('whole', 'seed')[point]);
      const single = await simulate(setup, { threads: 1 });
      expect(single.totals.length).toBeGreaterThan(8);
      for (const { quantity, layer, mean, stdError } of single.totals) {
        const name = layer === null ? quantity : `${quantity}.${layer}`;
        expect(column('whole', `${name}.mean`)[point], name).toBe(mean);
        expect(column('whole', `${name}.std_error`)[point], name).toBe(stdError);
      }
    }
  });

  test('of fewer points has the same rows for the points that are left', async () => {
    await play(SWEEP.replace('count: 4', 'count: 2').replace('300 keV, ', ''), 'fewer');
    const seeds = column('whole', 'seed');
    const [few, all] = ['fewer', 'whole'].map((name) => column(name, 'deposited_energy.shield.mean'));
    expect(few).toHaveLength(4);
    column('fewer', 'seed').forEach((seed, at) => {
      expect(seeds).toContain(seed);
      expect(few[at]).toBe(all[seeds.indexOf(seed)]);
    });
  });

  test('tells lines of a source apart, and energies that are varied not', async () => {
    const lines = SWEEP.replace(
      'source.energy: [300 keV, 661.7 keV, 1.3 MeV]',
      'source.nuclide: [Co-60, Cs-137]',
    );
    fs.writeFileSync(inside('nuclide.yaml'), BASE.replace('energy: 661.7 keV', 'minimum_yield: 50 %'));
    await play(lines.replace('base.yaml', 'nuclide.yaml').replace('count: 4', 'count: 1'), 'lines');
    const names = tableOf('lines').columns.filter((name) => /^full_energy.*mean$/.test(name));
    expect(names).toEqual([
      'full_energy.crystal.1173.228_keV.mean',
      'full_energy.crystal.1332.492_keV.mean',
      'full_energy.crystal.mean',
    ]);
    expect(column('lines', names[0])).toEqual([expect.any(Number), null]);
    expect(column('lines', names[2])).toEqual([expect.any(Number), expect.any(Number)]);
  });

  test('is the same with any number of threads', async () => {
    const single = makePlayer(1);
    await single.play(inside('whole.yaml'), inside('single-thread'));
    await single.close();
    expect(arrowFiles(inside('single-thread'))).toEqual(arrowFiles(inside('whole')));
  });
});

test('a precision stops each point when its own figure is good enough', async () => {
  fs.writeFileSync(inside('long.yaml'), BASE.replace('2e4', '1e6'));
  const text = SWEEP.replace('base.yaml', 'long.yaml').replace('2 cm, count: 4', '1.2 cm, count: 2');
  const { view } = await play(`precision: 3 %\n${text}`, 'precise');
  expect(new Set(column('precise', 'stopped'))).toEqual(new Set(['until']));
  expect(new Set(column('precise', 'histories')).size).toBeGreaterThan(1);
  for (const { figures, watched } of view.points.values()) {
    expect(figures[2 * watched! + 1] / figures[2 * watched!]).toBeLessThanOrEqual(0.03);
  }
});

describe('a point that fails', () => {
  /** Fails the runs of one thickness as a dying thread would; all others are played. */
  const faulty = (thicknessCm: number): Pick<Simulator, 'play' | 'threads'> => ({
    threads: 2,
    play: (list) =>
      player.simulator.play({
        ...list,
        next: () => {
          const run = list.next();
          if (run?.setup.stack[0].thicknessCm === thicknessCm) {
            run.give = () => {
              throw new Error('out of memory');
            };
          }
          return run;
        },
      }),
  });

  test('is recorded with its error, stops no other, and is tried again on resuming', async () => {
    const { end, view } = await play(SWEEP, 'failing', { simulator: faulty(1) });
    expect(end).toBe('complete');
    const status = column('failing', 'status');
    expect(status.filter((word) => word === 'failed')).toHaveLength(3);
    expect(status.filter((word) => word === 'done')).toHaveLength(9);
    expect(column('failing', 'error')[3]).toMatch(/^a worker thread failed in batch \d: out of memory$/);
    expect(column('failing', 'transmitted.mean')[3]).toBeNull();
    expect(view.points.get(3)?.status).toBe('failed');
    await player.play(inside('failing.yaml'), inside('failing'), { resume: true });
    expect(arrowFiles(inside('failing'))).toEqual(arrowFiles(inside('whole')));
  });

  test('because its books do not close is one of them', async () => {
    const simulator: Pick<Simulator, 'play' | 'threads'> = {
      threads: 2,
      play: (list) =>
        player.simulator.play({
          ...list,
          onOver: (run: Run) => {
            run.result = () => {
              throw new EngineError('balance', 'energy is not conserved');
            };
            list.onOver?.(run);
          },
        }),
    };
    await play(SWEEP.replace('count: 4', 'count: 1'), 'unbalanced', { simulator });
    expect(column('unbalanced', 'error')).toEqual(Array(3).fill('energy is not conserved'));
  });
});

describe('a sweep that is interrupted', () => {
  test('keeps what it has, says what is left, and ends like an undisturbed one', async () => {
    const controller = new AbortController();
    let tasks = 0;
    const onProgress = () => {
      if (++tasks === 8) controller.abort();
    };
    const { end } = await play(SWEEP, 'stopped', { options: { signal: controller.signal, onProgress } });
    expect(end).toBe('interrupted');
    const status = column('stopped', 'status');
    expect(status).toContain('done');
    expect(status).toContain('not_begun');
    expect(viewSweep(inside('stopped')).state).toBe('stopped');
    await player.play(inside('stopped.yaml'), inside('stopped'), { resume: true });
    expect(arrowFiles(inside('stopped'))).toEqual(arrowFiles(inside('whole')));
    expect(viewSweep(inside('stopped')).state).toBe('ended');
  });

  test.each([
    ['without', ''],
    ['with', 'spectra: true\n'],
  ])('in the middle of points %s spectra goes on in the middle of them', async (word, spectra) => {
    fs.writeFileSync(inside('longer.yaml'), BASE.replace('2e4', '2e5'));
    const text = `${spectra}${SWEEP.replace('base.yaml', 'longer.yaml').replace('count: 4', 'count: 1')}`;
    const controller = new AbortController();
    const onProgress = () => {
      if (log()?.points.get(0)?.status === 'playing') controller.abort();
    };
    const name = `middle-${word}`;
    const log = () => readSweepLog(inside(name));
    const options = { signal: controller.signal, onProgress, checkpointS: 0 };
    await play(text, name, { options });
    const entry = log()!.points.get(0)!;
    expect(entry.batches).toBeGreaterThan(0);
    expect(entry.batches).toBeLessThan(20);
    await player.play(inside(`${name}.yaml`), inside(name), { resume: true });
    await play(text, `${name}-whole`);
    expect(arrowFiles(inside(name))).toEqual(arrowFiles(inside(`${name}-whole`)));
    const names = ['journal.bin', 'manifest.json', 'points.arrow', ...(spectra === '' ? [] : ['spectra'])];
    expect(fs.readdirSync(inside(name)).sort()).toEqual(names);
  });
});

test('the spectra of a point are those of a single run', async () => {
  await play(`spectra: true\n${SWEEP.replace('count: 4', 'count: 1')}`, 'spectra');
  expect(fs.readdirSync(inside('spectra', 'spectra'))).toEqual([1, 2, 3].map((n) => `point-00000${n}.arrow`));
  const { setup } = readSweepFile(inside('spectra.yaml')).sweep.setupOf(1);
  const single = await simulate(setup, { threads: 1 });
  const written = fs.readFileSync(inside('spectra', 'spectra', 'point-000002.arrow'));
  expect(written.equals(encodeSpectra(single.spectra))).toBe(true);
});

describe('going on with a sweep', () => {
  test.each([
    [
      'a value',
      (text: string) => text.replace('1.3 MeV', '1.4 MeV'),
      'vary["source.energy"][2] was 1.3 MeV, is 1.4 MeV',
    ],
    [
      'a number',
      (text: string) => text.replace('count: 4', 'count: 5'),
      'vary["stack.shield.thickness"] had 4 entries, has 5',
    ],
    ['a seed', (text: string) => `seed: b\n${text}`, 'seed was thickset, is b'],
    [
      'a precision',
      (text: string) => `precision: 1 %\n${text}`,
      'precision was not there, is {quantity: null, layer: null',
    ],
    ['spectra', (text: string) => `spectra: true\n${text}`, 'spectra was false, is true'],
    [
      'a base',
      (text: string) => text.replace('base.yaml', 'base2.yaml'),
      'base.stack.crystal.thickness was 5 cm, is 6 cm',
    ],
  ])('of another %s is refused, and says what has changed', async (_, change, words) => {
    fs.writeFileSync(inside('base2.yaml'), BASE.replace('5 cm', '6 cm'));
    fs.writeFileSync(inside('changed.yaml'), change(SWEEP));
    const before = arrowFiles(inside('whole'));
    const message = await errorOf(() =>
      player.play(inside('changed.yaml'), inside('whole'), { resume: true }),
    );
    expect(message).toContain(`whole: holds another sweep: ${words}`);
    expect(arrowFiles(inside('whole'))).toEqual(before);
  });

  test('is not done unasked, and a folder of something else is not touched', async () => {
    const again = (out: string, resume: boolean, overwrite = false) =>
      errorOf(() => player.play(inside('whole.yaml'), inside(out), { resume, overwrite }));
    expect(await again('whole', false)).toBe('whole: holds a sweep already');
    fs.mkdirSync(inside('thesis'));
    fs.writeFileSync(inside('thesis', 'journal.bin'), 'a diary');
    expect(await again('thesis', true)).toBe('thesis: holds something other than a sweep');
    expect(await again('thesis', false, true)).toBe('thesis: holds something other than a sweep');
    expect(fs.readFileSync(inside('thesis', 'journal.bin'), 'utf8')).toBe('a diary');
  });

  test('of more time is no change', async () => {
    fs.writeFileSync(inside('more.yaml'), `time_limit: 5 h\n${SWEEP}`);
    const { end } = await player.play(inside('more.yaml'), inside('whole'), { resume: true });
    expect(end).toBe('complete');
  });
});

describe('a journal that was damaged', () => {
  const damage = (name: string, change: (bytes: Buffer) => Buffer) => {
    fs.cpSync(inside('whole'), inside(name), { recursive: true });
    const path = inside(name, 'journal.bin');
    fs.writeFileSync(path, change(fs.readFileSync(path)));
  };
  const flip = (at: (length: number) => number) => (bytes: Buffer) => {
    bytes[at(bytes.length)] ^= 16;
    return bytes;
  };
  const goOn = async (name: string) => {
    const told: string[] = [];
    const options = { warn: (message: string) => void told.push(message) };
    await player.play(inside('whole.yaml'), inside(name), { resume: true, options });
    return told;
  };

  test('at its end is cut, and the sweep goes on to the same table', async () => {
    damage('torn', (bytes) => bytes.subarray(0, bytes.length - 1500));
    expect(await goOn('torn')).toEqual([]);
    expect(arrowFiles(inside('torn'))).toEqual(arrowFiles(inside('whole')));
  });

  test('in the middle is told, and what it said there is played again', async () => {
    damage(
      'flipped',
      flip((length) => length >> 1),
    );
    expect(await goOn('flipped')).toEqual([
      expect.stringMatching(/^the journal is damaged at byte \d+; what it told/),
    ]);
    expect(arrowFiles(inside('flipped'))).toEqual(arrowFiles(inside('whole')));
  });

  test('at its beginning is refused', async () => {
    damage(
      'headless',
      flip(() => 100),
    );
    expect(await errorOf(() => goOn('headless'))).toBe(
      'headless/journal.bin: damaged, its beginning is not that of a sweep',
    );
  });

  test('before it had a beginning is begun', async () => {
    damage('empty', (bytes) => bytes.subarray(0, 50));
    await goOn('empty');
    expect(arrowFiles(inside('empty'))).toEqual(arrowFiles(inside('whole')));
  });
});

describe('shards of a sweep', () => {
  const part = async (index: number, count: number, text = SWEEP) => {
    const name = `part-${index}-of-${count}`;
    if (!fs.existsSync(inside(name))) await play(text, name, { shard: { index, count } });
    return name;
  };
  const merge = (names: readonly string[], out: string) =>
    mergeSweep(
      names.map((name) => ({ folder: inside(name), content: readSweepLog(inside(name))! })),
      inside(out),
      false,
    );

  test.each([1, 2, 3, 7])('of %d parts merged are the undivided sweep to the bit', async (count) => {
    const names: string[] = [];
    for (let index = count; index >= 1; index--) names.push(await part(index, count));
    merge(names, `merged-${count}`);
    expect(arrowFiles(inside(`merged-${count}`))).toEqual(arrowFiles(inside('whole')));
    expect(viewSweep(inside(`merged-${count}`)).state).toBe('ended');
  });

  test('with spectra bring them along', async () => {
    const text = `spectra: true\n${SWEEP.replace('count: 4', 'count: 1')}`;
    for (const index of [1, 2]) await play(text, `spectra-${index}`, { shard: { index, count: 2 } });
    merge(['spectra-1', 'spectra-2'], 'spectra-merged');
    expect(arrowFiles(inside('spectra-merged'))).toEqual(arrowFiles(inside('spectra')));
  });

  test('that are missing, given twice, unfinished or none are refused, and nothing is written', async () => {
    for (const [index, count] of [
      [1, 2],
      [2, 2],
      [1, 3],
      [3, 3],
    ])
      await part(index, count);
    const refusal = (...names: string[]) => errorOf(() => merge(names, 'never'));
    expect(await refusal('part-1-of-3', 'part-3-of-3')).toBe('missing of 3 shards: 2');
    expect(await refusal('part-1-of-2', 'part-1-of-2')).toBe(
      'shard given twice: 1 in part-1-of-2 and part-1-of-2',
    );
    expect(await refusal('part-1-of-2', 'part-3-of-3')).toContain('shards of different divisions');
    expect(await refusal('whole')).toBe('whole: holds a whole sweep, not a shard');
    fs.cpSync(inside('part-1-of-2'), inside('cut'), { recursive: true });
    fs.truncateSync(inside('cut', 'journal.bin'), fs.statSync(inside('cut', 'journal.bin')).size - 1);
    expect(await refusal('cut', 'part-2-of-2')).toBe('cut: its shard is not finished');
    await play(`seed: other\n${SWEEP}`, 'other-2', { shard: { index: 2, count: 2 } });
    expect(await refusal('part-1-of-2', 'other-2')).toBe(
      'other-2: holds another sweep than part-1-of-2: seed was thickset, is other',
    );
    expect(fs.existsSync(inside('never'))).toBe(false);
  });
});

test('a sweep with a time limit begins every point, and plays most where errors are largest', async () => {
  fs.writeFileSync(inside('night-base.yaml'), BASE.replace('2e4', '1e9'));
  const text = SWEEP.replace('base.yaml', 'night-base.yaml').replace(
    '[300 keV, 661.7 keV, 1.3 MeV]',
    '[300 keV]',
  );
  const precision = 'precision: {quantity: transmitted, relative_error: 0.001 %}\n';
  const { end, view } = await play(`time_limit: 5 s\n${precision}${text}`, 'night');
  expect(end).toBe('time_limit');
  expect(new Set(column('night', 'status'))).toEqual(new Set(['unfinished']));
  const histories = column('night', 'histories') as number[];
  // At 300 keV each half centimetre of lead takes away nine tenths: the thickest layer has by far the largest error.
  expect(Math.max(...histories)).toBe(histories[3]);
  expect(histories[3]).toBeGreaterThan(3 * histories[0]);
  const longer = `time_limit: 6 s\n${precision}${text}`;
  fs.writeFileSync(inside('night.yaml'), longer);
  const again = await player.play(inside('night.yaml'), inside('night'), { resume: true });
  expect(again.view.elapsedS).toBeGreaterThan(view.elapsedS);
  const later = column('night', 'histories') as number[];
  later.forEach((count, at) => expect(count).toBeGreaterThanOrEqual(histories[at]));
});
