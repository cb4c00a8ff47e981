/** Plays slab setups in this thread and checks the books of every one of them. */
import { expect } from 'vitest';
import { playBatch } from '../../engine/batch-worker.js';
import { compile } from '../../engine/compile.js';
import type { Problem } from '../../engine/problem.js';
import type { QuantityRow, Spectrum, SpectrumTally } from '../../engine/result.js';
import type { Sums } from '../../engine/run-sums.js';
import type { Physics, Setup, SourceShape } from '../../engine/setup.js';
import { FIGURE } from '../../engine/tally-layout.js';
import { spectraOf, totalsOf } from '../../engine/totals.js';
import { resolveMaterial, type Material } from '../../materials/index.js';
import { checkBooks } from './books.js';

export const PLAIN: Physics = {
  coherent: false,
  boundIncoherent: false,
  doppler: false,
  fluorescence: false,
  pair: false,
  bremsstrahlung: false,
  cutoffKeV: 1,
};

export const ALL: Physics = {
  coherent: true,
  boundIncoherent: true,
  doppler: true,
  fluorescence: true,
  pair: true,
  bremsstrahlung: true,
  cutoffKeV: 1,
};

/** Material (null: vacuum), thickness in cm, and whether the layer is a detector. Layers are named l0, l1, … */
export type SlabLayer = readonly [Material | string | null, number, 'detector'?];

export interface SlabCase {
  readonly stack: readonly SlabLayer[];
  /** One energy or several of equal weight. */
  readonly energyKeV: number | readonly number[];
  readonly physics: Physics;
  readonly seed: string;
  readonly angleDeg?: number;
  readonly shape?: SourceShape;
  readonly binKeV?: number;
}

/** The setup of a case. */
export function slabSetup(given: SlabCase, histories: number): Setup {
  const energies = typeof given.energyKeV === 'number' ? [given.energyKeV] : given.energyKeV;
  const width = given.binKeV ?? 1;
  const bins = Math.floor(Math.max(...energies) / width) + 1;
  return {
    title: given.seed,
    seed: given.seed,
    source: {
      shape: given.shape ?? { kind: 'beam', angleDeg: given.angleDeg ?? 0, diameterCm: 0 },
      emission: {
        lines: energies.map((energyKeV) => ({ energyKeV, perDecay: 1 })),
        continuum: [],
        photonsPerDecay: null,
        nuclide: null,
      },
      activityBq: null,
      liveTimeS: null,
    },
    stack: given.stack.map(([material, thicknessCm, detector], l) => ({
      name: `l${l}`,
      material: typeof material === 'string' ? resolveMaterial(material) : material,
      thicknessCm,
      radiusCm: null,
      detector: detector ? { resolution: null, thresholdKeV: null, windows: [] } : null,
    })),
    extent: null,
    tally: {
      energyEdgesKeV: Float64Array.from({ length: bins + 1 }, (_, i) => i * width),
      dose: [],
      dosePoints: [],
      depthProfile: null,
    },
    physics: given.physics,
    run: { histories, until: null, timeLimitS: null, transport: 'analog' },
  };
}

export interface Played {
  readonly setup: Setup;
  readonly histories: number;
  readonly totals: readonly QuantityRow[];
  readonly spectra: readonly Spectrum[];
  readonly sums: Sums;
  /** Scatterings for which the Doppler sampler found no electron. */
  readonly dopplerGivenUp: number;
}

/**
 * Plays a case.
 *
 * @param change takes the compiled problem and may give back another, e.g. with made-up cross sections
 */
export function playSlab(
  given: SlabCase,
  histories: number,
  change: (problem: Problem) => Problem = (problem) => problem,
): Played {
  const setup = slabSetup(given, histories);
  return playSetup(setup, change(compile(setup)));
}

/** Histories of a batch, each of which has a random stream of its own. */
const BATCH = 10_000;

/** Plays a compiled setup to its last history. */
export function playSetup(setup: Setup, problem: Problem): Played {
  const { histories } = setup.run;
  const sums = {
    cellSum: new Float64Array(problem.tally.cells),
    cellSquare: new Float64Array(problem.tally.cells),
    figureSum: new Float64Array(problem.tally.figures),
    figureSquare: new Float64Array(problem.tally.figures),
  };
  let dopplerGivenUp = 0;
  let strayed = 0;
  for (let batch = 0; batch * BATCH < histories; batch++) {
    const result = playBatch(problem, batch, Math.min(BATCH, histories - batch * BATCH));
    for (const name of ['cellSum', 'cellSquare', 'figureSum', 'figureSquare'] as const) {
      const [to, from] = [sums[name], result[name]];
      for (let i = 0; i < to.length; i++) to[i] += from[i];
    }
    dopplerGivenUp += result.dopplerGivenUp;
    strayed += result.strayed;
  }
  const { historyWeight, tally: layout } = problem;
  const figures = { setup, layout, historyWeight, histories, sums };
  const played = {
    setup,
    histories,
    totals: totalsOf(figures),
    spectra: spectraOf(figures),
    sums,
    dopplerGivenUp,
  };
  expect(strayed, 'photons outside their layer').toBe(0);
  const energyInKeV = (historyWeight * sums.figureSum[FIGURE.sourceEnergy]) / histories;
  const { lines } = setup.source.emission;
  const photonsIn = lines.length === 1 ? energyInKeV / lines[0].energyKeV : undefined;
  checkBooks({ ...played, energyInKeV, photonsIn });
  return played;
}

/** Mean and standard error of a figure; fails where there is none. */
export function figureOf(
  { totals }: Pick<Played, 'totals'>,
  quantity: string,
  layer: string | null = null,
): { mean: number; stdError: number } {
  const row = totals.find((r) => r.quantity === quantity && r.layer === layer);
  if (!row || row.mean === null) throw new Error(`no ${quantity} of ${layer}`);
  return { mean: row.mean, stdError: row.stdError ?? 0 };
}

/** One spectrum of a run. */
export function spectrumOf(
  { spectra }: Pick<Played, 'spectra'>,
  tally: SpectrumTally,
  layer: string | null = null,
): Spectrum {
  const found = spectra.find((s) => s.tally === tally && s.layer === layer);
  if (!found) throw new Error(`no spectrum ${tally} of ${layer}`);
  return found;
}

/** Sum of a spectrum over the bins that lie in [low, high), with its standard error (bins taken as independent). */
export function sumBetween(spectrum: Spectrum, lowKeV: number, highKeV: number) {
  let mean = 0;
  let variance = 0;
  spectrum.mean.forEach((value, bin) => {
    const [low, high] = [spectrum.energyLowKeV[bin], spectrum.energyHighKeV[bin]];
    if (low < lowKeV - 1e-9 || high > highKeV + 1e-9) return;
    mean += value;
    variance += Number.isNaN(spectrum.stdError[bin]) ? 0 : spectrum.stdError[bin] ** 2;
  });
  return { mean, stdError: Math.sqrt(variance) };
}
