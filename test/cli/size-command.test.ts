import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it, test } from 'vitest';
import type { SizeAnswer } from '../../engine/index.js';
import { parseSetup } from '../../cli/setup-reader.js';
import { parseLimit, parseTransmission } from '../../cli/size/limit-words.js';
import { makeTask } from '../../cli/size/size-goals.js';
import { sizeObject, type SizeReport } from '../../cli/size/size-json.js';
import { sizeLines } from '../../cli/size/size-text.js';
import { makeStyle } from '../../cli/text/style.js';
import { runCli } from './run-cli.js';

const WALL = `
title: A wall
seed: wall
source: {kind: point, distance: 1 m, energy: 661.7 keV, activity: 37 GBq}
stack:
  - {name: steel, material: iron, thickness: 1 cm}
  - {name: lead, material: lead, thickness: 2 cm}
tally:
  dose: [ambient_dose]
  dose_points: [{name: desk, behind: 30 cm}, {name: door, behind: 1 m, offset: 2 m}]
`;
const setup = parseSetup(WALL).setup;

describe('a limit', () => {
  it.each([
    ['ambient_dose <= 2.5 uSv/h', { quantity: 'ambient_dose', place: null, microPerHour: 2.5 }],
    ['ambient_dose at desk <= 2.5 µSv/h', { quantity: 'ambient_dose', place: 'desk', microPerHour: 2.5 }],
    ['air_kerma<1 mGy/h', { quantity: 'air_kerma', place: null, microPerHour: 1000 }],
    [
      'effective_dose_ap at the far door ≤ 20 nSv/h',
      { quantity: 'effective_dose_ap', place: 'the far door', microPerHour: 0.02 },
    ],
  ])('reads as it is written: %s', (text, limit) => {
    const read = parseLimit(text);
    expect({ ...read, microPerHour: Number(read.microPerHour.toPrecision(12)) }).toEqual(limit);
  });

  it.each([
    ['2.5 uSv/h', 'cannot be understood; write it as in'],
    ['ambient_dose = 2.5 uSv/h', 'cannot be understood'],
    ['ambient_dose <= 2.5 uSv', 'cannot be understood'],
    ['ambient_doze <= 2.5 uSv/h', 'unknown dose quantity ambient_doze; did you mean ambient_dose?'],
    ['air_kerma <= 2.5 uSv/h', 'air_kerma is given in Gy/h'],
    ['ambient_dose <= 0 uSv/h', 'the limit must be more than 0'],
    ['ambient_dose <= 1e999 uSv/h', 'the limit must be more than 0'],
  ])('that makes no sense is refused with the way out: %s', (text, words) => {
    expect(() => parseLimit(text)).toThrow(expect.objectContaining({ code: 'usage' }));
    try {
      parseLimit(text);
    } catch (error) {
      expect((error as { format: () => string }).format()).toContain(words);
    }
  });

  it.each([
    ['1e-3', 1e-3],
    ['0.1 %', 1e-3],
    ['5%', 0.05],
  ])('on the transmission reads as a share: %s', (text, share) => {
    expect(parseTransmission(text)).toBeCloseTo(share, 15);
  });

  it.each(['0', '1', '-0.1', 'a tenth', '120 %'])('on the transmission is refused: %s', (text) => {
    expect(() => parseTransmission(text)).toThrow(/must be a share between 0 and 1/);
  });
});

describe('goals', () => {
  it('hold at every dose point, or at the one named', () => {
    const all = makeTask(setup, [parseLimit('ambient_dose <= 2.5 uSv/h')], []);
    expect(all.goals.map(({ goal }) => goal.place)).toEqual(['desk', 'door']);
    const one = makeTask(setup, [parseLimit('ambient_dose at door <= 2.5 uSv/h')], [0.1]);
    expect(one.goals.map(({ goal }) => [goal.kind, goal.place])).toEqual([
      ['dose', 'door'],
      ['transmission', 'desk'],
      ['transmission', 'door'],
    ]);
  });

  it('turn a dose rate into a dose per photon by the activity', () => {
    const [{ goal }] = makeTask(setup, [parseLimit('ambient_dose at desk <= 2.5 uSv/h')], []).goals;
    // µSv/h over photons per hour, in pSv
    expect(goal.limit).toBeCloseTo((2.5 * 1e6) / (3.7e10 * 3600), 18);
  });

  it('are set 30 cm behind where no point is given', () => {
    const bare = { ...setup, tally: { ...setup.tally, dosePoints: [] } };
    const task = makeTask(bare, [parseLimit('ambient_dose <= 2.5 uSv/h')], []);
    expect(task.usualPoint).toBe(true);
    expect(task.setup.tally.dosePoints).toEqual([{ name: '30 cm behind', zCm: 33, offsetCm: 0 }]);
  });

  it.each([
    [{ activityBq: null }, 'needs the activity of the source'],
    [{ shape: { kind: 'diffuse', law: 'isotropic' } }, 'a diffuse source has no end'],
  ] as const)('on a dose rate need a source that has one: %o', (source, words) => {
    const other = { ...setup, source: { ...setup.source, ...source } };
    expect(() => makeTask(other, [parseLimit('ambient_dose <= 1 uSv/h')], [])).toThrow(words);
  });

  it('at a place that is not there name the nearest', () => {
    const limit = parseLimit('ambient_dose at desc <= 1 uSv/h');
    expect(() => makeTask(setup, [limit], [])).toThrow(/no dose point is called desc/);
  });
});

