/** Spectra of detectors and shields: lines, edges and peaks where kinematics and atomic physics put them. */
import { describe, expect, it } from 'vitest';
import { materialCoefficients, relaxation, resolveMaterial, subshellShares } from '../../materials/index.js';
import { expectNear } from './goodness.js';
import { withAbsorptionAlone } from './made-up.js';
import { ALL, figureOf, PLAIN, playSlab, spectrumOf, sumBetween } from './slab-run.js';

describe('NaI under 661.7 keV', () => {
  const edgeKeV = 477.33; // 661.7 (2 k)/(1 + 2 k), k = 661.7/511.0 (Compton 1923)
  const played = playSlab(
    { stack: [['NaI', 2, 'detector']], energyKeV: 661.7, physics: PLAIN, seed: 'edge' },
    400_000,
  );
  const pulses = spectrumOf(played, 'pulse_height', 'l0');

  it('has its Compton edge at 477.3 keV', () => {
    // Single scatterings end there; above it are only those that scattered twice or more
    const below = sumBetween(pulses, 465, 477);
    const above = sumBetween(pulses, 478, 490);
    expect(below.mean).toBeGreaterThan(3 * above.mean);
    // The steepest fall of the spectrum (over 4 keV) lies at the edge
    let steepest = 0;
    let at = 0;
    for (let keV = 300; keV < 600; keV++) {
      const fall = sumBetween(pulses, keV - 4, keV).mean - sumBetween(pulses, keV + 1, keV + 5).mean;
      if (fall > steepest) [steepest, at] = [fall, keV];
    }
    expect(Math.abs(at + 0.5 - edgeKeV)).toBeLessThanOrEqual(1);
  });

  it('has its full-energy pulses in the bin of 661.7 keV and in no other nearby', () => {
    const peak = sumBetween(pulses, 661, 662);
    expect(peak.mean).toBeCloseTo(figureOf(played, 'full_energy', 'l0').mean, 12);
    expect(peak.mean).toBeGreaterThan(100 * sumBetween(pulses, 655, 661).mean);
  });

  it('sees photons back from iron behind it near 184.3 keV, and not without', () => {
    const physics = ALL;
    const play = (stack: Parameters<typeof playSlab>[0]['stack']) =>
      spectrumOf(playSlab({ stack, energyKeV: 661.7, physics, seed: 'back' }, 250_000), 'pulse_height', 'l0');
    const [alone, backed] = [
      play([['NaI', 2, 'detector']]),
      play([
        ['NaI', 2, 'detector'],
        ['iron', 5],
      ]),
    ];
    // 661.7/(1 + 2 k) = 184.3 keV straight back, 205 keV at 140°; more by scattering twice
    const extra = (low: number, high: number) =>
      sumBetween(backed, low, high).mean - sumBetween(alone, low, high).mean;
    const peak = extra(184, 214);
    expect(peak).toBeGreaterThan(2 * Math.abs(extra(254, 284)));
    const windows = Array.from({ length: 14 }, (_, i) => 124 + 15 * i);
    const largest = windows.reduce((best, low) =>
      extra(low, low + 15) > extra(best, best + 15) ? low : best,
    );
    expect(largest).toBeGreaterThanOrEqual(169);
    expect(largest).toBeLessThanOrEqual(214);
  });

  it('sends back single-scattered photons of 184.3 to 288.3 keV', () => {
    const reflected = spectrumOf(played, 'reflected');
    // 661.7/(1 + k) = 288.3 keV at 90°; less than 184.3 keV takes two scatterings
    const single = sumBetween(reflected, 184, 289).mean;
    expect(single).toBeGreaterThan(0.6 * sumBetween(reflected, 0, 661).mean);
    expect(sumBetween(reflected, 185, 195).mean).toBeGreaterThan(4 * sumBetween(reflected, 173, 183).mean);
  });
});

