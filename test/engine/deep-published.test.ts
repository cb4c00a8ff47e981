/** Deep penetration against published buildup factors and tenth-value layers, and dose rates against constants. */
import { describe, expect, it } from 'vitest';
import { findNuclide, nuclideLines, resolveMaterial } from '../../materials/index.js';
import { attenuationPerCm } from '../../engine/deep/grid.js';
import type { Setup } from '../../engine/setup.js';
import { publishedRows } from '../published/csv.js';
import { planeBuildup, playBuildup, publishedBuildup } from './buildup.js';
import { figureIn, playDeep, type DeepCase } from './deep-run.js';

describe('exposure buildup of a plane isotropic source deep in matter', () => {
  it.each(['water', 'concrete', 'iron', 'lead'])(
    'in %s at 1 MeV is that of ANSI/ANS-6.4.3 within 4 per cent, from 1 to 10 mean free paths',
    (medium) => {
      const seed = `buildup ${medium}`;
      const buildupAt = playBuildup({ medium, energyKeV: 1000, depth: 15, seed, histories: 60_000 });
      const published = publishedBuildup('ANSI/ANS-6.4.3', medium, 1);
      for (const paths of [1, 2, 4, 7, 10]) {
        const { mean: buildup, stdError } = buildupAt(paths);
        const expected = planeBuildup(published, paths);
        // Values from memory, good to two or three digits; 4 standard errors come on top (false alarm 6e-5 each).
        expect(
          Math.abs(buildup - expected),
          `${paths} mean free paths: got ${buildup} ± ${stdError}, published ${expected}`,
        ).toBeLessThan(0.04 * expected + 4 * stdError);
      }
    },
  );
});

describe('broad-beam tenth-value layers', () => {
  const THICK_CM: Record<string, number> = { lead: 4, concrete: 3.5, iron: 3.5 };

  /** Gammas alone: the published values are for sources whose X rays their capsules hold back. */
  function withGammas(setup: Setup, nuclide: string): Setup {
    const lines = nuclideLines(findNuclide(nuclide)!, { minimumEnergyKeV: 100, minimumYield: 0.01 });
    const emission = { ...setup.source.emission, lines, nuclide };
    return { ...setup, source: { ...setup.source, emission } };
  }

  // Values from memory. They are design values, rounded to two digits.
  const rows = publishedRows('value-layers').filter(({ source }) => source.startsWith('NCRP Report 49'));
  it.each(rows.map((row) => [row.nuclide, row.material, row] as const))(
    'of %s in %s: the second is that of NCRP 49 within 7 per cent, that of equilibrium is smaller by 15 at most',
    (nuclide, material, row) => {
      const published = Number(row.tenth_value_layer_cm) * Number(row.density_g_per_cm3);
      const { densityGPerCm3 } = resolveMaterial(material)!;
      const thicknessCm = (THICK_CM[material] * published) / densityGPerCm3;
      const played = playDeep(
        {
          stack: [[material, thicknessCm]],
          energyKeV: 1400,
          depth: { layer: 'l0', bins: 50 },
          seed: `layers ${nuclide} ${material}`,
        },
        15_000,
        'deep',
        (setup) => withGammas(setup, nuclide),
      );
      const second = figureIn(played, 'tenth_value_layer_2', 'l0');
      const equilibrium = figureIn(played, 'tenth_value_layer_equilibrium', 'l0');
      expect(Math.abs((second.mean * densityGPerCm3) / published - 1)).toBeLessThan(0.07);
      const below = 1 - (equilibrium.mean * densityGPerCm3) / published;
      expect(below).toBeGreaterThan(0);
      expect(below).toBeLessThan(0.15);
      expect(second.stdError / second.mean).toBeLessThan(0.03);
    },
  );

  it('of a narrow beam are ln 10 over the attenuation coefficient', () => {
    const given: DeepCase = {
      stack: [['lead', 6]],
      energyKeV: 1250,
      depth: { layer: 'l0', bins: 60 },
      seed: 'layers narrow',
    };
    const played = playDeep(given, 1000);
    const expected = Math.LN10 / attenuationPerCm(played.problem, 0, 1250);
    for (const name of ['tenth_value_layer_1', 'tenth_value_layer_equilibrium']) {
      const { mean, stdError } = figureIn(played, `narrow_${name}`, 'l0');
      expect(Math.abs(mean / expected - 1)).toBeLessThan(1e-6);
      expect(stdError).toBe(0);
    }
  });
});

describe('air kerma rate at 1 m in vacuum', () => {
  it.each(publishedRows('air-kerma-constants').map((row) => [row.nuclide, row] as const))(
    'of %s is the published constant within 2 per cent, with photons from the energy it is stated for',
    (nuclide, row) => {
      const lines = nuclideLines(findNuclide(nuclide)!, { minimumEnergyKeV: Number(row.from_keV) });
      const perDecay = lines.reduce((sum, line) => sum + line.perDecay, 0);
      const played = playDeep(
        {
          stack: [[null, 1]],
          energyKeV: 3000,
          shape: { kind: 'point', distanceCm: 50, offsetCm: 0 },
          points: [{ name: 'p', zCm: 50, offsetCm: 0 }],
          seed: `constant ${nuclide}`,
        },
        10,
        'deep',
        (setup) => ({
          ...setup,
          source: { ...setup.source, emission: { ...setup.source.emission, lines, nuclide } },
        }),
      );
      // pGy per photon into aGy m² per decay
      const constant = figureIn(played, 'air_kerma', 'p').mean * perDecay * 1e6;
      const published = Number(row.air_kerma_constant_aGy_m2_per_Bq_s);
      expect(Math.abs(constant / published - 1), `got ${constant}, published ${published}`).toBeLessThan(
        0.02,
      );
    },
  );
});
