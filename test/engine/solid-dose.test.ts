/** Dose at the faces of stacks with edges. */
import { describe, expect, test } from 'vitest';
import { compile } from '../../engine/compile.js';
import type { Extent, Transport } from '../../engine/setup.js';
import { doseCoefficient } from '../../materials/index.js';
import { beam, point, radius, solidSetup } from './solid-run.js';
import { figureOf, playSetup } from './slab-run.js';

const HISTORIES = 60_000;

function airKerma(extent: Extent | null, transport: Transport, shape = beam(), thicknessCm = 2) {
  const setup = solidSetup(
    { stack: [['iron', thicknessCm]], energyKeV: 662, shape, seed: 'solid-dose', extent, transport },
    HISTORIES,
  );
  const asked = { ...setup, tally: { ...setup.tally, dose: ['air_kerma'] as const } };
  return playSetup(asked, compile(asked));
}

describe('dose behind a stack with an edge', () => {
  test('is that of an endless stack where the edge is far away', () => {
    const [finite, endless] = [airKerma(radius(1e4), 'analog'), airKerma(null, 'analog')].map((played) =>
      figureOf(played, 'air_kerma'),
    );
    // 4 combined standard errors: false alarm 1 in 16 000; the seed is fixed.
    const sigma = Math.hypot(finite.stdError!, endless.stdError!);
    expect(Math.abs(finite.mean! - endless.mean!)).toBeLessThan(4 * sigma);
  });

  test('is the same with forced first collisions as in analog transport', () => {
    const [biased, analog] = (['auto', 'analog'] as const).map((transport) =>
      figureOf(airKerma(radius(4), transport, point(5)), 'air_kerma'),
    );
    const sigma = Math.hypot(biased.stdError!, analog.stdError!);
    expect(Math.abs(biased.mean! - analog.mean!)).toBeLessThan(4 * sigma);
  });

  test('without matter in the way is the fluence of the beam times the coefficient', () => {
    const setup = solidSetup(
      {
        stack: [
          [null, 1],
          ['iron', 1e-9],
        ],
        energyKeV: 662,
        shape: beam(),
        seed: 'free',
        extent: radius(3),
      },
      1000,
    );
    const asked = { ...setup, tally: { ...setup.tally, dose: ['air_kerma'] as const } };
    const dose = figureOf(playSetup(asked, compile(asked)), 'air_kerma');
    // The engine holds coefficients as lines over cells of 1/128 octave: within 1e-4 of the table.
    expect(dose.mean! / doseCoefficient('air_kerma', 662)).toBeCloseTo(1, 3);
  });

  test('leaves the uncollided part unknown, which no integral gives here', () => {
    const played = airKerma(radius(4), 'auto');
    const uncollided = played.totals.find(({ quantity }) => quantity === 'air_kerma_uncollided');
    expect(uncollided).toMatchObject({ mean: null, stdError: null });
    expect(figureOf(played, 'air_kerma').mean).toBeGreaterThan(0);
  });
});
