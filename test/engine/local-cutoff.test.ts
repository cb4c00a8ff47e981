import { describe, expect, it } from 'vitest';
import { compile } from '../../engine/compile.js';
import { SIGMAS } from './goodness.js';
import { withoutLocalCutoffs } from './made-up.js';
import { ALL, playSetup, slabSetup, type SlabLayer } from './slab-run.js';

const CASES: { title: string; stack: SlabLayer[]; energyKeV: number }[] = [
  { title: 'lead of 3 mm at 150 keV', stack: [['lead', 0.3]], energyKeV: 150 },
  { title: 'lead of 2 cm at 4 MeV', stack: [['lead', 2]], energyKeV: 4000 },
  { title: 'NaI behind aluminium and before lead at 662 keV', stack: [['aluminium', 0.1], ['NaI', 2, 'detector'], ['lead', 0.5]], energyKeV: 662 }, // prettier-ignore
  { title: 'tungsten of 50 um between gaps at 100 keV', stack: [[null, 1], ['tungsten', 0.005], [null, 1], ['CdTe', 0.05, 'detector']], energyKeV: 100 }, // prettier-ignore
];

describe('photons that cannot leave their layer', () => {
  it.each(CASES)('may stop at once without a trace in figures and spectra: $title', (given) => {
    const histories = 40_000;
    const setup = slabSetup(
      { ...given, physics: ALL, seed: given.title, binKeV: given.energyKeV / 100 },
      histories,
    );
    const problem = compile(setup);
    expect(problem.localCutoffKeV.some((cutoff) => cutoff > problem.cutoffKeV)).toBe(true);
    const quick = playSetup(setup, problem);
    const slow = playSetup(
      { ...setup, seed: 'followed' },
      { ...withoutLocalCutoffs(problem), seed: 'followed' },
    );
    quick.totals.forEach(({ quantity, layer, mean, stdError }, i) => {
      const other = slow.totals[i];
      const tolerance = SIGMAS * Math.hypot(stdError ?? 0, other.stdError ?? 0);
      expect(Math.abs(mean! - other.mean!), `${quantity} ${layer}`).toBeLessThanOrEqual(tolerance);
    });
    // Spectra bin by bin: χ² of the differences over bins with 30 counts or more, standardised
    for (const [s, spectrum] of quick.spectra.entries()) {
      if (spectrum.tally === 'deposited') continue;
      let [chiSquare, bins] = [0, 0];
      spectrum.mean.forEach((mean, bin) => {
        const other = slow.spectra[s];
        if (mean * histories < 30 || other.mean[bin] * histories < 30) return;
        chiSquare += (mean - other.mean[bin]) ** 2 / (spectrum.stdError[bin] ** 2 + other.stdError[bin] ** 2);
        bins++;
      });
      const sigmas = bins === 0 ? 0 : (chiSquare - bins) / Math.sqrt(2 * bins);
      expect(sigmas, `${spectrum.tally} ${spectrum.layer}: ${bins} bins`).toBeLessThan(SIGMAS + 1);
    }
  });
});
