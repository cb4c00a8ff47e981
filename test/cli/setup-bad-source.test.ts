/** Sources that cannot be. */
import { describe, expect, it } from 'vitest';
import { WALL, source, problemsOf } from './setup-cases.js';

describe('The reader of sources', () => {
  it.each([
    [
      'no kind',
      source('energy: 1 MeV'),
      'source.kind: is missing (line 1, column 9); write one of beam, diffuse, point, disc, embedded',
    ],
    [
      'an unknown kind',
      source('kind: pont, energy: 1 MeV'),
      'source.kind: unknown kind "pont" (line 1, column 16); did you mean point?',
    ],
    [
      'a number as kind',
      source('kind: 3, energy: 1 MeV'),
      'source.kind: must be one of beam, diffuse, point, disc, embedded, got 3 (line 1, column 16)',
    ],
    [
      'a key of another kind',
      source('kind: beam, distance: 1 cm, energy: 1 MeV'),
      'source.distance: belongs to kind point or disc, not to beam (line 1, column 22); keys here: kind, angle, diameter, energy, lines, spectrum, nuclide, minimum_yield, minimum_energy, energies, activity, live_time',
    ],
    [
      'a misspelt key',
      source('kind: beam, enrgy: 1 MeV'),
      'source.enrgy: unknown key (line 1, column 22); did you mean energy?',
    ],
    [
      'no energy of any kind',
      source('kind: beam'),
      'source: needs one of energy, lines, spectrum, nuclide or energies (line 1, column 9)',
    ],
    [
      'two kinds of energy',
      source('kind: beam, energy: 1 MeV, nuclide: Cs-137'),
      'source: takes only one of energy, lines, spectrum, nuclide or energies, but has energy and nuclide (line 1, column 9); keep one of them',
    ],
    [
      'an energy without unit',
      source('kind: beam, energy: 661.7'),
      'source.energy: needs a unit, got 661.7 (line 1, column 30); write one of keV, MeV, eV behind it, as in "661.7 keV"',
    ],
    [
      'an energy in an unknown unit',
      source('kind: beam, energy: 1 Mev'),
      'source.energy: unknown unit "Mev", got 1 Mev (line 1, column 30); did you mean MeV? units here: keV, MeV, eV',
    ],
    [
      'an energy in a unit of length',
      source('kind: beam, energy: 1 cm'),
      'source.energy: unknown unit "cm", got 1 cm (line 1, column 30); units here: keV, MeV, eV',
    ],
    [
      'an energy that is no number',
      source('kind: beam, energy: high'),
      'source.energy: must be a number and a unit, got high (line 1, column 30); write it as in "661.7 keV"; units here: keV, MeV, eV',
    ],
    [
      'an energy below the range',
      source('kind: beam, energy: 999 eV'),
      'source.energy: must be between 1 keV and 20 MeV, got 999 eV (line 1, column 30)',
    ],
    [
      'an energy above the range',
      source('kind: beam, energy: 20.1 MeV'),
      'source.energy: must be between 1 keV and 20 MeV, got 20.1 MeV (line 1, column 30)',
    ],
    [
      'a negative energy',
      source('kind: beam, energy: -1 MeV'),
      'source.energy: must be between 1 keV and 20 MeV, got -1 MeV (line 1, column 30)',
    ],
    [
      'an energy of zero',
      source('kind: beam, energy: 0 keV'),
      'source.energy: must be between 1 keV and 20 MeV, got 0 keV (line 1, column 30)',
    ],
    [
      'an energy that is not a number',
      source('kind: beam, energy: .nan'),
      'source.energy: must be a finite number, got NaN (line 1, column 30)',
    ],
    [
      'an infinite energy',
      source('kind: beam, energy: inf keV'),
      'source.energy: must be a finite number, got inf keV (line 1, column 30)',
    ],
    [
      'an overflowing energy',
      source('kind: beam, energy: 1e999 keV'),
      'source.energy: must be a finite number, got 1e999 keV (line 1, column 30)',
    ],
    [
      'a list as energy',
      source('kind: beam, energy: [1 MeV]'),
      'source.energy: must be a number and a unit, got a list (line 1, column 30); write it as in "661.7 keV"; units here: keV, MeV, eV',
    ],
    [
      'a decimal comma',
      source('kind: beam, energy: "661,7 keV"'),
      'source.energy: must have a decimal point, not a comma, got 661,7 keV (line 1, column 30); write "661.7 keV"',
    ],
    [
      'an angle of 90 degrees',
      source('kind: beam, energy: 1 MeV, angle: 90 deg'),
      'source.angle: must be less than 90 deg, got 90 deg (line 1, column 44)',
    ],
    [
      'an angle without unit',
      source('kind: beam, energy: 1 MeV, angle: 30'),
      'source.angle: needs a unit, got 30 (line 1, column 44); write one of deg, rad behind it, as in "30 deg"',
    ],
    [
      'a negative diameter',
      source('kind: beam, energy: 1 MeV, diameter: -1 mm'),
      'source.diameter: must be at least 0, got -1 mm (line 1, column 47)',
    ],
    [
      'an unknown law',
      source('kind: diffuse, energy: 1 MeV, law: isotrop'),
      'source.law: unknown law "isotrop" (line 1, column 45); did you mean isotropic?',
    ],
    [
      'a point without distance',
      source('kind: point, energy: 1 MeV'),
      'source.distance: is missing (line 1, column 9); add it, as in distance: 25 cm',
    ],
    [
      'a point behind the face',
      source('kind: point, energy: 1 MeV, distance: -1 cm'),
      'source.distance: must be at least 0, got -1 cm (line 1, column 48)',
    ],
    [
      'a point beyond all bounds',
      source('kind: point, energy: 1 MeV, distance: 11000 m'),
      'source.distance: must be at most 1e6 cm, got 11000 m (line 1, column 48)',
    ],
    [
      'a disc without radius',
      source('kind: disc, energy: 1 MeV, distance: 1 cm'),
      'source.radius: is missing (line 1, column 9); add it, as in radius: 2.5 cm',
    ],
    [
      'a disc of no radius',
      source('kind: disc, energy: 1 MeV, distance: 1 cm, radius: 0 cm'),
      'source.radius: must be more than 0, got 0 cm (line 1, column 61)',
    ],
    [
      'a source embedded in an unknown layer',
      source('kind: embedded, energy: 1 MeV, layer: wal'),
      'source.layer: unknown layer "wal" (line 1, column 48); did you mean wall?',
    ],
    [
      'an empty list of lines',
      source('kind: beam, lines: []'),
      'source.lines: needs 1 entry or more, has 0 (line 1, column 29)',
    ],
    [
      'a line without photons',
      source('kind: beam, lines: [{energy: 1 MeV}]'),
      'source.lines[0].per_decay: is missing (line 1, column 30); add it, as in per_decay: 0.9985',
    ],
    [
      'a line of no photons',
      source('kind: beam, lines: [{energy: 1 MeV, per_decay: 0}]'),
      'source.lines[0].per_decay: must be more than 0, got 0 (line 1, column 57)',
    ],
    [
      'a line of negative photons',
      source('kind: beam, lines: [{energy: 1 MeV, per_decay: -5 %}]'),
      'source.lines[0].per_decay: must be more than 0, got -5 % (line 1, column 57)',
    ],
    [
      'photons that are no number',
      source('kind: beam, lines: [{energy: 1 MeV, per_decay: many}]'),
      'source.lines[0].per_decay: must be a number or a percentage, as in 0.5 %, got many (line 1, column 57)',
    ],
    [
      'the same line twice',
      source('kind: beam, lines: [{energy: 1 MeV, per_decay: 1}, {energy: 1000 keV, per_decay: 1}]'),
      'source.lines[1].energy: must differ from source.lines[0], got 1000 keV (line 1, column 70); add up their photons',
    ],
    [
      'an unknown nuclide',
      source('kind: beam, nuclide: Cs-136'),
      'source.nuclide: unknown nuclide "Cs-136" (line 1, column 31); did you mean Cs-137?',
    ],
    [
      'an unknown nuclide far from any',
      source('kind: beam, nuclide: kryptonite'),
      'source.nuclide: unknown nuclide "kryptonite" (line 1, column 31); give its lines with the key lines',
    ],
    [
      'a nuclide without lines left',
      source('kind: beam, nuclide: Cs-137, minimum_energy: 1 MeV'),
      'source.nuclide: minimum_yield and minimum_energy leave no line of Cs-137 (line 1, column 31); lower them',
    ],
    [
      'minimum_yield without a nuclide',
      source('kind: beam, energy: 1 MeV, minimum_yield: 1 %'),
      'source.minimum_yield: applies to a nuclide only (line 1, column 37); remove it',
    ],
    [
      'an efficiency curve backwards',
      source('kind: beam, energies: {from: 3 MeV, to: 30 keV, count: 10}'),
      'source.energies.to: must be above from, 3000 keV, got 30 keV (line 1, column 50)',
    ],
    [
      'an efficiency curve of one point',
      source('kind: beam, energies: {from: 30 keV, to: 3 MeV, count: 1}'),
      'source.energies.count: must be at least 2, got 1 (line 1, column 65)',
    ],
    [
      'an efficiency curve without end',
      source('kind: beam, energies: {from: 30 keV, count: 10}'),
      'source.energies.to: is missing (line 1, column 32); add it, as in to: 3 MeV',
    ],
    [
      'an activity of zero',
      source('kind: beam, energy: 1 MeV, activity: 0 Bq'),
      'source.activity: must be more than 0, got 0 Bq (line 1, column 47)',
    ],
    [
      'an activity in an unknown unit',
      source('kind: beam, energy: 1 MeV, activity: 37 kBecquerel'),
      'source.activity: unknown unit "kBecquerel", got 37 kBecquerel (line 1, column 47); units here: Bq, kBq, MBq, GBq, TBq, Ci, mCi, uCi, nCi',
    ],
    [
      'a live time without activity',
      source('kind: beam, energy: 1 MeV, live_time: 1 h'),
      'source.live_time: needs an activity (line 1, column 48); add activity to the source',
    ],
    [
      'a source below the cutoff',
      `source: {kind: beam, energy: 30 keV}\n${WALL}\nphysics: {cutoff: 50 keV}\n`,
      'source.energy: has photons of 30 keV, below the cutoff of 50 keV (line 1, column 30); lower physics.cutoff',
    ],
    [
      'a nuclide with lines below the cutoff',
      `source: {kind: beam, nuclide: Cs-137}\n${WALL}\nphysics: {cutoff: 50 keV}\n`,
      'source.nuclide: has photons of 31.8174 keV, below the cutoff of 50 keV (line 1, column 31); set minimum_energy: 50 keV or lower physics.cutoff',
    ],
    [
      'a spectrum without a folder',
      source('kind: beam, spectrum: tube.csv'),
      'source.spectrum: file "tube.csv" cannot be read, the setup has no folder (line 1, column 32)',
    ],
  ])('refuses %s', (_, text, problems) => {
    expect(problemsOf(text)).toBe(problems);
  });
});
