import { describe, expect, test } from 'vitest';
import type { QuantityRow, RunResult, StopReason } from '../../engine/result.js';
import { packResult } from '../../cli/result/stored-result.js';
import { makeStyle } from '../../cli/text/style.js';
import { summaryLines, type SpectraChoice } from '../../cli/text/summary-text.js';
import { displayWidth } from '../../cli/text/display-width.js';
import { fixtureResult, fixtureSetup } from './result-fixture.js';

interface Look {
  readonly width?: number;
  readonly unicode?: boolean;
  readonly colour?: boolean;
  readonly spectra?: SpectraChoice;
}

function summary(changes: Partial<RunResult> = {}, look: Look = {}): string {
  const { width = 80, unicode = true, colour = false, spectra = 'none' } = look;
  const stored = packResult(fixtureResult(changes), { setupText: null, threads: 2, finished: new Date(0) });
  const style = makeStyle({ interactive: true, colour, unicode, width });
  return `\n${summaryLines(stored, style, spectra).join('\n')}\n`;
}

const bareSource = {
  ...fixtureSetup.source,
  emission: { ...fixtureSetup.source.emission, photonsPerDecay: null, nuclide: null },
  activityBq: null,
  liveTimeS: null,
};

function figure(quantity: string, mean: number | null, stdError: number | null, unit = '1'): QuantityRow {
  return { quantity, layer: null, lineKeV: null, mean, stdError, unit };
}

test('a run stopped by its time limit, 110 columns wide', () => {
  expect(summary({}, { width: 110 })).toMatchInlineSnapshot(`
    "
    Crystal behind an aluminium window
    800,000 histories, stopped by the time limit; seed window-1
    10 min, 1,339 histories per second

    What went in
      source    point, 25 cm in front
      emits     Cs-137: 661.657 keV (0.8499 per decay), 32.194 keV (0.0355 per decay)
      activity  37 kBq, counted for 10 min
      extent    radius 3.81 cm
      left out  doppler
      layers    window   aluminium  0.05 cm  2.699 g/cm3
                gap      vacuum     0.2 cm
                crystal  NaI        7.62 cm  3.667 g/cm3  radius 3.81 cm  detector
                                                per photon                     error
      incident                                        0.005773                     exact

    What came out                               per photon                     error
      transmitted                                     0.001234 ± 0.000035          2.9 %
      transmitted_energy                              0.561    ± 0.017    keV      3.0 %
      uncollided                                      4.12e-7  ± 0.19e-7           4.7 %
      reflected                                       0.000412 ± 0.000020          4.9 %
      reflected_energy                                0.0712   ± 0.0038   keV      5.3 %  *
      side_escape                                     0                        none seen  *
      side_escape_energy                              0                   keV  none seen  *

    What each layer got                         per photon                     error
      deposited_energy    window                      0.00830  ± 0.00071  keV      8.6 %  *
      interacting         window                      0.000123 ± 0.000011          8.9 %  *
      deposited_energy    crystal                     1.4567   ± 0.0062   keV     0.43 %

    Detectors                                   per photon                     error
      interacting         crystal                     0.003457 ± 0.000019         0.54 %
      full_energy         crystal  661.657 keV        0.001210 ± 0.000011         0.93 %  !
      full_energy         crystal  32.194 keV         0.000201 ± 0.000014          7.0 %  *
      peak_to_total       crystal  661.657 keV        0.4100   ± 0.0042            1.0 %
      peak_to_total       crystal  32.194 keV   unknown                                   *

    With this source                            per decay                  per second                 error
      incident                                  0.005112                     189.1                        exact
      transmitted                               0.001093  ± 0.000031          40.4     ± 1.2              2.9 %
      transmitted_energy                        0.497     ± 0.015     keV  18390       ± 560     keV      3.0 %
      uncollided                                3.65e-7   ± 0.17e-7            0.01350 ± 0.00063          4.7 %
      reflected                                 0.000365  ± 0.000018          13.50    ± 0.66             4.9 %
      reflected_energy                          0.0630    ± 0.0034    keV   2330       ± 120     keV      5.3 %  *
      side_escape                               0                              0                      none seen  *
      side_escape_energy                        0                     keV      0                 keV  none seen  *
      deposited_energy    window                0.00735   ± 0.00063   keV    272       ± 23      keV      8.6 %  *
      interacting         window                0.0001093 ± 0.0000097          4.04    ± 0.36             8.9 %  *
      deposited_energy    crystal               1.2898    ± 0.0055    keV  47720       ± 200     keV     0.43 %
      interacting         crystal               0.003061  ± 0.000017         113.24    ± 0.61            0.54 %
      full_energy         crystal  661.657 keV  0.0010712 ± 0.0000099         39.63    ± 0.37            0.93 %  !
      full_energy         crystal  32.194 keV   0.000178  ± 0.000012           6.58    ± 0.46             7.0 %  *

    With this source                            in 10 min                   error
      incident                                  113500                          exact
      transmitted                                24260       ± 690              2.9 %
      transmitted_energy                             1.103e7 ± 0.034e7 keV      3.0 %
      uncollided                                     8.10    ± 0.38             4.7 %
      reflected                                   8100       ± 400              4.9 %
      reflected_energy                               1.399e6 ± 0.075e6 keV      5.3 %  *
      side_escape                                    0                      none seen  *
      side_escape_energy                             0                 keV  none seen  *
      deposited_energy    window                163000       ± 14000   keV      8.6 %  *
      interacting         window                  2430       ± 220              8.9 %  *
      deposited_energy    crystal                    2.863e7 ± 0.012e7 keV     0.43 %
      interacting         crystal                67940       ± 370             0.54 %
      full_energy         crystal  661.657 keV   23780       ± 220             0.93 %  !
      full_energy         crystal  32.194 keV     3950       ± 280              7.0 %  *

    * not converged: standard error above 5 % of the value, or nothing seen; more histories help
    ! stopped by the time limit before full_energy reached 0.5 %

    Warnings
      electrons of window fly further than it is thick

    Energy in and energy accounted for differ by 2.3e-15 of the whole.
    These figures come from an idealised slab model. They support design; they replace no measurement, no local
    code and no qualified expert.
    "
  `);
});