describe('the answer', () => {
  const task = makeTask(setup, [parseLimit('ambient_dose at desk <= 2.5 uSv/h')], []);
  const [{ goal }] = task.goals;
  const state = (share: number) => ({
    goal,
    value: share * goal.limit,
    stdError: 0.005 * goal.limit,
    upper95: (share + 0.0082) * goal.limit,
    isReliable: true,
  });
  const trial = (thicknessCm: number, share: number) => ({
    thicknessCm,
    excess: { log: Math.log(share), stdError: 0.01, state: state(share) },
    states: [state(share)],
    seed: 'wall/size/0',
    histories: 20_000,
  });
  const FOUND: SizeAnswer = {
    found: { verdict: 'found', thicknessCm: 4.0523, stdErrorCm: 0.011, perCm: 1.1 },
    intervalCm: [4.0307, 4.0739],
    roundedCm: 4.1,
    confirmations: [
      { thicknessCm: 4.1, states: [state(0.957)], seed: 'wall/confirm/0', histories: 50_000, isMet: true },
    ],
    trials: [trial(2, 9), trial(4, 1.05)],
  };
  const report = (answer: SizeAnswer, tradeOff: SizeReport['tradeOff'] = null): SizeReport => ({
    task,
    layer: 'lead',
    stepCm: 0.1,
    answer,
    tradeOff,
    wallS: 4.2,
  });
  const text = (answer: SizeAnswer, tradeOff: SizeReport['tradeOff'] = null): string => {
    const style = makeStyle({ interactive: true, colour: false, unicode: true, width: 80 });
    return `\n${sizeLines(report(answer, tradeOff), style).join('\n')}\n`;
  };

  test('names thickness, interval, step and confirmation, with the caution', () => {
    const pairs = [
      { otherCm: 0, found: { verdict: 'found' as const, thicknessCm: 4.4, stdErrorCm: 0.05, perCm: 1.1 } },
      { otherCm: 2, found: { verdict: 'none_needed' as const } },
    ];
    expect(text(FOUND, { layer: 'steel', pairs })).toMatchInlineSnapshot(`
      "
      Thickness of lead

      4.052 ± 0.011 cm just meets the limits (95 % interval 4.031 cm to 4.074 cm)
      4.1 cm rounded up to a step of 1 mm

      Confirmed by an independent run (seed wall/confirm/0):
        ambient_dose  desk  2.393 ± 0.013 µSv/h  at most 2.413 µSv/h with 95 %  limit 2.5 µSv/h

      Pairs of equal dose (not rounded, not confirmed)
        steel  lead              together
        0 cm   4.400 ± 0.050 cm  49.94 g/cm2
        2 cm   0 cm              15.75 g/cm2

      3 runs in 4.2 s
      Photons that pass beside a shield of finite size are not counted. These figures
      come from an idealised slab model. They support design; they replace no
      measurement, no local code and no qualified expert.
      "
    `);
  });

  test('says when none is needed', () => {
    const none: SizeAnswer = {
      ...FOUND,
      found: { verdict: 'none_needed' },
      intervalCm: null,
      roundedCm: null,
      confirmations: [],
      trials: [trial(0, 0.4)],
    };
    expect(text(none)).toMatchInlineSnapshot(`
      "
      Thickness of lead

      None is needed: without lead every limit is met.
        ambient_dose  desk  1.000 ± 0.013 µSv/h  at most 1.02 µSv/h with 95 %  limit 2.5 µSv/h

      1 run in 4.2 s
      Photons that pass beside a shield of finite size are not counted. These figures
      come from an idealised slab model. They support design; they replace no
      measurement, no local code and no qualified expert.
      "
    `);
  });

  test('says when no thickness will do', () => {
    const last = trial(30, 3);
    const none: SizeAnswer = {
      ...FOUND,
      found: { verdict: 'impossible', last },
      intervalCm: null,
      roundedCm: null,
      confirmations: [],
      trials: [last],
    };
    expect(text(none)).toMatchInlineSnapshot(`
      "
      Thickness of lead

      No thickness meets the limits: at 30 cm the dose falls no further. It comes from
      elsewhere: past the layer, from in front of it, or from layers behind it.
        ambient_dose  desk  7.500 ± 0.013 µSv/h  at most 7.521 µSv/h with 95 %  limit 2.5 µSv/h

      1 run in 4.2 s
      Photons that pass beside a shield of finite size are not counted. These figures
      come from an idealised slab model. They support design; they replace no
      measurement, no local code and no qualified expert.
      "
    `);
  });

  test('says when the confirmation failed', () => {
    const failed = { ...FOUND.confirmations[0], states: [state(1.2)], isMet: false };
    expect(text({ ...FOUND, confirmations: [failed] })).toContain('Not confirmed');
    expect(sizeObject(report({ ...FOUND, confirmations: [failed] })).verdict).toBe('unconfirmed');
  });

  test('as an object has numbers in fixed units', () => {
    expect(sizeObject(report(FOUND))).toMatchObject({
      verdict: 'found',
      layer: 'lead',
      thickness_cm: 4.0523,
      interval_95_cm: [4.0307, 4.0739],
      rounded_cm: 4.1,
      confirmation: {
        met: true,
        runs: 1,
        goals: [
          {
            quantity: 'ambient_dose',
            place: 'desk',
            value: expect.closeTo(0.957 * 2.5, 9),
            limit: expect.closeTo(2.5, 9),
            unit: 'uSv/h',
          },
        ],
      },
      caution: expect.stringContaining('no qualified expert'),
    });
  });
});

