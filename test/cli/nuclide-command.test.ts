import { Command } from 'commander';
import { afterEach, describe, expect, it, vi } from 'vitest';
import { registerNuclideCommand } from '../../cli/nuclide-command.js';
import { formatHalfLife } from '../../cli/text/nuclide-text.js';

/** What `thickset nuclide ...` prints on stdout. */
function run(...args: string[]): string {
  let printed = '';
  vi.spyOn(process.stdout, 'write').mockImplementation((text) => {
    printed += String(text);
    return true;
  });
  const program = new Command('thickset').exitOverride().configureOutput({ writeErr: () => undefined });
  registerNuclideCommand(program);
  for (const command of program.commands)
    command.exitOverride().configureOutput({ writeErr: () => undefined });
  program.parse(['nuclide', ...args], { from: 'user' });
  return printed;
}

afterEach(() => vi.restoreAllMocks());

describe('thickset nuclide', () => {
  it('shows half-life, lines and source of a nuclide on one screen', () => {
    expect(run('cs137')).toMatchInlineSnapshot(`
      "Cs-137
        half-life    30.02 a
        also called  Cs-137/Ba-137m, Cs-137+
        note         the lines are those of Ba-137m in equilibrium
        source       DDEP evaluation, CEA/LNE-LNHB - 2023

      Photons per 100 decays
        energy, keV          per 100           kind
         31.8174              1.990 +/- 0.040  X ray  Ka2
         32.1939              3.660 +/- 0.060  X ray  Ka1
         36.4457              1.078 +/- 0.020  X ray  K'b1
        661.6553 +/- 0.0030  85.01  +/- 0.20   gamma
        4 lines, 91.74 photons per 100 decays

      Lines from 5 keV and 0.5 photons per 100 decays up are known; X rays of one
      shell may stand as one line at their mean energy. Annihilation quanta suppose
      that the source stops its positrons.
      "
    `);
  });

  it('shows of a chain what it holds and which decay each line belongs to', () => {
    const screen = run('Th-232+', '--minimum-yield', '20 %', '--minimum-energy', '100 keV');
    expect(screen).toMatchInlineSnapshot(`
      "Th-232+
        half-life    1.402e10 a
        also called  Th-232+progeny, thorium
        holds        Th-232, Ra-228, Ac-228, Th-228, Ra-224, Rn-220, Pb-212, Bi-212,
                     Tl-208 (0.3593 per decay)
        note         the whole chain to Pb-208 in secular equilibrium (older than 40
                     a, radon kept in); Po-216 and Po-212 have no line of at least 0.5
                     per 100 decays; the weak lines left out carry some 5 % of the
                     photon energy
        source       Th-232: DDEP evaluation, NPL - 2009
                     Ra-228: DDEP evaluation, IFIN-HH - 2009
                     Ac-228: DDEP evaluation, NPL - 2009
                     Th-228: DDEP evaluation, Surrey Univ. - 2011
                     Ra-224: DDEP evaluation, Surrey Univ. - 2011
                     Rn-220: DDEP evaluation, Surrey Univ. - 2011
                     Pb-212: DDEP evaluation, Surrey Univ. - 2010
                     Bi-212: DDEP evaluation, Surrey Univ. - 2010
                     Tl-208: DDEP evaluation, Surrey Univ. - 2010

      Photons per 100 decays of Th-232
        energy, keV           per 100             kind   decay of
         238.6320 +/- 0.0020  43.60   +/- 0.50    gamma  Pb-212
         583.1870 +/- 0.0020  30.54   +/- 0.11    gamma  Tl-208
         911.1960 +/- 0.0060  26.20   +/- 0.80    gamma  Ac-228
        2614.511  +/- 0.010   35.8420 +/- 0.0014  gamma  Tl-208
        4 lines, 136.2 photons per 100 decays

      Lines from 5 keV and 0.5 photons per 100 decays up are known; X rays of one
      shell may stand as one line at their mean energy. Annihilation quanta suppose
      that the source stops its positrons.
      "
    `);
  });

  it('lists all nuclides without a name', () => {
    const screen = run();
    expect(screen).toContain('Co-60');
    expect(screen.split('\n').length).toBeGreaterThan(100);
    for (const line of screen.split('\n')) expect(line.length).toBeLessThanOrEqual(80);
  });

  it('prints one JSON object with --json', () => {
    const { name, half_life_s, lines } = JSON.parse(run('60Co', '--json'));
    expect(name).toBe('Co-60');
    expect(half_life_s).toBe(1.6634e8);
    expect(lines[0]).toEqual({
      energy_keV: 1173.228,
      energy_uncertainty_keV: 0.003,
      per_decay: 0.9985,
      per_decay_uncertainty: 0.0003,
      kind: 'gamma',
      transition: 'g',
      decay_of: 'Co-60',
      origin: 'Ni-60',
      source: 'DDEP evaluation, INEEL - 2006',
    });
    expect(JSON.parse(run('--json')).nuclides.length).toBeGreaterThanOrEqual(96);
  });

  it('says which nuclide may be meant by an unknown name', () => {
    expect(() => run('Cs-173')).toThrow('unknown nuclide "Cs-173"');
    try {
      run('Cs-173');
    } catch (error) {
      expect((error as { format: () => string }).format()).toContain('did you mean Cs-137?');
    }
  });

  it.each([
    ['--minimum-yield', '-1'],
    ['--minimum-yield', 'many'],
    ['--minimum-energy', '30'],
    ['--minimum-energy', '30 cm'],
  ])('refuses %s %s', (option, value) => {
    expect(() => run('Cs-137', option, value)).toThrow();
  });
});

describe('half-lives', () => {
  it.each([
    [69.5, '69.5 s'],
    [3632.4, '60.54 min'],
    [21_624.1, '6.007 h'],
    [693_210, '8.023 d'],
    [9.473e8, '30.02 a'],
    [1.41e17, '4.468e9 a'],
  ])('of %f s read %s', (seconds, text) => {
    expect(formatHalfLife(seconds)).toBe(text);
  });
});