test('the same without decays and activity, plain, with spectra, 80 columns wide', () => {
  const setup = { ...fixtureSetup, source: bareSource };
  expect(summary({ setup }, { unicode: false, spectra: 'main' })).toMatchInlineSnapshot(`
    "
    Crystal behind an aluminium window
    800,000 histories, stopped by the time limit; seed window-1
    10 min, 1,339 histories per second

    What went in
      source    point, 25 cm in front
      emits     661.657 keV, 32.194 keV
      extent    radius 3.81 cm
      left out  doppler
      layers    window   aluminium  0.05 cm  2.699 g/cm3
                gap      vacuum     0.2 cm
                crystal  NaI        7.62 cm  3.667 g/cm3  radius 3.81 cm  detector
                                                per photon                       error
      incident                                        0.005773                       exact

    What came out                               per photon                       error
      transmitted                                     0.001234 +/- 0.000035          2.9 %
      transmitted_energy                              0.561    +/- 0.017    keV      3.0 %
      uncollided                                      4.12e-7  +/- 0.19e-7           4.7 %
      reflected                                       0.000412 +/- 0.000020          4.9 %
      reflected_energy                                0.0712   +/- 0.0038   keV      5.3 %  *
      side_escape                                     0                          none seen  *
      side_escape_energy                              0                     keV  none seen  *

    What each layer got                         per photon                       error
      deposited_energy    window                      0.00830  +/- 0.00071  keV      8.6 %  *
      interacting         window                      0.000123 +/- 0.000011          8.9 %  *
      deposited_energy    crystal                     1.4567   +/- 0.0062   keV     0.43 %

    Detectors                                   per photon                       error
      interacting         crystal                     0.003457 +/- 0.000019         0.54 %
      full_energy         crystal  661.657 keV        0.001210 +/- 0.000011         0.93 %  !
      full_energy         crystal  32.194 keV         0.000201 +/- 0.000014          7.0 %  *
      peak_to_total       crystal  661.657 keV        0.4100   +/- 0.0042            1.0 %
      peak_to_total       crystal  32.194 keV   unknown                                     *

    * not converged: standard error above 5 % of the value, or nothing seen; more
    histories help
    ! stopped by the time limit before full_energy reached 0.5 %

    Transmitted photons (per keV and photon)
       2e-6 +##:::...
            |############:::....
            |######################:::....
            |################################::::...
       1e-6 +##########################################::::...
            |####################################################::::...
            |###############################################################:::.
            |###################################################################
          0 ++---------+---------+---------+----------+---------+---------+--------+
             0        100       200       300        400       500       600 keV

    Reflected photons (per keV and photon)
       5e-6 +
            |                   .......
            |                   #######
            |                  :#######
     2.5e-6 +                  ########
            |                  ########.
            |                  #########
            |                  #########
          0 ++---------+---------+---------+----------+---------+---------+--------+
             0        100       200       300        400       500       600 keV

    Pulse heights, crystal (per keV and photon, logarithmic)
       1e-3 +
            |
       1e-4 +                                                                   #
            |                                                                  .#
       1e-5 +                                               .                  ##
            |::::::::::::::::::::::::::::::::::::############                  ##
       1e-6 +################################################:                 ##
            |#################################################................ ##
       1e-7 ++---------+---------+---------+----------+---------+---------+--------+
             0        100       200       300        400       500       600 keV

    Warnings
      electrons of window fly further than it is thick

    Energy in and energy accounted for differ by 2.3e-15 of the whole.
    These figures come from an idealised slab model. They support design; they
    replace no measurement, no local code and no qualified expert.
    "
  `);
});

