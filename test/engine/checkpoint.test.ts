import { describe, expect, test } from 'vitest';
import { rangeOf, planBatches, MAX_BLOCKS } from '../../engine/batch-plan.js';
import {
  decodeState,
  encodeState,
  joinShards,
  playRun,
  Run,
  simulate,
  type RunResult,
  type RunState,
  type Setup,
} from '../../engine/index.js';
import { playBatch } from '../../engine/batch-worker.js';
import { ALL, slabSetup } from './slab-run.js';

const HISTORIES = 70_000;

function crystal(seed = 'checkpoint-1', histories = HISTORIES): Setup {
  return slabSetup(
    {
      stack: [
        ['aluminium', 0.05],
        ['NaI', 2, 'detector'],
      ],
      energyKeV: 300,
      physics: ALL,
      seed,
    },
    histories,
  );
}

/** What must be the same to the bit; times and the setup's aim may differ. */
function facts({ totals, spectra, histories, batches, balance, warnings }: RunResult): unknown {
  return { totals, spectra, histories, batches, balance, warnings };
}

/** Plays a run in this thread. */
function playHere(run: Run): Run {
  for (let task = run.take(); task !== null; task = run.take()) {
    const { problem, first, histories } = task;
    run.give(
      task,
      histories.map((count, i) => playBatch(problem, first + i, count)),
    );
  }
  return run;
}

/** A state through its bytes. */
const stored = (state: RunState): RunState => decodeState(encodeState(state, '')).state;

/** The state of a run after some batches. */
function stateAfter(setup: Setup, batches: number): RunState {
  const run = playHere(new Run(setup, { batches }));
  expect(run.batches).toBe(batches);
  return stored(run.state());
}

const whole = simulate(crystal(), { threads: 2 });

describe('a state saved and read back', () => {
  test.each([1, 3, 6])('after %d of 7 batches leads to the bits of the undisturbed run', async (batches) => {
    const resumed = await simulate(crystal(), { threads: 1, from: stateAfter(crystal(), batches) });
    expect(facts(resumed)).toEqual(facts(await whole));
  });

  test('of a complete run gives its result without playing anything', async () => {
    const resumed = await simulate(crystal(), { from: stateAfter(crystal(), 7) });
    expect(facts(resumed)).toEqual(facts(await whole));
    expect(resumed.timings.workerS).toBe(0);
  });

  test('stops an aimed run at the very batch where the undisturbed one stops', async () => {
    const aimed = crystal('aim', 200_000);
    const until = { quantity: 'full_energy', layer: null, relativeError: 0.008 };
    const setup = { ...aimed, run: { ...aimed.run, until } };
    const undisturbed = await simulate(setup, { threads: 2 });
    expect(undisturbed.stopped).toBe('until');
    expect(undisturbed.batches).toBeLessThan(20);
    const resumed = await simulate(setup, { threads: 2, from: stateAfter(setup, 9) });
    expect(facts(resumed)).toEqual(facts(undisturbed));
  });

  test('keeps the identity it was given', async () => {
    const bytes = encodeState(stateAfter(crystal(), 1), 'crystal, März');
    expect(decodeState(bytes).identity).toBe('crystal, März');
  });

  test('is refused when any of its bytes is flipped or missing', async () => {
    const bytes = encodeState(new Run(crystal(), { spectra: false }).state(), 'x');
    for (let at = 0; at < bytes.length; at++) {
      const flipped = bytes.slice();
      flipped[at] ^= 1;
      expect(() => decodeState(flipped), `byte ${at}`).toThrow(/checksum|no state/);
    }
    for (let length = 0; length < bytes.length; length += 7) {
      expect(() => decodeState(bytes.slice(0, length)), `${length} bytes`).toThrow(/checksum|no state/);
    }
  });

  test('is refused by a setup of other spectra', async () => {
    const from = stateAfter(crystal(), 1);
    const other = slabSetup({ stack: [['NaI', 2]], energyKeV: 300, physics: ALL, seed: 'x' }, HISTORIES);
    expect(() => new Run(other, { from })).toThrow(/not one of this setup/);
  });
});

test('checkpoints are saved at batch boundaries, and at the end of an interrupted run', async () => {
  const states: number[] = [];
  const controller = new AbortController();
  const checkpoint = {
    everyS: 0,
    save: ({ histories, batches }: RunState) => {
      states.push(batches);
      expect(histories).toBe(10_000 * batches);
      if (batches === 3) controller.abort();
    },
  };
  const run = await playRun(crystal('interrupt', 1e6), { threads: 1, checkpoint, signal: controller.signal });
  expect(run.stopped).toBe('interrupted');
  expect(states.slice(0, 3)).toEqual([1, 2, 3]);
  expect(states.at(-1)).toBe(run.batches);
});

describe('shards', () => {
  test.each([1, 2, 3, 7, 10])('of %d parts joined are the undivided run to the bit', async (count) => {
    const states: RunState[] = [];
    for (let index = 1; index <= count; index++) {
      states.push(stored(playHere(new Run(crystal(), { shard: { index, count } })).state()));
    }
    expect(facts(joinShards(crystal(), states))).toEqual(facts(await whole));
  });

  test('interrupted and resumed give the same state', async () => {
    const shard = { index: 2, count: 2 };
    const undisturbed = await playRun(crystal(), { threads: 1, shard });
    const from = stored(playHere(new Run(crystal(), { shard, batches: 2 })).state());
    const resumed = await playRun(crystal(), { threads: 1, shard, from });
    expect(encodeState(resumed.state(), '')).toEqual(encodeState(undisturbed.state(), ''));
  });

  test('one of which is missing are refused', () => {
    const half = playHere(new Run(crystal(), { shard: { index: 1, count: 2 } }));
    expect(() => joinShards(crystal(), [half.state()])).toThrow('3 batches of 7');
  });

  test.each([
    ['until', { until: { quantity: 'transmitted', layer: null, relativeError: 0.01 } }],
    ['time_limit', { timeLimitS: 5 }],
  ])('of a run with %s are refused', (name, change) => {
    const setup = { ...crystal(), run: { ...crystal().run, ...change } };
    expect(() => new Run(setup, { shard: { index: 1, count: 2 } })).toThrow(
      `a run with ${name} cannot be split`,
    );
  });

  test('cover every batch once, in whole blocks, however many there are', () => {
    for (const batches of [1, 7, 64, 65, 1000, 12_345]) {
      const plan = planBatches(batches * 10_000, 100);
      for (const count of [1, 2, 3, 7, 64, 100]) {
        let end = 0;
        for (let index = 1; index <= count; index++) {
          const range = rangeOf(plan, { index, count });
          expect(range.first, `${index} of ${count}`).toBe(end);
          expect(range.first % plan.batchesPerBlock === 0 || range.first === batches).toBe(true);
          end = range.end;
        }
        expect(end).toBe(batches);
      }
      expect(Math.ceil(plan.batches / plan.batchesPerBlock)).toBeLessThanOrEqual(MAX_BLOCKS);
    }
  });
});
