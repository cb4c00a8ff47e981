import { setFlagsFromString } from 'node:v8';
import { runInNewContext } from 'node:vm';
import { afterAll, expect, test } from 'vitest';
import { Run, simulate, Simulator, type Setup } from '../../engine/index.js';
import { ALL, slabSetup } from './slab-run.js';

const simulator = new Simulator(2);
afterAll(() => simulator.close());

function slab(cm: number, histories: number): Setup {
  return slabSetup({ stack: [['water', cm]], energyKeV: 200, physics: ALL, seed: `slab-${cm}` }, histories);
}

/** Plays setups one after the other in the threads of `simulator`. */
async function playAll(setups: readonly Setup[], signal?: AbortSignal): Promise<Run[]> {
  const [waiting, over] = [[...setups], [] as Run[]];
  await simulator.play({
    next: () => (waiting.length > 0 ? new Run(waiting.shift()!) : null),
    onOver: (run) => over.push(run),
    signal,
  });
  return over;
}

test('many runs in one set of threads give what each gives by itself', async () => {
  const setups = [0.1, 5, 1, 20].map((cm, i) => slab(cm, 5_000 + 9_000 * i));
  const runs = await playAll(setups);
  expect(runs).toHaveLength(setups.length);
  for (const run of runs) {
    const alone = await simulate(run.setup, { threads: 1 });
    expect(run.result().totals).toEqual(alone.totals);
    expect(run.result().spectra).toEqual(alone.spectra);
  }
});

test('a run is begun before the one before is over, so that no thread waits', async () => {
  const begun: number[] = [];
  let over = 0;
  const setups = Array.from({ length: 6 }, (_, i) => slab(i + 1, 10_000));
  await simulator.play({
    next: () => {
      const setup = setups.shift();
      if (!setup) return null;
      begun.push(over);
      return new Run(setup);
    },
    onOver: () => over++,
  });
  expect(begun.slice(0, 4)).toEqual([0, 0, 0, 0]);
  expect(over).toBe(6);
});

test('a batch that fails once is played again, and the result is the same', async () => {
  const run = new Run(slab(2, 30_000));
  let failures = 0;
  const give = run.give.bind(run);
  run.give = (task, results) => {
    if (failures++ === 0) throw new Error('the thread died');
    give(task, results);
  };
  let next: Run | null = run;
  await simulator.play({ next: () => [next, (next = null)][0] });
  expect(failures).toBe(4);
  expect(run.result().totals).toEqual((await simulate(slab(2, 30_000), { threads: 1 })).totals);
});

test('a run that fails twice on a batch is given up, with its reason, and the others go on', async () => {
  const bad = new Run(slab(3, 30_000));
  bad.give = () => {
    throw new Error('no more memory');
  };
  const waiting = [bad, new Run(slab(4, 30_000))];
  const over: Run[] = [];
  await simulator.play({ next: () => waiting.shift() ?? null, onOver: (run) => over.push(run) });
  expect(over).toHaveLength(2);
  expect(bad.failure?.message).toMatch(/failed in batch \d: no more memory/);
  expect(() => bad.result()).toThrow(bad.failure!);
  expect(over.find((run) => run !== bad)?.histories).toBe(30_000);
});

test('an interrupted list keeps whole batches of the runs under way and begins no more', async () => {
  const controller = new AbortController();
  let begun = 0;
  const over: Run[] = [];
  await simulator.play({
    next: () => {
      begun++;
      return new Run(slab(begun, 1e7));
    },
    onTask: () => controller.abort(),
    onOver: (run) => over.push(run),
    signal: controller.signal,
  });
  expect(begun).toBe(1);
  expect(over.map(({ stopped }) => stopped)).toEqual(['interrupted']);
  expect(over[0].histories).toBeGreaterThan(0);
  expect(over[0].histories % 10_000).toBe(0);
});

test('an error in what feeds the threads ends the play with that error', async () => {
  const play = simulator.play({
    next: () => {
      throw new Error('the disk is full');
    },
  });
  await expect(play).rejects.toThrow('the disk is full');
});

test('the results of batches that are merged are not held on to', async () => {
  setFlagsFromString('--expose-gc');
  const collect = runInNewContext('gc') as () => void;
  const results: WeakRef<object>[] = [];
  const run = new Run(slab(0.1, 300_000));
  const give = run.give.bind(run);
  run.give = (task, batches) => {
    for (const { cellSum } of batches) results.push(new WeakRef(cellSum));
    give(task, batches);
  };
  let next: Run | null = run;
  await simulator.play({ next: () => [next, (next = null)][0] });
  await new Promise((resolve) => setTimeout(resolve, 50));
  collect();
  expect(results).toHaveLength(30);
  // A thread may keep what it gave back last.
  expect(results.filter((ref) => ref.deref() !== undefined).length).toBeLessThanOrEqual(4);
});