test.each([60, 80, 100, 160])('no line is wider than %i columns, figures apart', (width) => {
  const lines = summary({}, { width, spectra: 'all' }).split('\n');
  const wide = lines.filter((line) => displayWidth(line) > width);
  expect(
    width >= 100 ? wide : wide.filter((line) => !/±|error|exact|none seen|layers|gap|crystal/.test(line)),
  ).toEqual([]);
});

describe('what is not converged is marked', () => {
  function lineOf(text: string, quantity: string): string {
    return text.split('\n').find((line) => line.includes(`  ${quantity} `)) ?? '';
  }

  test.each([
    ['an error above 5 %', figure('transmitted', 1, 0.051), /5\.1 % {2}\*$/],
    ['an error of 5 %', figure('transmitted', 1, 0.05), /5\.0 %$/],
    ['no history seen, the error unknown', figure('transmitted', 0, null), /0 +none seen {2}\*$/],
    ['no history seen, the error 0', figure('transmitted', 0, 0), /0 +none seen {2}\*$/],
    ['an unknown figure', figure('transmitted', null, null), /unknown +\*$/],
    ['all histories seen', figure('transmitted', 1, 0), /transmitted +1$/],
    ['a figure known without a run', figure('incident', 1, 0), /incident +1 +exact$/],
  ])('%s', (_, row, line) => {
    const text = summary({ totals: [row], setup: { ...fixtureSetup, source: bareSource } });
    expect(lineOf(text, row.quantity)).toMatch(line);
    expect(text.includes('* not converged')).toBe(/\\\*/.test(line.source));
  });

  const watched = { quantity: 'transmitted', layer: null, relativeError: 0.01 };
  test.each([
    ['histories', 0.02, true],
    ['time_limit', 0.02, true],
    ['interrupted', 0.02, true],
    ['histories', 0.009, false],
    ['until', 0.009, false],
  ] as const)('the figure of `until`, stopped by %s at %f: %s', (stopped: StopReason, error, marked) => {
    const setup = { ...fixtureSetup, source: bareSource, run: { ...fixtureSetup.run, until: watched } };
    const text = summary({ stopped, setup, totals: [figure('transmitted', 1, error)] });
    expect(lineOf(text, 'transmitted').endsWith('!')).toBe(marked);
    expect(/! .* before transmitted reached 1 %/.test(text)).toBe(marked);
  });
});

