import { describe, expect, it } from 'vitest';
import { playBatch } from '../../engine/batch-worker.js';
import { planBatches } from '../../engine/batch-plan.js';
import { compile } from '../../engine/compile.js';
import { EngineError, simulate, type Setup } from '../../engine/index.js';
import type { Problem } from '../../engine/problem.js';
import { makeResult } from '../../engine/run-result.js';
import { RunSums } from '../../engine/run-sums.js';
import { ALL, figureOf } from './slab-run.js';
import { beam, disc, embedded, playSolid, point, radius, solidSetup, type SolidCase } from './solid-run.js';

const CANNED: SolidCase = {
  stack: [['aluminium', 0.05, 4.1], [null, 0.25, 4.1], ['NaI', 7.62, 3.81, 'detector'], ['lead', 1, 10]], // prettier-ignore
  energyKeV: 1332.5,
  shape: point(10, 3),
  seed: 'canned',
  physics: ALL,
};

describe('A run with edges', () => {
  it('is the same to the last bit in one thread and in three', async () => {
    const setup = solidSetup(CANNED, 30_000);
    const [one, three] = [await simulate(setup, { threads: 1 }), await simulate(setup, { threads: 3 })];
    expect(three.totals).toEqual(one.totals);
    expect(three.spectra).toEqual(one.spectra);
    expect(three.balance).toEqual(one.balance);
    expect(one.balance.relativeError).toBeLessThan(1e-9);
    expect(one.warnings.map(({ code }) => code)).not.toContain('photons_strayed');
  });

  it('fails when photons get lost', () => {
    const setup = solidSetup(CANNED, 2000);
    const problem = compile(setup);
    // Planes out of order put photons into layers they are not in.
    problem.solid!.stack.planesCm[2] = -1;
    const plan = planBatches(2000, problem.tally.cells);
    const runSums = new RunSums(problem.tally, plan);
    runSums.add(playBatch(problem, 0, 2000));
    const state = runSums.state();
    expect(state.oddities.strayed).toBeGreaterThan(10);
    const timings = { wallS: 1, workerS: 1, historiesPerSecond: 1 };
    const parts = { setup, problem, state, sums: runSums.snapshot(), stopped: 'histories', timings } as const;
    expect(() => makeResult(parts)).toThrow(/outside the layer they were in/);
    const oddities = { ...state.oddities, strayed: 0 };
    expect(makeResult({ ...parts, state: { ...state, oddities } }).histories).toBe(2000);
  });

  it.each([
    ['a point off the axis', point(3, 4)],
    ['a disc', disc(2, 3)],
    ['a slanting wide beam', beam(3, 30)],
    ['a diffuse field', { kind: 'diffuse', law: 'isotropic' }],
    ['an embedded source', embedded('l2')],
  ] as const)('keeps every bit when lengths grow by 4 and densities fall by 4, for %s', (_, shape) => {
    const setup = solidSetup(
      {
        stack: [
          ['NaI', 2, 1.5, 'detector'],
          [null, 0.5, 2],
          ['aluminium', 1],
          ['lead', 0.25],
        ],
        extent: { kind: 'rectangle', widthCm: 7, heightCm: 4 },
        energyKeV: 1500,
        shape,
        seed: 'scaled',
        // The stopping of electrons depends on the density itself (Sternheimer's effect).
        physics: { ...ALL, bremsstrahlung: false },
      },
      3000,
    );
    const [once, scaled] = [setup, scaledBy(4, setup)].map((s) => playBatch(compile(s), 0, 3000));
    for (const name of ['cellSum', 'cellSquare', 'figureSum', 'figureSquare'] as const) {
      expect(
        scaled[name].every((sum, i) => sum === once[name][i]),
        name,
      ).toBe(true);
    }
    expect(once.figureSum.some((sum) => sum > 0)).toBe(true);
  });

  it('plays endless stacks in the loop for endless stacks, whatever the source', () => {
    const kernel = (shape: SolidCase['shape'], extent: SolidCase['extent'] = null): Problem['kernel'] =>
      compile(solidSetup({ ...CANNED, stack: [['NaI', 1]], shape, extent }, 1)).kernel;
    expect(kernel(point(1))).toBe('slab');
    expect(kernel(beam(3, 20))).toBe('slab');
    expect(kernel(point(1), radius(4))).toBe('solid');
  });

  it.each([
    ['an embedded source in an endless layer', { ...CANNED, stack: [['soil', 10], ['NaI', 1, 2]], shape: embedded('l0') }, /layer l0, which has no edge/],
    ['a diffuse field on an endless layer', { ...CANNED, stack: [['soil', 10], ['NaI', 1, 2]], shape: { kind: 'diffuse', law: 'isotropic' } }, /layer l0, which has no edge/],
    ['deep transport', { ...CANNED, transport: 'deep' }, /deep transport/],
  ] as const)('is refused with %s', (_, given, message) => {
    const run = () => compile(solidSetup(given as SolidCase, 10));
    expect(run).toThrow(EngineError);
    expect(run).toThrow(message);
  }); // prettier-ignore

  it('lets a thick layer without an edge stand behind a narrow one', () => {
    const played = playSolid({ ...CANNED, stack: [['NaI', 2, 1, 'detector'], ['concrete', 10]], shape: beam(8) }, 20_000); // prettier-ignore
    // A quarter of the beam's diameter: 15/16 fly past the crystal straight into the concrete.
    expect(Math.abs(figureOf(played, 'incident').mean - 1 / 16)).toBeLessThan(4 * Math.sqrt(1 / 16 / 20_000));
    expect(figureOf(played, 'interacting', 'l1').mean).toBeGreaterThan(0.5);
    expect(figureOf(played, 'reflected').mean).toBeGreaterThan(0.05);
  });

  it('tells the three ways out apart: all photons of a vacuum leave where they must', () => {
    // A vacuum cylinder as high as wide, lit by a point at one diameter: those that miss the far face leave by the side.
    const far = 0.5 * (1 - 2 / Math.hypot(2, 0.5));
    const front = 0.5 * (1 - 1 / Math.hypot(1, 0.5));
    for (const transport of ['auto', 'analog'] as const) {
      const played = playSolid({ ...CANNED, stack: [[null, 1]], extent: radius(0.5), shape: point(1), transport }, 60_000); // prettier-ignore
      const sigma = (share: number) => 4 * Math.sqrt(share / 60_000);
      expect(Math.abs(figureOf(played, 'transmitted').mean - far)).toBeLessThan(sigma(far));
      expect(figureOf(played, 'uncollided').mean).toBe(figureOf(played, 'transmitted').mean);
      expect(Math.abs(figureOf(played, 'side_escape').mean - (front - far))).toBeLessThan(sigma(front - far));
      expect(figureOf(played, 'reflected').mean).toBe(0);
    }
  });
});

/** Lengths times `factor`, densities divided by it. */
function scaledBy(factor: number, setup: Setup): Setup {
  const { shape } = setup.source;
  const scaledShape = Object.fromEntries(
    Object.entries(shape).map(([key, value]) => [
      key,
      key.endsWith('Cm') ? factor * (value as number) : value,
    ]),
  ) as unknown as Setup['source']['shape'];
  return {
    ...setup,
    source: { ...setup.source, shape: scaledShape },
    extent: { kind: 'rectangle', widthCm: 7 * factor, heightCm: 4 * factor },
    stack: setup.stack.map((layer) => ({
      ...layer,
      thicknessCm: factor * layer.thicknessCm,
      radiusCm: layer.radiusCm === null ? null : factor * layer.radiusCm,
      material: layer.material && {
        ...layer.material,
        densityGPerCm3: layer.material.densityGPerCm3 / factor,
      },
    })),
  };
}
