/** Plays setups by deep and by analog transport in this thread, for tests. */
import { playBatch } from '../../engine/batch-worker.js';
import { compile } from '../../engine/compile.js';
import { depthRows } from '../../engine/depth-rows.js';
import type { Problem } from '../../engine/problem.js';
import type { DepthRow, QuantityRow, Spectrum } from '../../engine/result.js';
import { emptySums, SUM_ARRAYS, type Sums } from '../../engine/run-sums.js';
import type { DosePoint, DoseQuantity, Physics, Setup, SourceShape, Transport } from '../../engine/setup.js';
import { spectraOf, totalsOf } from '../../engine/totals.js';
import { resolveMaterial } from '../../materials/index.js';
import { ALL } from './slab-run.js';

/** Layers are named l0, l1, …; null is vacuum. Everything left out is what most tests want. */
export interface DeepCase {
  readonly stack: readonly (readonly [string | null, number])[];
  /** One energy or several of equal weight. */
  readonly energyKeV: number | readonly number[];
  readonly shape?: SourceShape;
  readonly physics?: Physics;
  readonly dose?: readonly DoseQuantity[];
  readonly points?: readonly DosePoint[];
  readonly depth?: { readonly layer: string; readonly bins: number };
  readonly bins?: number;
  readonly seed: string;
}

export const NORMAL_BEAM: SourceShape = { kind: 'beam', angleDeg: 0, diameterCm: 0 };

/** The setup of a case. */
export function deepSetup(given: DeepCase, histories: number, transport: Transport = 'deep'): Setup {
  const energies = typeof given.energyKeV === 'number' ? [given.energyKeV] : given.energyKeV;
  const bins = given.bins ?? 20;
  // A little Doppler broadening may lift a photon above its line.
  const topKeV = 1.01 * Math.max(...energies);
  return {
    title: given.seed,
    seed: `${given.seed}/${transport}`,
    source: {
      shape: given.shape ?? NORMAL_BEAM,
      emission: {
        lines: energies.map((energyKeV) => ({ energyKeV, perDecay: 1 })),
        continuum: [],
        photonsPerDecay: null,
        nuclide: null,
      },
      activityBq: null,
      liveTimeS: null,
    },
    stack: given.stack.map(([material, thicknessCm], l) => ({
      name: `l${l}`,
      material: material === null ? null : resolveMaterial(material),
      thicknessCm,
      radiusCm: null,
      detector: null,
    })),
    extent: null,
    tally: {
      energyEdgesKeV: Float64Array.from({ length: bins + 1 }, (_, i) => (i * topKeV) / bins),
      dose: given.dose ?? ['air_kerma'],
      dosePoints: given.points ?? [],
      depthProfile: given.depth ?? null,
    },
    physics: given.physics ?? ALL,
    run: { histories, until: null, timeLimitS: null, transport },
  };
}

export interface DeepPlayed {
  readonly setup: Setup;
  readonly problem: Problem;
  readonly histories: number;
  readonly totals: readonly QuantityRow[];
  readonly spectra: readonly Spectrum[];
  readonly depth: readonly DepthRow[];
  readonly sums: Sums;
}

const BATCH = 10_000;

/** Plays a case to its last history. */
export function playDeep(
  given: DeepCase,
  histories: number,
  transport: Transport = 'deep',
  change: (setup: Setup) => Setup = (setup) => setup,
): DeepPlayed {
  const setup = change(deepSetup(given, histories, transport));
  const problem = compile(setup);
  const sums = emptySums(problem.tally);
  for (let batch = 0; batch * BATCH < histories; batch++) {
    const result = playBatch(problem, batch, Math.min(BATCH, histories - batch * BATCH));
    for (const name of SUM_ARRAYS) {
      for (let i = 0; i < sums[name].length; i++) sums[name][i] += result[name][i];
    }
  }
  const figures = { setup, layout: problem.tally, historyWeight: problem.historyWeight, histories, sums };
  return {
    setup,
    problem,
    histories,
    totals: totalsOf(figures),
    spectra: spectraOf(figures),
    depth: depthRows(figures),
    sums,
  };
}

/** A figure; fails where it is not known. */
export function figureIn(
  { totals }: Pick<DeepPlayed, 'totals'>,
  quantity: string,
  layer: string | null = null,
): { mean: number; stdError: number } {
  const row = totals.find((r) => r.quantity === quantity && r.layer === layer);
  if (!row || row.mean === null) throw new Error(`no ${quantity} at ${layer}`);
  return { mean: row.mean, stdError: row.stdError ?? 0 };
}