describe('figures of the source', () => {
  test('are scaled by photons per decay, activity and live time', () => {
    const text = summary({ totals: [figure('transmitted', 0.1, 0.001)] }, { width: 160 });
    const line = text.split('\n').filter((candidate) => candidate.includes('transmitted'))[1];
    // 0.1 · 0.8854 photons per decay; · 37 000 Bq; · 600 s.
    expect(line.replace(/ +/g, ' ').trim()).toBe(
      'transmitted 0.08854 ± 0.00089 3276 ± 33 1.966e6 ± 0.020e6 1.0 %',
    );
  });

  test('ratios and doses per fluence are not scaled', () => {
    const text = summary({ totals: [figure('buildup', 3, 0.1), figure('air_kerma', 1, 0.01, 'pGy·cm²')] });
    expect(text.match(/buildup/g)).toHaveLength(1);
    expect(text.match(/air_kerma/g)).toHaveLength(1);
  });

  test('an activity without decays counts photons', () => {
    const setup = { ...fixtureSetup, source: { ...bareSource, activityBq: 1000 } };
    const text = summary({ setup, totals: [figure('transmitted', 0.5, 0.001)] });
    expect(text).toContain('per second');
    expect(text).not.toContain('per decay');
    expect(text).toMatch(/transmitted +500\.0 ± 1\.0/);
  });
});

describe('the source is told in words', () => {
  const { emission } = bareSource;
  test.each([
    [{ kind: 'beam', angleDeg: 30, diameterCm: 0 }, 'beam at 30 degrees from the normal'],
    [{ kind: 'beam', angleDeg: 0, diameterCm: 2 }, 'beam at 0 degrees from the normal, 2 cm wide'],
    [{ kind: 'diffuse', law: 'uniform_solid_angle' }, 'diffuse, uniform solid angle'],
    [{ kind: 'point', distanceCm: 25, offsetCm: 3 }, 'point, 25 cm in front, 3 cm off the axis'],
    [{ kind: 'disc', distanceCm: 10, radiusCm: 1 }, 'disc of 1 cm radius, 10 cm in front'],
    [{ kind: 'embedded', layer: 'soil' }, 'spread through layer soil'],
  ] as const)('%o', (shape, words) => {
    const setup = { ...fixtureSetup, source: { ...bareSource, shape } };
    expect(summary({ setup })).toContain(`  source    ${words}\n`);
  });

  test('many lines are told as their range', () => {
    const lines = Array.from({ length: 20 }, (_, i) => ({ energyKeV: 100 + i, perDecay: 0.01 }));
    const setup = {
      ...fixtureSetup,
      source: { ...bareSource, emission: { ...emission, lines, nuclide: 'Eu-152', photonsPerDecay: 0.2 } },
    };
    expect(summary({ setup })).toContain('Eu-152: 20 lines from 100 to 119 keV, 0.2 photons per decay\n');
  });

  test('a continuous spectrum is told as its range', () => {
    const continuum = [
      { energyLowKeV: 10, energyHighKeV: 20, relativePhotons: 1 },
      { energyLowKeV: 20, energyHighKeV: 120, relativePhotons: 1 },
    ];
    const setup = {
      ...fixtureSetup,
      source: { ...bareSource, emission: { ...emission, lines: [], continuum } },
    };
    expect(summary({ setup })).toContain('  emits     spectrum from 10 to 120 keV\n');
  });
});

test('all spectra are drawn when asked, the empty ones named', () => {
  const text = summary({}, { spectra: 'all' });
  expect(text).toContain('Energy deposited, window (keV per keV and photon)');
  expect(text).toContain('Photons through the sides (none)');
  expect(summary({}, { spectra: 'main' })).not.toContain('Energy deposited, window');
});

test('colours add nothing but escape sequences', () => {
  const coloured = summary({}, { colour: true, spectra: 'main' });
  // eslint-disable-next-line no-control-regex -- the sequences are what is looked for
  expect(coloured.replace(/\x1b\[\d+m/g, '')).toBe(summary({}, { spectra: 'main' }));
  expect(coloured).not.toBe(summary({}, { spectra: 'main' }));
});

test('control characters in a result of unknown origin do not reach the terminal', () => {
  const setup = { ...fixtureSetup, title: 'clear\x1b[2J', seed: 'a\nb', source: bareSource };
  const text = summary({ setup, warnings: [{ code: 'x', message: '\x07', count: 2 }] });
  // eslint-disable-next-line no-control-regex -- control characters are what must not be there
  expect(text.match(/[\x00-\x09\x0b-\x1f]/)).toBeNull();
  expect(text).toContain('clear\\u001b[2J');
});
