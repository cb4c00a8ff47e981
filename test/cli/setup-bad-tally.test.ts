/** Tallies, physics switches and run options that cannot be. */
import { describe, expect, it } from 'vitest';
import { WALL, detector, more, stack, problemsOf } from './setup-cases.js';

describe('The reader of tallies and physics', () => {
  it.each([
    [
      'two kinds of bins',
      more('tally: {energy_bins: {width: 1 keV, count: 10}}'),
      'tally.energy_bins: takes only one of width, count or edges, but has width and count (line 3, column 22); keep one of them',
    ],
    [
      'bins of no kind',
      more('tally: {energy_bins: {}}'),
      'tally.energy_bins: needs one of width, count or edges (line 3, column 22)',
    ],
    [
      'a bin width of zero',
      more('tally: {energy_bins: {width: 0 keV}}'),
      'tally.energy_bins.width: must be more than 0, got 0 keV (line 3, column 30)',
    ],
    [
      'too many bins',
      more('tally: {energy_bins: {width: 1 eV}}'),
      'tally.energy_bins: asks for 4e6 energy bins over all spectra, the limit is 1e6 (line 3, column 22); take wider bins',
    ],
    [
      'too few bins',
      more('tally: {energy_bins: {count: 2}}'),
      'tally.energy_bins.count: must be at least 3, got 2 (line 3, column 30)',
    ],
    [
      'a fraction of a bin',
      more('tally: {energy_bins: {count: 10.5}}'),
      'tally.energy_bins.count: must be a whole number, got 10.5 (line 3, column 30)',
    ],
    [
      'spacing without count',
      more('tally: {energy_bins: {width: 1 keV, spacing: log}}'),
      'tally.energy_bins.spacing: applies to count only (line 3, column 37); remove it',
    ],
    [
      'bins that end below the source',
      more('tally: {energy_bins: {width: 1 keV, to: 1 MeV}}'),
      'tally.energy_bins.to: must be above the highest source energy, 1000 keV, got 1000 keV (line 3, column 41)',
    ],
    [
      'log bins at the cutoff',
      `source: {kind: beam, energy: 50 keV}\n${WALL}\nphysics: {cutoff: 50 keV}\ntally: {energy_bins: {count: 10, spacing: log}}\n`,
      'tally.energy_bins: log bins need room between the cutoff, 50 keV, and the highest source energy (line 4, column 22); take bins of equal width',
    ],
    [
      'edges that do not begin at 0',
      more('tally: {energy_bins: {edges: [10 keV, 2 MeV]}}'),
      'tally.energy_bins.edges[0]: the first edge must be 0 keV, got 10 keV (line 3, column 31); put "0 keV" before it',
    ],
    [
      'edges that descend',
      more('tally: {energy_bins: {edges: [0 keV, 20 keV, 10 keV, 2 MeV]}}'),
      'tally.energy_bins.edges[2]: must be above the edge before, 20 keV, got 10 keV (line 3, column 46)',
    ],
    [
      'edges that end below the source',
      more('tally: {energy_bins: {edges: [0 keV, 1 MeV]}}'),
      'tally.energy_bins.edges[1]: the last edge must be above the highest source energy, 1000 keV, got 1000 keV (line 3, column 38); add an edge',
    ],
    [
      'an unknown dose quantity',
      more('tally: {dose: [air_karma]}'),
      'tally.dose[0]: unknown dose quantity "air_karma" (line 3, column 16); did you mean air_kerma?',
    ],
    [
      'a dose quantity twice',
      more('tally: {dose: [air_kerma, air_kerma]}'),
      'tally.dose[1]: "air_kerma" is given twice, first in tally.dose[0] (line 3, column 27); remove one of them',
    ],
    [
      'dose as text',
      more('tally: {dose: air_kerma}'),
      'tally.dose: must be a list, got air_kerma (line 3, column 15)',
    ],
    [
      'a dose point nowhere',
      more('tally: {dose: [air_kerma], dose_points: [{name: a}]}'),
      'tally.dose_points[0]: needs one of behind or in_front (line 3, column 42)',
    ],
    [
      'a dose point on both sides',
      more('tally: {dose: [air_kerma], dose_points: [{behind: 1 cm, in_front: 1 cm}]}'),
      'tally.dose_points[0]: takes only one of behind or in_front, but has behind and in_front (line 3, column 42); keep one of them',
    ],
    [
      'a dose point in the face',
      more('tally: {dose: [air_kerma], dose_points: [{behind: 0 cm}]}'),
      'tally.dose_points[0].behind: must be more than 0, got 0 cm (line 3, column 51)',
    ],
    [
      'two dose points of the same name',
      more('tally: {dose: [air_kerma], dose_points: [{name: a, behind: 1 cm}, {name: a, behind: 2 cm}]}'),
      'tally.dose_points[1].name: the name "a" is taken by tally.dose_points[0] (line 3, column 74); give each its own name',
    ],
    [
      'dose points without dose',
      more('tally: {dose_points: [{behind: 30 cm}]}'),
      'tally.dose_points: need a dose quantity (line 3, column 9); add dose, as in dose: [ambient_dose]',
    ],
    [
      'a depth profile of an unknown layer',
      more('tally: {depth_profile: {layer: wal}}'),
      'tally.depth_profile.layer: unknown layer "wal" (line 3, column 32); did you mean wall?',
    ],
    [
      'a depth profile without layer',
      more('tally: {depth_profile: {bins: 10}}'),
      'tally.depth_profile.layer: is missing (line 3, column 24); add it, as in layer: wall',
    ],
    [
      'a depth profile of no bins',
      more('tally: {depth_profile: {layer: wall, bins: 0}}'),
      'tally.depth_profile.bins: must be at least 1, got 0 (line 3, column 44)',
    ],
    [
      'a switch that is a word',
      more('physics: {coherent: yes}'),
      'physics.coherent: must be true or false, got yes (line 3, column 21)',
    ],
    [
      'an unknown switch',
      more('physics: {rayleigh: false}'),
      'physics.rayleigh: unknown key (line 3, column 11); keys here: coherent, bound_incoherent, doppler, fluorescence, pair, bremsstrahlung, cutoff',
    ],
    [
      'a misspelt switch',
      more('physics: {florescence: false}'),
      'physics.florescence: unknown key (line 3, column 11); did you mean fluorescence?',
    ],
    [
      'a cutoff below the data',
      more('physics: {cutoff: 0.5 keV}'),
      'physics.cutoff: must be between 1 keV and 1 MeV, got 0.5 keV (line 3, column 19)',
    ],
    [
      'a cutoff beyond sense',
      more('physics: {cutoff: 2 MeV}'),
      'physics.cutoff: must be between 1 keV and 1 MeV, got 2 MeV (line 3, column 19)',
    ],
  ])('refuses %s', (_, text, problems) => {
    expect(problemsOf(text)).toBe(problems);
  });
});

