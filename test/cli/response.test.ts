/**
 * What detectors make of their pulses. Limits on statistics are 4 standard errors, which a right value exceeds by
 * chance once in 16,000 times (normal law); seeds are fixed.
 */
import seedrandom from 'seedrandom';
import { describe, expect, test } from 'vitest';
import { complementaryError } from '../../cli/response/normal.js';
import { pulsesOf, type Pulses } from '../../cli/response/pulses.js';
import { registeredEdges, registeredSpectrum } from '../../cli/response/registered-spectrum.js';
import { fwhmKeV } from '../../cli/response/resolution.js';
import { shareBetween, smear } from '../../cli/response/smear.js';
import { registeredCounts, windowCounts } from '../../cli/response/windows.js';
import type { Spectrum } from '../../engine/result.js';
import type { Resolution } from '../../engine/setup.js';
import { ALL, figureOf, playSlab, spectrumOf } from '../engine/slab-run.js';

describe('the complementary error function', () => {
  // Abramowitz & Stegun, Handbook of Mathematical Functions, table 7.1 (erf to ten digits); the tail: erfc(5), erfc(10)
  // are values from memory.
  test.each([
    [0.1, 1 - 0.112462916],
    [0.5, 1 - 0.5204998778],
    [1, 1 - 0.8427007929],
    [1.5, 1 - 0.9661051465],
    [2, 1 - 0.995322265],
    [-0.5, 1.5204998778],
    [-2, 1.995322265],
  ])('of %d is the tabulated one to ten digits', (x, expected) => {
    expect(Math.abs(complementaryError(x) - expected)).toBeLessThan(6e-11);
  });

  test.each([
    [5, 1.5374597944280349e-12],
    [10, 2.088487583762545e-45],
  ])('of %d keeps its relative precision', (x, expected) => {
    expect(complementaryError(x) / expected).toBeCloseTo(1, 12);
  });

  test('goes on smoothly where its approximations meet', () => {
    for (const x of [0.46875, 4]) {
      const [below, above] = [complementaryError(x * (1 - 1e-15)), complementaryError(x * (1 + 1e-15))];
      expect(Math.abs(above / below - 1)).toBeLessThan(1e-13);
    }
  });
});

describe('the width of peaks', () => {
  const table: Resolution = { kind: 'table', energyKeV: [100, 400], fwhmKeV: [10, 20] };
  test.each([
    ['7 % at 661.7 keV at its energy', { kind: 'at_energy', fwhmKeV: 46.319, atKeV: 661.7 }, 661.7, 46.319],
    [
      '7 % at 661.7 keV at four times its energy',
      { kind: 'at_energy', fwhmKeV: 46.319, atKeV: 661.7 },
      2646.8,
      92.638,
    ],
    ['a + b √(E + c E²)', { kind: 'formula', a: 1, b: 2, c: 0.01 }, 100, 1 + 2 * Math.sqrt(200)],
    ['a formula that falls below 0', { kind: 'formula', a: -10, b: 1, c: 0 }, 25, 0],
    ['a table at its rows', table, 400, 20],
    // 10² and 20² have the mean 250.
    ['a table half way', table, 250, Math.sqrt(250)],
    ['a table below its first row', table, 25, 10],
    ['a table above its last row', table, 1600, 40],
  ] as const)('%s', (_, resolution, energyKeV, expected) => {
    expect(fwhmKeV(resolution as Resolution, energyKeV)).toBeCloseTo(expected, 9);
  });
});

const EVEN: Resolution = { kind: 'formula', a: 20, b: 0, c: 0 };

/** A spectrum of counts, as a run of so many histories gives it. */
function counted(counts: readonly number[], widthKeV: number, histories: number): Spectrum {
  const mean = Float64Array.from(counts, (n) => n / histories);
  return {
    tally: 'pulse_height',
    layer: 'crystal',
    energyLowKeV: Float64Array.from(counts, (_, i) => i * widthKeV),
    energyHighKeV: Float64Array.from(counts, (_, i) => (i + 1) * widthKeV),
    mean,
    stdError: mean.map((p) => (p === 0 ? NaN : Math.sqrt((p - p * p) / (histories - 1)))),
  };
}

