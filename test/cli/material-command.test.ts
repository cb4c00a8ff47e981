import { Command } from 'commander';
import { afterEach, describe, expect, it, vi } from 'vitest';
import { ThicksetError } from '../../cli/errors.js';
import { registerMaterialCommand } from '../../cli/material-command.js';

afterEach(() => {
  vi.restoreAllMocks();
});

/** What the command prints on stdout. */
async function material(...args: string[]): Promise<string> {
  const program = new Command('thickset').exitOverride();
  registerMaterialCommand(program);
  program.commands[0].exitOverride().configureOutput({ writeErr: () => undefined });
  const written: string[] = [];
  vi.spyOn(process.stdout, 'write').mockImplementation((chunk) => written.push(String(chunk)) > 0);
  await program.parseAsync(['material', ...args], { from: 'user' });
  return written.join('');
}

/** The line an error is shown with. */
async function errorOf(...args: string[]): Promise<string> {
  try {
    await material(...args);
  } catch (error) {
    return error instanceof ThicksetError ? error.format() : (error as Error).message;
  }
  return 'no error';
}

describe('thickset material', () => {
  it('shows what a material is, its coefficients and its narrow-beam thicknesses in aligned columns', async () => {
    expect(await material('CdTe', '--energies', '59.5 keV, 661.7 keV,2MeV', '--width', '80'))
      .toMatchInlineSnapshot(`
      "CdTe
        is           semiconductor; the tables of NIST use 6.2 g/cm3
        also called  cadmium telluride
        density      5.85 g/cm3 (CRC Handbook of Chemistry and Physics (value from
                     memory))
        by mass      Cd 46.84 %, Te 53.16 %
                     (chemical formula)
        edges        Te K 31.814, Cd K 26.711, Te L1 4.9392, Te L2 4.612, Te L3
                     4.3414, Cd L1 4.018, Cd L2 3.727, Cd L3 3.5375 keV

      Mass attenuation coefficients, cm2/g
           keV  photoelectric  incoherent  coherent      pair     total
          59.5        6.341e0    1.117e-1  2.390e-1         0   6.691e0
         661.7       8.311e-3    6.381e-2  2.815e-3         0  7.494e-2
        2000         9.484e-4    3.672e-2  3.138e-4  2.712e-3  4.070e-2

      Narrow beam
           keV  linear, 1/cm  mean free path, cm  half value, cm  tenth value, cm
          59.5       3.914e1             0.02555         0.01771          0.05882
         661.7      4.384e-1             2.281           1.581            5.252
        2000        2.381e-1             4.200           2.911            9.671

      Thicknesses are for a narrow beam, in which scattered photons count as removed;
      a real shield lets more through. These figures support design; they replace no
      measurement, no local code and no qualified expert.
      "
    `);
  });

  it('gives the same facts as one JSON object', async () => {
    const facts = JSON.parse(await material('PbWO4', '--energies', '100 keV', '--json'));
    const [row] = facts.attenuation;
    expect(Object.keys(facts)).toEqual([
      'name',
      'aliases',
      'description',
      'density_g_cm3',
      'density_source',
      'composition',
      'composition_source',
      'absorption_edges',
      'attenuation',
      'warnings',
    ]);
    expect(facts.composition.map(({ element }: { element: string }) => element)).toEqual(['O', 'W', 'Pb']);
    expect(facts.absorption_edges[0]).toEqual({ element: 'Pb', shell: 'K', energy_keV: 88.004 });
    const { photoelectric, incoherent, coherent, pair, total } = row.mass_attenuation_cm2_g;
    expect(photoelectric + incoherent + coherent + pair).toBeCloseTo(total, 12);
    expect(row.linear_attenuation_per_cm).toBeCloseTo(total * 8.28, 12);
    expect(row.mean_free_path_cm * row.linear_attenuation_per_cm).toBeCloseTo(1, 12);
  });

  it('gives the narrow-beam half-value and tenth-value thickness of lead at 600 keV', async () => {
    // Source: NISTIR 5632, lead at 600 keV: 0.1248 cm²/g; the thicknesses are ln 2 and ln 10 over 0.1248 · 11.35 / cm.
    const { attenuation } = JSON.parse(await material('lead', '--energies', '600 keV', '--json'));
    const linear = 0.1248 * 11.35;
    expect(Math.abs(attenuation[0].half_value_cm / (Math.LN2 / linear) - 1)).toBeLessThan(0.01);
    expect(Math.abs(attenuation[0].tenth_value_cm / (Math.LN10 / linear) - 1)).toBeLessThan(0.01);
  });

  it('covers 1 keV to 20 MeV when no energies are given', async () => {
    const { attenuation } = JSON.parse(await material('water', '--json'));
    const energies = attenuation.map(({ energy_keV }: { energy_keV: number }) => energy_keV);
    expect(energies[0]).toBe(1);
    expect(energies.at(-1)).toBe(20_000);
    expect(energies).toEqual([...energies].sort((a, b) => a - b));
  });

  it('takes any formula with a density, and another density for a named material', async () => {
    const alloy = JSON.parse(await material('CuZn', '--density', '8.4 g/cm3', '--json'));
    expect(alloy).toMatchObject({ name: 'CuZn', density_g_cm3: 8.4, density_source: 'given' });
    const xenon = JSON.parse(await material('xenon gas', '--density', '55 kg/m3', '--json'));
    expect(xenon).toMatchObject({ name: 'xenon gas', density_g_cm3: 0.055, density_source: 'given' });
  });

  it.each([
    [['leed'], 'unknown material "leed"; did you mean lead?'],
    [['CuZn'], 'the formula "CuZn" needs a density; add one, as in --density "2.35 g/cm3"'],
    [
      ['H2(O', '--density', '1 g/cm3'],
      'material "H2(O": must close each group: a ")" is missing, got "H2(O"',
    ],
    [['NaI', '--energies', '0.5 keV'], '--energies: must be an energy from 1 keV to 20 MeV, got 0.5 keV'],
    [['NaI', '--energies', '21 MeV'], '--energies: must be an energy from 1 keV to 20 MeV, got 21000 keV'],
    [
      ['NaI', '--density', '-1 g/cm3'],
      '--density: must be a density above 0 and at most 30 g/cm3, got -1 g/cm3',
    ],
    [['NaI', '--energies', '60'], /"60" needs a unit; write one of keV, MeV, eV/],
    [['NaI', '--energies', '60 keV,'], /"" must be a number and a unit/],
    [['NaI', '--density', '3.7'], /"3.7" needs a unit; write one of g\/cm3/],
    [[], /missing required argument 'name'/],
  ])('says of %j what is wrong', async (args, expected) => {
    expect(await errorOf(...args)).toEqual(
      typeof expected === 'string' ? expected : expect.stringMatching(expected),
    );
  });
});