describe('The reader of run options', () => {
  it.each([
    [
      'no histories',
      more('run: {histories: 0}'),
      'run.histories: must be at least 1, got 0 (line 3, column 18)',
    ],
    [
      'a fraction of a history',
      more('run: {histories: 1.5}'),
      'run.histories: must be a whole number, got 1.5 (line 3, column 18)',
    ],
    [
      'histories in words',
      more('run: {histories: a million}'),
      'run.histories: must be a whole number, got a million (line 3, column 18)',
    ],
    [
      'more histories than can be counted',
      more('run: {histories: 1e20}'),
      'run.histories: must be at most 1e13, got 1e20 (line 3, column 18)',
    ],
    [
      'infinite histories',
      more('run: {histories: .inf}'),
      'run.histories: must be a finite number, got Infinity (line 3, column 18)',
    ],
    [
      'an unknown quantity',
      more('run: {until: {quantity: transmited, relative_error: 1 %}}'),
      'run.until.quantity: unknown quantity "transmited" (line 3, column 25); did you mean transmitted?',
    ],
    [
      'until without quantity',
      more('run: {until: {relative_error: 1 %}}'),
      'run.until.quantity: is missing (line 3, column 14); add it, as in quantity: transmitted',
    ],
    [
      'until without error',
      more('run: {until: {quantity: transmitted}}'),
      'run.until.relative_error: is missing (line 3, column 14); add it, as in relative_error: 0.5 %',
    ],
    [
      'a relative error of zero',
      more('run: {until: {quantity: transmitted, relative_error: 0}}'),
      'run.until.relative_error: must be more than 0, got 0 (line 3, column 54)',
    ],
    [
      'a relative error above 1',
      more('run: {until: {quantity: transmitted, relative_error: 150 %}}'),
      'run.until.relative_error: must be less than 1, got 150 % (line 3, column 54)',
    ],
    [
      'a relative error in keV',
      more('run: {until: {quantity: transmitted, relative_error: 1 keV}}'),
      'run.until.relative_error: must be a number or a percentage, as in 0.5 %, got 1 keV (line 3, column 54)',
    ],
    [
      'full energy without detector',
      more('run: {until: {quantity: full_energy, relative_error: 1 %}}'),
      'run.until.quantity: full_energy needs a detector layer (line 3, column 25); add detector: {} to a layer',
    ],
    [
      'full energy of a layer that is no detector',
      `${stack('name: can, material: aluminium, thickness: 1 mm', 'name: crystal, material: NaI, thickness: 1 cm, detector: {}')}run: {until: {quantity: full_energy, layer: can, relative_error: 1 %}}\n`,
      'run.until.layer: can is no detector (line 5, column 45); detectors here: crystal',
    ],
    [
      'coincidence of one detector',
      `${detector('{}')}tally: {coincidence: true}\n`,
      'tally.coincidence: needs two detectors or more, there is one (line 4, column 22); add detector: {} to another layer',
    ],
    [
      'coincidence without detectors',
      more('tally: {coincidence: true}'),
      'tally.coincidence: needs two detectors or more, there is none (line 3, column 22); add detector: {} to another layer',
    ],
    [
      'until a coincidence that is not scored',
      `${detector('{}')}run: {until: {quantity: coincidence, relative_error: 1 %}}\n`,
      'run.until.quantity: coincidence needs detectors in coincidence (line 4, column 25); add coincidence: true to the tally',
    ],
    [
      'side escape without sides',
      more('run: {until: {quantity: side_escape, relative_error: 1 %}}'),
      'run.until.quantity: side_escape needs layers with an edge (line 3, column 25); add extent, or give a layer a radius',
    ],
    [
      'a dose that is not scored',
      more('tally: {dose: [air_kerma]}\nrun: {until: {quantity: ambient_dose, relative_error: 1 %}}'),
      'run.until.quantity: ambient_dose needs a dose tally (line 4, column 25); add it to the tally, as in dose: [ambient_dose]',
    ],
    [
      'buildup without dose',
      more('run: {until: {quantity: buildup, relative_error: 1 %}}'),
      'run.until.quantity: buildup needs a dose tally (line 3, column 25); add one, as in dose: [ambient_dose]',
    ],
    [
      'a layer for a figure of the whole stack',
      more('run: {until: {quantity: transmitted, layer: wall, relative_error: 1 %}}'),
      'run.until.layer: transmitted belongs to the whole stack (line 3, column 38); remove layer',
    ],
    [
      'an unknown layer',
      more('run: {until: {quantity: deposited_energy, layer: wal, relative_error: 1 %}}'),
      'run.until.layer: unknown layer "wal" (line 3, column 50); did you mean wall?',
    ],
    [
      'an unknown dose point',
      more(
        'tally: {dose: [air_kerma], dose_points: [{name: seat, behind: 1 m}]}\nrun: {until: {quantity: air_kerma, layer: set, relative_error: 1 %}}',
      ),
      'run.until.layer: unknown dose point "set" (line 4, column 43); did you mean seat?',
    ],
    [
      'a dose point where there are none',
      more(
        'tally: {dose: [air_kerma]}\nrun: {until: {quantity: air_kerma, layer: seat, relative_error: 1 %}}',
      ),
      'run.until.layer: unknown dose point "seat" (line 4, column 43); remove layer, or add dose_points to the tally',
    ],
    [
      'a time limit without unit',
      more('run: {time_limit: 600}'),
      'run.time_limit: needs a unit, got 600 (line 3, column 19); write one of s, ms, min, h, d behind it, as in "10 min"',
    ],
    [
      'a time limit of zero',
      more('run: {time_limit: 0 s}'),
      'run.time_limit: must be more than 0, got 0 s (line 3, column 19)',
    ],
    [
      'a time limit in an unknown unit',
      more('run: {time_limit: 10 minutes}'),
      'run.time_limit: unknown unit "minutes", got 10 minutes (line 3, column 19); units here: s, ms, min, h, d',
    ],
    [
      'an unknown transport',
      more('run: {transport: fast}'),
      'run.transport: unknown transport "fast" (line 3, column 18); known here: auto, analog, deep',
    ],
    [
      'deep transport with a detector',
      `${detector('{}')}run: {transport: deep}\n`,
      'run.transport: deep transport gives no pulse heights, but wall is a detector (line 4, column 18); remove detector, or take transport: analog, or leave transport out',
    ],
    [
      'deep transport until a pulse height',
      more('run: {transport: deep, until: {quantity: interacting, relative_error: 1 %}}'),
      'run.transport: deep transport cannot give interacting (line 3, column 18); take transport: analog, or leave transport out',
    ],
  ])('refuses %s', (_, text, problems) => {
    expect(problemsOf(text)).toBe(problems);
  });
});
