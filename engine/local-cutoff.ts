/**
 * Photons that cannot get out of their layer deposit on the spot.
 *
 * From mass depth d (g/cm²) to the nearest face of its layer, a photon of energy E gets out with a probability of
 * about E₂(κ d)/2 at most, κ = √(μ_photoelectric μ_total): exact for a pure absorber, and below the diffusion
 * coefficient √(3 μ_a (μ_a + μ_s)) of a medium that scatters. κ is taken at its least over all energies up to E, so that
 * an edge opens no window. At κ d = 10 the probability is below 2e-6, and what does get out of a layer comes from
 * within a few mean free paths of its faces, e^10 times more often: no tally can show the difference. It saves most of
 * the work on fluorescence and bremsstrahlung, which are born in numbers and go nowhere.
 *
 * A table per slot gives the local cutoff by the bits of d: four steps per octave, read at the lower bound.
 */
import type { EnergyGrid } from './energy-grid.js';
import { CELL_LENGTH, sharedDoubles, sharedInts } from './problem.js';

const STEP_BITS = 2;
const DEPTH_SHIFT = 20 - STEP_BITS;
/** Lowest mass depth of the table, 2^-30 g/cm². */
const LOWEST_EXPONENT = -30;
const DEPTH_OFFSET = (1023 + LOWEST_EXPONENT) << STEP_BITS;
/** Up to 2^34 g/cm². */
const DEPTH_STEPS = 64 << STEP_BITS;
/** Optical depth from which a photon counts as unable to get out. */
const TRAPPED_DEPTH = 10;

/** Emission cutoffs for bremsstrahlung, keV: the highest one below the local cutoff is taken. The first is the problem's. */
export const RADIATION_CUTOFFS_KEV = [0, 5, 10, 20, 40, 70, 110, 160, 230, 330, 480, 700] as const;
export const RADIATION_STEPS = RADIATION_CUTOFFS_KEV.length;

export interface LocalCutoffs {
  /** Local cutoff in keV by slot and step of mass depth. */
  readonly localCutoffKeV: Float64Array;
  /** Number of the emission cutoff, likewise. */
  readonly radiationStep: Int32Array;
}

const doubleView = new Float64Array(1);
const wordView = new Uint32Array(doubleView.buffer);

/** Place in the tables of a slot at a mass depth (g/cm²), which must not be negative. */
export function depthIndex(slot: number, depthGPerCm2: number): number {
  doubleView[0] = depthGPerCm2;
  const step = (wordView[1] >>> DEPTH_SHIFT) - DEPTH_OFFSET;
  return slot * DEPTH_STEPS + Math.max(0, Math.min(DEPTH_STEPS - 1, step));
}

/** Tables of all slots from their cells at density 1. */
export function makeLocalCutoffs(massCells: Float64Array, grid: EnergyGrid, cutoffKeV: number): LocalCutoffs {
  const cellCount = grid.nodesKeV.length - 1;
  const slots = massCells.length / (cellCount * CELL_LENGTH);
  const localCutoffKeV = sharedDoubles(slots * DEPTH_STEPS);
  const radiationStep = sharedInts(slots * DEPTH_STEPS);
  for (let slot = 0; slot < slots; slot++) {
    const stopping = leastStopping(massCells, slot * cellCount * CELL_LENGTH, grid);
    for (let step = 0; step < DEPTH_STEPS; step++) {
      const needed = TRAPPED_DEPTH / depthOfStep(step);
      let cell = 0;
      while (cell < cellCount && stopping[cell] >= needed) cell++;
      const at = slot * DEPTH_STEPS + step;
      // Below the first step lies everything down to the face itself.
      localCutoffKeV[at] = Math.max(cutoffKeV, step === 0 ? 0 : grid.nodesKeV[cell]);
      radiationStep[at] = RADIATION_CUTOFFS_KEV.findLastIndex((cutoff) => cutoff <= localCutoffKeV[at]);
    }
  }
  return { localCutoffKeV, radiationStep };
}

/** Lower bound of a step, g/cm². */
function depthOfStep(step: number): number {
  const parts = 1 << STEP_BITS;
  return 2 ** (LOWEST_EXPONENT + Math.floor(step / parts)) * (1 + (step % parts) / parts);
}

/** Least κ (cm²/g) over all cells up to each, at the ends of the cells. */
function leastStopping(massCells: Float64Array, base: number, { nodesKeV }: EnergyGrid): Float64Array {
  let least = Infinity;
  return Float64Array.from({ length: nodesKeV.length - 1 }, (_, cell) => {
    const at = base + cell * CELL_LENGTH;
    for (const energyKeV of [nodesKeV[cell], nodesKeV[cell + 1]]) {
      const attenuation = massCells[at] + massCells[at + 1] * energyKeV;
      const photoelectric = Math.max(0, massCells[at + 2] + massCells[at + 3] * energyKeV);
      least = Math.min(least, attenuation * Math.sqrt(photoelectric));
    }
    return least;
  });
}