describe('NaI at 60 keV', () => {
  const energyKeV = 60;
  const played = playSlab(
    {
      stack: [['NaI', 1, 'detector']],
      energyKeV,
      physics: { ...ALL, doppler: false },
      seed: 'escape',
      binKeV: 0.1,
    },
    200_000,
  );
  const pulses = spectrumOf(played, 'pulse_height', 'l0');

  it('has escape peaks at 60 − 28.6 and 60 − 32.3 keV', () => {
    // Bearden 1967 (values from memory): Kα1 28.61, Kα2 28.32, Kβ1 32.29, Kβ2 33.04 keV
    const alpha = sumBetween(pulses, 31.3, 31.8).mean;
    const beta = sumBetween(pulses, 26.8, 27.9).mean;
    expect(alpha).toBeGreaterThan(20 * sumBetween(pulses, 29, 31).mean);
    expect(beta).toBeGreaterThan(5 * sumBetween(pulses, 28, 31).mean);
    expect(beta / alpha).toBeGreaterThan(0.15);
    expect(beta / alpha).toBeLessThan(0.4);
  });

  // P. Axel, Rev. Sci. Instrum. 25 (1954) 391: of K quanta born along a normal beam in a thick crystal, a share of
  // (1/2) [1 − (μ₂/μ₁) ln(1 + μ₁/μ₂)] leaves through the front, μ₁ for the beam and μ₂ for the quanta. Line by line.
  const NaI = resolveMaterial('NaI');
  const kQuanta = relaxation(53).shells[0].transitions.filter(({ photonKeV }) => photonKeV > 10);
  const escape = (kind: 'photoelectric' | 'total') => {
    const of = (keV: number) => materialCoefficients(NaI, keV)[kind];
    const iodine = resolveMaterial('iodine', 1);
    const share =
      (NaI.constituents.find(({ z }) => z === 53)!.massFraction *
        materialCoefficients(iodine, energyKeV).photoelectric) /
      materialCoefficients(NaI, energyKeV).photoelectric;
    return kQuanta.reduce((sum, { photonKeV, probability }) => {
      const ratio = of(photonKeV) / of(energyKeV);
      const leaves = 0.5 * (1 - ratio * Math.log(1 + 1 / ratio));
      return sum + share * subshellShares(53, energyKeV)[0] * probability * leaves;
    }, 0);
  };

  it('loses K quanta as Axel’s formula has it, if photons do nothing but being absorbed', () => {
    const absorbing = playSlab(
      {
        stack: [['NaI', 1, 'detector']],
        energyKeV,
        physics: { ...PLAIN, fluorescence: true },
        seed: 'Axel',
        binKeV: 0.1,
      },
      300_000,
      withAbsorptionAlone,
    );
    const escaped = sumBetween(spectrumOf(absorbing, 'pulse_height', 'l0'), 26.7, 31.8);
    const expected = escape('photoelectric');
    expectNear('escape', escaped, expected, { slack: 1e-3 * expected }); // straight cells
  });

  it('loses K quanta as Axel’s formula has it within 8 % in earnest', () => {
    const escaped = sumBetween(pulses, 26.7, 31.8).mean / figureOf(played, 'interacting', 'l0').mean;
    // Quanta that scatter on their way may get out all the same: the formula counts them as lost
    expect(escaped / escape('total')).toBeGreaterThan(1);
    expect(escaped / escape('total')).toBeLessThan(1.08);
  });

  it('has none of it with fluorescence switched off', () => {
    const off = playSlab(
      {
        stack: [['NaI', 1, 'detector']],
        energyKeV,
        physics: { ...ALL, doppler: false, fluorescence: false },
        seed: 'escape',
        binKeV: 0.1,
      },
      100_000,
    );
    const without = spectrumOf(off, 'pulse_height', 'l0');
    expect(sumBetween(without, 26.8, 31.9).mean).toBeLessThan(0.01 * sumBetween(pulses, 26.8, 31.9).mean);
  });
});

