/**
 * The one validator every transport test goes through: whether figures and spectra of a run, counted along different
 * ways in the history loop, tell the same story. It knows nothing of the physics but that energy and photons last.
 */
import { expect } from 'vitest';
import type { QuantityRow, Spectrum } from '../../engine/result.js';
import type { Setup } from '../../engine/setup.js';

export interface Books {
  readonly setup: Setup;
  readonly totals: readonly QuantityRow[];
  readonly spectra: readonly Spectrum[];
  /** Mean energy of the source per history, weight included. */
  readonly energyInKeV: number;
  /** Photons that came in, where not all do so by the front face. */
  readonly photonsIn?: number;
}

/** Relative rounding allowed in sums of very many terms. */
const ROUNDING = 1e-9;

/** Fails when the books do not close. */
export function checkBooks({ setup, totals, spectra, energyInKeV, photonsIn }: Books): void {
  const mean = (quantity: string, layer: string | null = null) =>
    totals.find((row) => row.quantity === quantity && row.layer === layer && row.lineKeV === null)?.mean ?? 0;
  const all = (quantity: string) =>
    totals.reduce((sum, row) => (row.quantity === quantity ? sum + (row.mean ?? 0) : sum), 0);
  const near = (what: string, a: number, b: number) =>
    expect(Math.abs(a - b), `${what}: ${a} and ${b}`).toBeLessThanOrEqual(
      ROUNDING * Math.max(Math.abs(a), Math.abs(b)),
    );
  const atMost = (what: string, part: number, whole: number) =>
    expect(part, what).toBeLessThanOrEqual(whole * (1 + ROUNDING));

  for (const { quantity, mean: value, stdError } of totals) {
    expect(value === null || Number.isFinite(value), `${quantity} is a number`).toBe(true);
    expect(stdError === null || stdError >= 0, `error of ${quantity}`).toBe(true);
  }

  // Energy: what came in is what stayed and what left.
  const outKeV = mean('transmitted_energy') + mean('reflected_energy') + mean('side_escape_energy');
  near('energy in and energy left or out', energyInKeV, all('deposited_energy') + outKeV);

  // Photons: none leaves that did not come in, unless new ones are set free.
  const { fluorescence, pair, bremsstrahlung } = setup.physics;
  const outPhotons = mean('transmitted') + mean('reflected') + mean('side_escape');
  const inPhotons = photonsIn ?? mean('incident');
  if (!fluorescence && !pair && !bremsstrahlung) atMost('photons out', outPhotons, inPhotons);
  atMost('photons at the front face', mean('incident'), inPhotons);
  atMost('uncollided photons', mean('uncollided'), mean('transmitted'));

  for (const spectrum of spectra) checkSpectrum(spectrum, mean, near, atMost);
}

type Compare = (what: string, a: number, b: number) => void;

/** A spectrum adds up to its figure, and its energies to the figure's energy within the width of the bins. */
function checkSpectrum(
  { tally, layer, mean, energyLowKeV, energyHighKeV }: Spectrum,
  figure: (quantity: string, layer?: string | null) => number,
  near: Compare,
  atMost: Compare,
): void {
  const total = mean.reduce((sum, value) => sum + value, 0);
  const lowKeV = mean.reduce((sum, value, bin) => sum + value * energyLowKeV[bin], 0);
  const highKeV = mean.reduce((sum, value, bin) => sum + value * energyHighKeV[bin], 0);
  expect(Math.min(...mean), `least of ${tally}`).toBeGreaterThanOrEqual(0);
  if (tally === 'deposited') {
    near(`deposited in ${layer}`, total, figure('deposited_energy', layer));
  } else if (tally === 'pulse_height') {
    near(`pulses of ${layer}`, total, figure('interacting', layer));
    atMost(`lower end of the pulses of ${layer}`, lowKeV, figure('deposited_energy', layer));
    atMost(`full-energy pulses of ${layer}`, figure('full_energy', layer), total);
  } else if (tally === 'anticoincidence' || tally === 'coincidence') {
    near(`pulses of ${tally} of ${layer}`, total, figure(tally, layer));
    atMost(`lower end of ${tally} of ${layer}`, lowKeV, figure('deposited_energy', layer));
  } else if (tally === 'pulse_height_sum') {
    near('sums of pulses', total, figure('sum_interacting'));
  } else {
    near(`photons of ${tally}`, total, figure(tally));
    atMost(`lower end of ${tally}`, lowKeV, figure(`${tally}_energy`));
    atMost(`energy of ${tally}`, figure(`${tally}_energy`), highKeV);
  }
}
