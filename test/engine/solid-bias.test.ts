import { describe, expect, it } from 'vitest';
import type { SourceShape } from '../../engine/setup.js';
import { SIGMAS } from './goodness.js';
import { ALL, figureOf, spectrumOf } from './slab-run.js';
import { beam, disc, embedded, playSolid, point, radius, type SolidCase } from './solid-run.js';

type Setup = Omit<SolidCase, 'seed' | 'transport' | 'edgesKeV'> & { readonly title: string };

const diffuse = (law: 'isotropic' | 'uniform_solid_angle'): SourceShape => ({ kind: 'diffuse', law });

const SETUPS: readonly Setup[] = [
  { title: 'a 3 inch NaI crystal in its can, a near point', energyKeV: 661.7, shape: point(5), stack: [['aluminium', 0.05], ['NaI', 7.62, null, 'detector']], extent: radius(3.81) },
  { title: 'a point off the axis that lights the side', energyKeV: 1332.5, shape: point(2, 8), stack: [['NaI', 5.08, null, 'detector']], extent: radius(2.54) },
  { title: 'thin silicon', energyKeV: 100, shape: beam(1), stack: [['silicon', 0.05, null, 'detector']], extent: radius(2) },
  { title: 'two detectors, the second wider', energyKeV: 356, shape: point(4, 1), stack: [['NaI', 1, 2, 'detector'], ['CsI', 3, 4, 'detector']] },
  { title: 'a crystal in front of a wide lead backing', energyKeV: 511, shape: disc(3, 2), stack: [['BGO', 2, 1.5, 'detector'], [null, 1, 1.5], ['lead', 2, 8]] },
  { title: 'fluorescence of a collimator without a hole', energyKeV: 122.1, shape: point(3), stack: [['lead', 0.02, 3], ['Ge', 1, 2, 'detector']] },
  { title: 'CdTe with its escape lines', energyKeV: 59.5, shape: beam(2, 45), stack: [['CdTe', 0.2, null, 'detector']], extent: { kind: 'rectangle', widthCm: 1, heightCm: 2 } },
  { title: 'pairs and their quanta', energyKeV: 6130, shape: point(6), stack: [['Ge', 5, null, 'detector']], extent: radius(3) },
  { title: 'a source spread in the detector itself', energyKeV: 238.6, shape: embedded('l0'), stack: [['NaI', 1, null, 'detector']], extent: radius(2) },
  { title: 'a source spread behind the detector', energyKeV: 186.2, shape: embedded('l2'), stack: [['Ge', 2, 3, 'detector'], [null, 2, 3], ['soil', 5, 10]] },
  { title: 'a diffuse field', energyKeV: 88, shape: diffuse('isotropic'), stack: [['tin', 0.01], ['NaI', 0.3, null, 'detector']], extent: radius(1) },
  { title: 'a rectangular plate near a large source', energyKeV: 778.9, shape: disc(0.5, 6), stack: [['polystyrene', 4, null, 'detector'], ['iron', 2]], extent: { kind: 'rectangle', widthCm: 20, heightCm: 5 } },
]; // prettier-ignore

/** Groups of bins between these shares of the source energy; the last holds the full-energy peak. */
const SHARES = [0, 0.02, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 0.99, 1.05];

describe('Biased and analog histories give the same pulse heights', () => {
  it.each(SETUPS)('of $title', (given) => {
    const edgesKeV = SHARES.map((share) => share * given.energyKeV);
    const run = (transport: 'auto' | 'analog', histories: number) =>
      playSolid({ physics: ALL, ...given, seed: `bias: ${given.title}`, transport, edgesKeV }, histories);
    const analog = run('analog', 80_000);
    const biased = run('auto', 40_000);
    let compared = 0;
    const compare = (what: string, a: number, aError: number, b: number, bError: number) => {
      // Fewer than 100 counts have no normal law.
      if (!(a > 10 * aError)) return;
      compared++;
      // 4 σ of both together, false alarm 6e-5 each: about 300 comparisons, one false alarm in 50 sets of seeds.
      const tolerance = SIGMAS * Math.hypot(aError, bError);
      expect(
        Math.abs(a - b),
        `${what}: ${a} ± ${aError} analog, ${b} ± ${bError} biased`,
      ).toBeLessThanOrEqual(tolerance);
    };
    for (const spectrum of analog.spectra) {
      const other = spectrumOf(biased, spectrum.tally, spectrum.layer);
      spectrum.mean.forEach((mean, bin) =>
        compare(
          `${spectrum.tally} of ${spectrum.layer} from ${spectrum.energyLowKeV[bin]} keV`,
          mean,
          spectrum.stdError[bin],
          other.mean[bin],
          other.stdError[bin],
        ),
      );
    }
    for (const { quantity, layer, mean, stdError } of analog.totals) {
      if (mean === null || stdError === null) continue;
      const other = figureOf(biased, quantity, layer);
      compare(`${quantity} of ${layer}`, mean, stdError, other.mean, other.stdError);
    }
    expect(compared).toBeGreaterThan(12);
  });
});

describe('A biased history is worth many analog ones', () => {
  // Gain in variance per history; the gain per time is less by the ratio of their times.
  const gain = (given: Omit<SolidCase, 'seed'>, quantity: string) => {
    const variance = (transport: 'auto' | 'analog', histories: number) => {
      const { stdError } = figureOf(
        playSolid({ ...given, seed: 'gain', transport }, histories),
        quantity,
        'l0',
      );
      return stdError ** 2 * histories;
    };
    return variance('analog', 400_000) / variance('auto', 20_000);
  };

  it.each([
    ['full_energy', 300],
    ['interacting', 1000],
  ])('at 25 cm from a 3 inch NaI crystal (%s: more than %d)', (quantity, least) => {
    const given: Omit<SolidCase, 'seed'> = { energyKeV: 661.7, shape: point(25), stack: [['NaI', 7.62, null, 'detector']], extent: radius(3.81), physics: ALL }; // prettier-ignore
    expect(gain(given, quantity)).toBeGreaterThan(least);
  });

  it.each([
    ['full_energy', 30],
    ['interacting', 200],
  ])('in half a millimetre of silicon at 100 keV (%s: more than %d)', (quantity, least) => {
    const given: Omit<SolidCase, 'seed'> = { energyKeV: 100, shape: beam(1), stack: [['silicon', 0.05, null, 'detector']], extent: radius(2), physics: ALL }; // prettier-ignore
    expect(gain(given, quantity)).toBeGreaterThan(least);
  });
});