describe('the command', () => {
  let folder: string;
  beforeAll(() => {
    folder = mkdtempSync(join(tmpdir(), 'thickset-size-'));
    writeFileSync(join(folder, 'wall.yaml'), WALL);
  });
  afterAll(() => rmSync(folder, { recursive: true }));
  const size = (...args: string[]) => runCli(['size', 'wall.yaml', ...args], { cwd: folder });

  test('sizes a layer and exits with 0', async () => {
    const { code, stdout, stderr } = await size(
      '--layer',
      'lead',
      '--limit',
      'ambient_dose at desk <= 20 uSv/h',
      '--step',
      '5 mm',
      '--json',
    );
    expect({ code, stderr }).toEqual({ code: 0, stderr: '' });
    const answer = JSON.parse(stdout) as {
      verdict: string;
      rounded_cm: number;
      confirmation: { met: boolean };
    };
    expect(answer.verdict).toBe('found');
    expect(answer.confirmation.met).toBe(true);
    expect((answer.rounded_cm * 2) % 1).toBeCloseTo(0, 9);
  });

  test('exits with 6 where no thickness will do', async () => {
    const front = WALL.replace('behind: 30 cm', 'in_front: 20 cm');
    writeFileSync(join(folder, 'front.yaml'), front);
    const args = ['size', 'front.yaml', '--layer', 'lead', '--limit', 'ambient_dose at desk <= 1 uSv/h'];
    const { code, stdout } = await runCli(args, { cwd: folder });
    expect(code).toBe(6);
    expect(stdout).toContain('No thickness meets the limits');
  });

  test.each([
    [['--layer', 'lead'], 'nothing to meet; give --limit "ambient_dose <= 2.5 uSv/h" or --transmission 1e-3'],
    [['--layer', 'leda', '--transmission', '0.1'], 'no layer is called leda; layers: steel, lead'],
    [
      ['--layer', 'lead', '--transmission', '0.1', '--trade-off', 'lead'],
      '--trade-off needs another layer than --layer',
    ],
    [['--layer', 'lead', '--transmission', '2'], '--transmission "2": must be a share between 0 and 1'],
  ])('refuses what it cannot do: %s', async (args, words) => {
    const { code, stdout, stderr } = await size(...args);
    expect({ code, stdout }).toEqual({ code: 2, stdout: '' });
    expect(stderr).toContain(words);
  });
});