function registered(
  spectrum: Spectrum,
  pulses: Pulses,
  resolution: Resolution | null,
  thresholdKeV = 0,
): Spectrum {
  const smeared = smear(pulses, resolution);
  return registeredSpectrum(spectrum, registeredEdges(spectrum, smeared), smeared, thresholdKeV);
}

const sum = (values: ArrayLike<number>) => Array.from(values).reduce((total, value) => total + value, 0);

/** Counts of a made-up spectrum: a continuum with a step. */
const STEPPED = Array.from({ length: 700 }, (_, i) => (i < 470 ? 40 + (i % 7) : 3));

describe('smearing', () => {
  test.each([
    ['even', EVEN],
    ['of 7 % at 661.7 keV', { kind: 'at_energy', fwhmKeV: 46, atKeV: 661.7 }],
    ['wider than the spectrum', { kind: 'formula', a: 900, b: 0, c: 0 }],
    ['narrower than a bin', { kind: 'formula', a: 0.01, b: 0, c: 0 }],
    ['none', null],
  ] as const)('%s loses and makes no count', (_, resolution) => {
    const spectrum = counted(STEPPED, 1, 100_000);
    const pulses = pulsesOf(spectrum, [{ lineKeV: 661.7, mean: 2e-5, stdError: 1e-5 }], 100_000);
    const smeared = registered(spectrum, pulses, resolution);
    expect(sum(smeared.mean) / sum(spectrum.mean)).toBeCloseTo(1, 13);
    expect(Math.min(...smeared.mean)).toBeGreaterThanOrEqual(0);
  });

  test('none leaves a spectrum as it is, errors too', () => {
    const spectrum = counted(STEPPED, 1, 100_000);
    const same = registered(spectrum, pulsesOf(spectrum, [], 100_000), null);
    expect(same.mean.length).toBe(spectrum.mean.length);
    same.mean.forEach((value, bin) => {
      expect(value).toBeCloseTo(spectrum.mean[bin], 15);
      expect(same.stdError[bin]).toBeCloseTo(spectrum.stdError[bin], 15);
    });
  });

  test.each([5, 20, 60])('a line by an FWHM of %d keV has that width at half its height', (width) => {
    const binKeV = 0.05;
    const spectrum = counted(
      Array.from({ length: 16_000 }, (_, i) => (i === 13_234 ? 500 : 0)),
      binKeV,
      1000,
    );
    const pulses = pulsesOf(spectrum, [{ lineKeV: 661.7, mean: 0.5, stdError: 0.01 }], 1000);
    const { mean, energyLowKeV, energyHighKeV } = registered(spectrum, pulses, {
      kind: 'formula',
      a: width,
      b: 0,
      c: 0,
    });
    const half = Math.max(...mean) / 2;
    const first = mean.findIndex((value) => value >= half);
    const last = mean.findLastIndex((value) => value >= half);
    expect(Math.abs(energyHighKeV[last] - energyLowKeV[first] - width)).toBeLessThanOrEqual(2 * binKeV);
    const centre =
      sum(mean.map((value, i) => value * 0.5 * (energyLowKeV[i] + energyHighKeV[i]))) / sum(mean);
    expect(centre).toBeCloseTo(661.7, 3);
  });

  test('the content of a wide bin is uniform in it: its shares are those of the integral over the bin', () => {
    const spectrum = counted([0, 100, 0], 10, 1000);
    const smeared = smear(pulsesOf(spectrum, [], 1000), EVEN);
    const sigma = 20 / 2.3548200450309493;
    for (const [low, high] of [
      [0, 7],
      [12, 13],
      [40, 60],
    ]) {
      // Midpoint rule over the bin and the range, 400 × 400 points.
      let integral = 0;
      for (let i = 0; i < 400; i++) {
        for (let j = 0; j < 400; j++) {
          const z = (low + ((high - low) * (j + 0.5)) / 400 - (10 + (10 * (i + 0.5)) / 400)) / sigma;
          integral += Math.exp(-0.5 * z * z);
        }
      }
      const expected = (integral * (high - low)) / 160_000 / (sigma * Math.sqrt(2 * Math.PI));
      expect(shareBetween(smeared, 0, low, high)).toBeCloseTo(expected, 6);
    }
  });

  test('pulses below the threshold are not registered, a bin is cut where the threshold is', () => {
    const spectrum = counted([100, 100, 100, 100], 10, 1000);
    const pulses = pulsesOf(spectrum, [], 1000);
    const cut = registered(spectrum, pulses, null, 14);
    [0, 0.06, 0.1, 0.1].forEach((value, bin) => expect(cut.mean[bin]).toBeCloseTo(value, 12));
    expect(registeredCounts(smear(pulses, null), 14).mean).toBeCloseTo(0.26, 12);
    const smeared = smear(pulses, EVEN);
    const edges = registeredEdges(spectrum, smeared);
    expect(registeredCounts(smeared, 14).mean).toBeCloseTo(
      sum(registeredSpectrum(spectrum, edges, smeared, 14).mean),
      12,
    );
  });
});

