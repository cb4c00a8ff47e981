/** Whole runs in worker threads: the same answer however they are played, and every way to end one. */
import { describe, expect, it } from 'vitest';
import { EngineError, simulate, type Progress, type RunResult, type Setup } from '../../engine/index.js';
import { checkBooks } from './books.js';
import { ALL, figureOf, playSlab, slabSetup, type SlabCase } from './slab-run.js';

const CASE: SlabCase = {
  stack: [['aluminium', 0.1], [null, 1], ['NaI', 2.54, 'detector'], ['lead', 0.2]], // prettier-ignore
  energyKeV: [661.7, 1332.5],
  physics: ALL,
  seed: 'threads',
  shape: { kind: 'diffuse', law: 'isotropic' },
};
const BATCH = 10_000;

function withRun(setup: Setup, run: Partial<Setup['run']>): Setup {
  return { ...setup, run: { ...setup.run, ...run } };
}

async function play(
  setup: Setup,
  options: Parameters<typeof simulate>[1] = { threads: 2 },
): Promise<RunResult> {
  const result = await simulate(setup, options);
  if (result.histories > 0) {
    checkBooks({ ...result, energyInKeV: result.balance.energyInKeV / result.histories });
    expect(result.balance.relativeError).toBeLessThanOrEqual(1e-9);
  }
  return result;
}

/** Figures of two runs are the same numbers but for the order in which batches were added up. */
function expectSameFigures(a: Pick<RunResult, 'totals'>, b: Pick<RunResult, 'totals'>): void {
  expect(a.totals).toHaveLength(b.totals.length);
  a.totals.forEach(({ quantity, layer, mean }, i) => {
    const other = b.totals[i];
    expect(other.quantity).toBe(quantity);
    const tolerance = 1e-12 * Math.abs(mean ?? 0);
    expect(Math.abs((mean ?? 0) - (other.mean ?? 0)), `${quantity} ${layer}`).toBeLessThanOrEqual(tolerance);
  });
}

describe('a run', () => {
  it('gives the same bits with 1, 2, 3 and 8 threads', async () => {
    const setup = slabSetup(CASE, 95_000);
    const [one, ...others] = [
      await play(setup, { threads: 1 }),
      await play(setup, { threads: 2 }),
      await play(setup, { threads: 3 }),
      await play(setup, { threads: 8 }),
    ];
    for (const other of others) {
      expect(other.totals).toEqual(one.totals);
      expect(other.balance).toEqual(one.balance);
      expect(other.spectra).toEqual(one.spectra);
    }
    expect(one.histories).toBe(95_000);
    expect(one.batches).toBe(10);
    expect(one.stopped).toBe('histories');
  });

  it('gives what its batches give when played one by one in this thread', async () => {
    expectSameFigures(await play(slabSetup(CASE, 35_000)), playSlab(CASE, 35_000));
  });

  it('differs with the seed, within its errors', () => {
    const [a, b] = [playSlab(CASE, 50_000), playSlab({ ...CASE, seed: 'other' }, 50_000)];
    const [x, y] = [a, b].map((played) => figureOf(played, 'transmitted'));
    expect(x.mean).not.toBe(y.mean);
    expect(Math.abs(x.mean - y.mean)).toBeLessThan(4 * Math.hypot(x.stdError, y.stdError)); // false alarm 6e-5
  });

  it('reports its progress in rising order', async () => {
    const seen: Progress[] = [];
    await play(slabSetup(CASE, 200_000), { threads: 2, onProgress: (progress) => seen.push(progress) });
    expect(seen.length).toBeGreaterThan(1);
    seen.slice(1).forEach((progress, i) => {
      expect(progress.histories).toBeGreaterThanOrEqual(seen[i].histories);
      expect(progress.histories % BATCH).toBe(0);
    });
    expect(seen.at(-1)!.histories).toBe(200_000);
  });
});

describe('a run with an aim', () => {
  const aim = { quantity: 'transmitted', layer: null, relativeError: 0.0025 };
  const setup = slabSetup(CASE, 1_000_000);

  it('stops at the first batch that meets it, however many threads play', async () => {
    const aimed = withRun(setup, { until: aim });
    const [one, three] = [await play(aimed, { threads: 1 }), await play(aimed, { threads: 3 })];
    expect(one.stopped).toBe('until');
    expect(three.histories).toBe(one.histories);
    expect(three.totals).toEqual(one.totals);
    expect(three.spectra).toEqual(one.spectra);
    expect(one.histories).toBeGreaterThan(10 * BATCH);
    expect(one.histories).toBeLessThan(400_000);

    const errorOf = (result: Pick<RunResult, 'totals'>) => {
      const { mean, stdError } = figureOf(result, 'transmitted');
      return stdError / mean;
    };
    expect(errorOf(one)).toBeLessThanOrEqual(aim.relativeError);
    expect(errorOf(playSlab(CASE, one.histories - BATCH))).toBeGreaterThan(aim.relativeError);
  });

  it('plays 10 batches at least before it trusts an error', async () => {
    const easy = await play(withRun(setup, { until: { ...aim, relativeError: 0.5 } }));
    expect(easy.histories).toBe(10 * BATCH);
    expect(easy.stopped).toBe('until');
  });

  it('plays all its histories where the aim is out of reach', async () => {
    const hard = await play(withRun(setup, { histories: 120_000, until: { ...aim, relativeError: 1e-6 } }));
    expect(hard.histories).toBe(120_000);
    expect(hard.stopped).toBe('histories');
  });

  it.each([
    { quantity: 'nonsense', layer: null },
    { quantity: 'full_energy', layer: 'l0' },
  ])('refuses an aim it has no figure for: $quantity of $layer', async ({ quantity, layer }) => {
    const wrong = withRun(setup, { until: { quantity, layer, relativeError: 0.1 } });
    await expect(simulate(wrong, { threads: 1 })).rejects.toThrow(EngineError);
  });
});

describe('a run cut short', () => {
  const endless = slabSetup(CASE, 1e9);

  it('by its time limit ends soon after it, with the figures of the batches played', async () => {
    const result = await play(withRun(endless, { timeLimitS: 0.6 }));
    expect(result.stopped).toBe('time_limit');
    expect(result.histories).toBeGreaterThan(0);
    expect(result.histories % BATCH).toBe(0);
    expect(result.timings.wallS).toBeGreaterThan(0.6);
    expect(result.timings.wallS).toBeLessThan(20); // batches in hand are finished
    expectSameFigures(result, playSlab(CASE, result.histories));
  });

  it('by a signal finishes the batches in hand and gives what there is', async () => {
    const abort = new AbortController();
    const result = await play(endless, { threads: 2, signal: abort.signal, onProgress: () => abort.abort() });
    expect(result.stopped).toBe('interrupted');
    expect(result.histories).toBeGreaterThan(0);
    expect(result.histories).toBeLessThan(1e7);
    expectSameFigures(result, playSlab(CASE, result.histories));
  });

  it('before it began gives no figures instead of wrong ones', async () => {
    const result = await play(endless, { threads: 2, signal: AbortSignal.abort() });
    expect(result.stopped).toBe('interrupted');
    expect(result.histories).toBe(0);
    expect(result.totals).toEqual([]);
    expect(result.spectra).toEqual([]);
  });

  it('is not called cut short when the signal comes after its last batch', async () => {
    const abort = new AbortController();
    const result = await play(slabSetup(CASE, BATCH), {
      threads: 1,
      signal: abort.signal,
      onProgress: () => abort.abort(),
    });
    expect(result.histories).toBe(BATCH);
    expect(result.stopped).toBe('histories');
  });
});