describe('lead', () => {
  const reflectedOf = (energyKeV: number, fluorescence: boolean) =>
    spectrumOf(
      playSlab(
        { stack: [['lead', 1]], energyKeV, physics: { ...ALL, fluorescence }, seed: 'lead', binKeV: 0.5 },
        150_000,
      ),
      'reflected',
    );

  it('shines with its K lines of 72.8 to 87.4 keV under 150 keV', () => {
    const spectrum = reflectedOf(150, true);
    const lines = [72.8, 74.97, 84.94, 87.36]; // Bearden 1967, values from memory
    for (const line of lines) {
      const low = Math.floor(2 * line) / 2;
      expect(sumBetween(spectrum, low, low + 0.5).mean, `${line} keV`).toBeGreaterThan(1e-3);
    }
    const between = sumBetween(spectrum, 75.5, 84).mean / 17;
    expect(sumBetween(spectrum, 74.5, 75).mean).toBeGreaterThan(50 * between);
    // Kα2 : Kα1 = 0.595 (Scofield 1974, value from memory) where they are born; Kα2 is absorbed the more on its way out,
    // by Axel's formula. 3 % for what lies under the lines and for quanta that scatter on their way.
    const lead = resolveMaterial('lead');
    const escape = (keV: number) => {
      const ratio = materialCoefficients(lead, keV).total / materialCoefficients(lead, 150).total;
      return 1 - ratio * Math.log(1 + 1 / ratio);
    };
    const expected = 0.595 * (escape(72.8) / escape(74.97));
    const [alpha2, alpha1] = [sumBetween(spectrum, 72.5, 73), sumBetween(spectrum, 74.5, 75)];
    const mean = alpha2.mean / alpha1.mean;
    const stdError = mean * Math.hypot(alpha2.stdError / alpha2.mean, alpha1.stdError / alpha1.mean);
    expectNear('Kα2 : Kα1', { mean, stdError }, expected, { slack: 0.03 * expected });
  });

  it('does not shine with them under 80 keV, nor with fluorescence switched off', () => {
    for (const spectrum of [reflectedOf(80, true), reflectedOf(150, false)]) {
      expect(sumBetween(spectrum, 72.5, 75).mean).toBeLessThan(5e-4);
    }
  });
});

describe('germanium at 2614 keV', () => {
  const energyKeV = 2614.5; // Tl-208
  const play = (pair: boolean) =>
    playSlab(
      { stack: [['germanium', 4, 'detector']], energyKeV, physics: { ...ALL, pair }, seed: 'escape peaks' },
      120_000,
    );
  const played = play(true);
  const pulses = spectrumOf(played, 'pulse_height', 'l0');
  const peakAt = (keV: number, spectrum = pulses) => {
    const low = Math.floor(keV);
    const sides = sumBetween(spectrum, low - 6, low - 1).mean + sumBetween(spectrum, low + 2, low + 7).mean;
    const here = sumBetween(spectrum, low, low + 1);
    return { mean: here.mean - sides / 10, stdError: here.stdError };
  };

  it('has escape peaks at E − 511.0 and E − 1022.0 keV', () => {
    for (const lost of [511.0, 1022.0]) {
      const peak = peakAt(energyKeV - lost);
      expect(peak.mean, `E − ${lost}`).toBeGreaterThan(10 * peak.stdError);
    }
    expect(peakAt(energyKeV - 700).mean).toBeLessThan(4 * peakAt(energyKeV - 700).stdError);
  });

  it('sees the annihilation line come out on either side', () => {
    for (const side of ['transmitted', 'reflected'] as const) {
      const line = peakAt(510.999, spectrumOf(played, side));
      expect(line.mean, side).toBeGreaterThan(10 * line.stdError);
    }
  });

  it('has neither with pair production switched off', () => {
    const off = play(false);
    const without = spectrumOf(off, 'pulse_height', 'l0');
    for (const lost of [511.0, 1022.0]) {
      expect(peakAt(energyKeV - lost, without).mean).toBeLessThan(0.1 * peakAt(energyKeV - lost).mean);
    }
    const line = peakAt(510.999, spectrumOf(off, 'reflected'));
    expect(line.mean).toBeLessThan(0.05 * peakAt(510.999, spectrumOf(played, 'reflected')).mean);
  });
});