describe('fine bins', () => {
  const fine = counted(
    Array.from({ length: 30_000 }, (_, i) => (i < 20_000 ? 1 + (i % 3) : 0)),
    0.05,
    1e6,
  );
  const coarse = counted(
    Array.from({ length: 1500 }, (_, i) =>
      sum(Array.from({ length: 20 }, (_, k) => fine.mean[20 * i + k] * 1e6)),
    ),
    1,
    1e6,
  );
  const wide: Resolution = { kind: 'formula', a: 50, b: 0, c: 0 };

  test('smeared by a wide peak give what wider bins give', () => {
    const result = registered(fine, pulsesOf(fine, [], 1e6), wide);
    const expected = registered(coarse, pulsesOf(coarse, [], 1e6), wide);
    const highest = Math.max(...expected.mean);
    for (let bin = 0; bin < 1500; bin++) {
      const content = sum(result.mean.subarray(20 * bin, 20 * bin + 20));
      expect(Math.abs(content - expected.mean[bin])).toBeLessThan(1e-3 * highest);
    }
    expect(sum(result.mean) / sum(fine.mean)).toBeCloseTo(1, 12);
  });

  test('do not make more bins above the spectrum than there are in it', () => {
    const narrow = counted([10, 10, 10], 0.001, 1000);
    const smeared = smear(pulsesOf(narrow, [], 1000), wide);
    const edges = registeredEdges(narrow, smeared);
    expect(edges.length).toBe(7);
    // Eight standard deviations above the highest pulse.
    expect(edges.at(-1)).toBeGreaterThanOrEqual(0.003 + (8 * 50) / 2.3549);
    expect(sum(registeredSpectrum(narrow, edges, smeared, 0).mean)).toBeCloseTo(0.03, 12);
  });
});

describe('windows', () => {
  const flat = (height: number) =>
    counted(
      Array.from({ length: 1000 }, () => height),
      1,
      1e6,
    );

  test('net counts of a peak on a flat continuum are those of the peak', () => {
    const spectrum = flat(50);
    const withPeak = { ...spectrum, mean: spectrum.mean.slice() };
    withPeak.mean[661] += 2e-3;
    const pulses = pulsesOf(withPeak, [{ lineKeV: 661.7, mean: 2e-3, stdError: 1e-5 }], 1e6);
    const { gross, net } = windowCounts(smear(pulses, EVEN), 0, {
      name: 'peak',
      energyLowKeV: 601.7,
      energyHighKeV: 721.7,
    });
    expect(net!.mean).toBeCloseTo(2e-3, 8);
    expect(gross.mean).toBeCloseTo(2e-3 + 120 * 50e-6, 8);
  });

  test('net counts of a continuum that rises or falls by a straight line are 0', () => {
    const slope = counted(
      Array.from({ length: 1000 }, (_, i) => 1000 - i),
      1,
      1e6,
    );
    const pulses = pulsesOf(slope, [], 1e6);
    const window = { name: 'w', energyLowKeV: 400.3, energyHighKeV: 500.9 };
    const { net, gross } = windowCounts(smear(pulses, EVEN), 0, window);
    expect(Math.abs(net!.mean)).toBeLessThan(1e-12);
    expect(gross.mean).toBeGreaterThan(0.05);
  });

  test('there are no net counts where the band below the window lies under the threshold', () => {
    const smeared = smear(pulsesOf(flat(50), [], 1e6), EVEN);
    const window = { name: 'w', energyLowKeV: 40, energyHighKeV: 80 };
    expect(windowCounts(smeared, 31, window).net).toBeNull();
    expect(windowCounts(smeared, 30, window).net).not.toBeNull();
  });

  test('errors are those that independent runs scatter by', () => {
    const [runs, histories] = [200, 500];
    const random = seedrandom('scatter');
    const seen = Array.from({ length: runs }, () => {
      const counts = new Array<number>(100).fill(0);
      for (let history = 0; history < histories; history++) {
        const u = random();
        // Three in ten are full-energy pulses, five in ten anywhere below, the rest gives none.
        if (u < 0.3) counts[90]++;
        else if (u < 0.8) counts[Math.floor(random() * 90)]++;
      }
      const line = counts[90] / histories;
      const pulses = pulsesOf(
        counted(counts, 1, histories),
        [{ lineKeV: 90.5, mean: line, stdError: Math.sqrt((line - line * line) / (histories - 1)) }],
        histories,
      );
      const smeared = smear(pulses, { kind: 'formula', a: 6, b: 0, c: 0 });
      const { gross, net } = windowCounts(smeared, 0, { name: 'w', energyLowKeV: 84, energyHighKeV: 97 });
      return [gross, net!, registeredCounts(smeared, 50)];
    });
    for (const which of [0, 1, 2]) {
      const mean = sum(seen.map((run) => run[which].mean)) / runs;
      const scatter = sum(seen.map((run) => (run[which].mean - mean) ** 2)) / (runs - 1);
      const claimed = sum(seen.map((run) => run[which].stdError! ** 2)) / runs;
      expect(Math.abs(scatter / claimed - 1)).toBeLessThan(4 * Math.sqrt(2 / (runs - 1)));
    }
  });
});

describe('the response to a run', () => {
  const run = playSlab(
    { stack: [['NaI', 3, 'detector']], energyKeV: [661.7, 32], physics: ALL, seed: 'response' },
    30_000,
  );
  const tallied = spectrumOf(run, 'pulse_height', 'l0');
  const lines = run.totals.filter(({ quantity }) => quantity === 'full_energy');
  const pulses = pulsesOf(tallied, lines, run.histories);

  test('registers every pulse where there is no threshold, with the very error of interacting', () => {
    const { mean, stdError } = figureOf(run, 'interacting', 'l0');
    const value = registeredCounts(smear(pulses, EVEN), 0);
    expect(value.mean / mean).toBeCloseTo(1, 12);
    expect(value.stdError! / stdError).toBeCloseTo(1, 9);
  });

  test('has the full-energy peak at the energy of the line, whatever the bins', () => {
    const { mean, energyLowKeV, energyHighKeV } = registered(tallied, pulses, EVEN);
    let [area, moment] = [0, 0];
    mean.forEach((value, bin) => {
      const centre = 0.5 * (energyLowKeV[bin] + energyHighKeV[bin]);
      if (Math.abs(centre - 661.7) > 10) return;
      area += value;
      moment += value * centre;
    });
    expect(area).toBeGreaterThan(0.1);
    // The Compton continuum and X-ray escape below it pull by far less than a keV.
    expect(Math.abs(moment / area - 661.7)).toBeLessThan(0.5);
  });
});
