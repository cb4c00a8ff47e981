/** Materials, layers, detectors and extents that cannot be. */
import { describe, expect, it } from 'vitest';
import { BEAM, WALL, detector, layer, material, more, stack, problemsOf } from './setup-cases.js';

describe('The reader of stacks', () => {
  it.each([
    ['an empty stack', `${BEAM}\nstack: []\n`, 'stack: needs 1 entry or more, has 0 (line 2, column 8)'],
    [
      '65 layers',
      `${BEAM}\nstack:\n${'  - {material: lead, thickness: 1 mm}\n'.repeat(65)}`,
      'stack: takes at most 64 entries, has 65 (line 3, column 3)',
    ],
    [
      'a text as layer',
      `${BEAM}\nstack:\n  - lead\n`,
      'stack[0]: must be a mapping with keys such as name, material, thickness, got lead (line 3, column 5)',
    ],
    [
      'a layer without content',
      `${BEAM}\nstack:\n  -\n`,
      'stack[0]: must be a mapping with keys such as name, material, thickness, got nothing (line 3, column 4)',
    ],
    [
      'an unknown key',
      layer('material: lead, thickness: 1 cm, thicknes: 2 cm'),
      'stack[0].thicknes: unknown key (line 3, column 51); did you mean thickness?',
    ],
    [
      'a layer without material',
      layer('thickness: 1 cm'),
      'stack[0].material: is missing (line 3, column 5); add it, as in material: NaI',
    ],
    [
      'a layer without thickness',
      layer('material: lead'),
      'stack[0].thickness: is missing (line 3, column 5); add it, as in thickness: 7.62 cm',
    ],
    [
      'an unknown material',
      layer('material: leed, thickness: 1 cm'),
      'stack[0].material: unknown material "leed" (line 3, column 28); did you mean lead?',
    ],
    [
      'an unknown material far from any',
      layer('material: unobtainium, thickness: 1 cm'),
      'stack[0].material: unknown material "unobtainium" (line 3, column 28); define it under materials, by formula or mass fractions',
    ],
    [
      'an unknown material near an own one',
      `materials: {my alloy: {formula: Fe, density: 7 g/cm3}}\n${layer('material: my aloy, thickness: 1 cm')}`,
      'stack[0].material: unknown material "my aloy" (line 4, column 28); did you mean my alloy?',
    ],
    [
      'a formula without density',
      layer('material: Fe2O4, thickness: 1 cm'),
      'stack[0].material: the formula "Fe2O4" needs a density (line 3, column 28); add density to the layer, or define the material under materials',
    ],
    [
      'a formula with an unknown element',
      layer('material: FeXx2, thickness: 1 cm, density: 5 g/cm3'),
      'stack[0].material: must be the symbol of an element from H to Fm (upper and lower case as usual), got Xx (line 3, column 28); did you mean Xe?',
    ],
    [
      'a thickness without unit',
      layer('material: lead, thickness: 7.62'),
      'stack[0].thickness: needs a unit, got 7.62 (line 3, column 45); write one of mm, cm, m, um, nm, in, g/cm2, mg/cm2, kg/m2 behind it, as in "7.62 cm"',
    ],
    [
      'a thickness in an unknown unit',
      layer('material: lead, thickness: 1 ft'),
      'stack[0].thickness: unknown unit "ft", got 1 ft (line 3, column 45); units here: mm, cm, m, um, nm, in, g/cm2, mg/cm2, kg/m2',
    ],
    [
      'a thickness in a near unit',
      layer('material: lead, thickness: 1 CM'),
      'stack[0].thickness: unknown unit "CM", got 1 CM (line 3, column 45); did you mean cm? units here: mm, cm, m, um, nm, in, g/cm2, mg/cm2, kg/m2',
    ],
    [
      'a negative thickness',
      layer('material: lead, thickness: -1 cm'),
      'stack[0].thickness: must be more than 0, got -1 cm (line 3, column 45)',
    ],
    [
      'a thickness of zero',
      layer('material: lead, thickness: 0 mm'),
      'stack[0].thickness: must be more than 0, got 0 mm (line 3, column 45)',
    ],
    [
      'a thickness that is not a number',
      layer('material: lead, thickness: nan cm'),
      'stack[0].thickness: must be a finite number, got nan cm (line 3, column 45)',
    ],
    [
      'an infinite thickness',
      layer('material: lead, thickness: .inf'),
      'stack[0].thickness: must be a finite number, got Infinity (line 3, column 45)',
    ],
    [
      'a thickness beyond all bounds',
      layer('material: lead, thickness: 1e9 cm'),
      'stack[0].thickness: must be at most 1e6 cm, got 1e9 cm (line 3, column 45)',
    ],
    [
      'a thickness below all bounds',
      layer('material: lead, thickness: 1e-6 nm'),
      'stack[0].thickness: must be at least 1e-9 cm, got 1e-6 nm (line 3, column 45)',
    ],
    [
      'a mass per area beyond all bounds',
      layer('material: dry air, thickness: 1e5 g/cm2'),
      'stack[0].thickness: must be at most 1e6 cm, got 8.3e7 cm by its mass per area (line 3, column 48)',
    ],
    [
      'a mass per area of vacuum',
      layer('material: vacuum, thickness: 1 g/cm2'),
      'stack[0].thickness: a vacuum has no mass per area (line 3, column 47); give the thickness as a length',
    ],
    [
      'a negative density',
      layer('material: lead, thickness: 1 cm, density: -1 g/cm3'),
      'stack[0].density: must be at least 0, got -1 g/cm3 (line 3, column 60)',
    ],
    [
      'a radius without unit',
      layer('material: lead, thickness: 1 cm, radius: 1'),
      'stack[0].radius: needs a unit, got 1 (line 3, column 59); write one of mm, cm, m, um, nm, in behind it, as in "7.62 cm"',
    ],
    [
      'a density no matter has',
      layer('material: lead, thickness: 1 cm, density: 11340 g/cm3'),
      'stack[0].density: must be at most 30 g/cm3, got 11340 g/cm3 (line 3, column 60)',
    ],
    [
      'a density of vacuum',
      layer('material: vacuum, thickness: 1 cm, density: 1 g/cm3'),
      'stack[0].density: a vacuum has no density (line 3, column 62); name a material',
    ],
    [
      'a radius of zero',
      layer('material: lead, thickness: 1 cm, radius: 0 cm'),
      'stack[0].radius: must be more than 0, got 0 cm (line 3, column 59)',
    ],
    [
      'two layers of the same name',
      stack('name: wall, material: lead, thickness: 1 cm', 'name: wall, material: iron, thickness: 1 cm'),
      'stack[1].name: the name "wall" is taken by stack[0] (line 4, column 12); give each its own name',
    ],
    [
      'a name equal to a default name',
      stack('material: lead, thickness: 1 cm', 'name: lead-1, material: iron, thickness: 1 cm'),
      'stack[1].name: the name "lead-1" is taken by stack[0] (line 4, column 12); give each its own name',
    ],
    [
      'a name with a line break',
      layer('material: "le\\nad", thickness: 1 cm'),
      'stack[0].material: must not hold line breaks or control characters, got le\\u000aad (line 3, column 28)',
    ],
    [
      'an own material without composition',
      material('density: 1 g/cm3'),
      'materials.X: needs one of formula or mass_fractions (line 1, column 16)',
    ],
    [
      'an own material with two compositions',
      material('formula: Fe, mass_fractions: {Fe: 1}, density: 1 g/cm3'),
      'materials.X: takes only one of formula or mass_fractions, but has formula and mass_fractions (line 1, column 16); keep one of them',
    ],
    [
      'an own material without density',
      material('formula: Fe'),
      'materials.X.density: is missing (line 1, column 16); add it, as in density: 5.78 g/cm3',
    ],
    [
      'an own material of no density',
      material('formula: Fe, density: 0 g/cm3'),
      'materials.X.density: must be more than 0, got 0 g/cm3 (line 1, column 39)',
    ],
    [
      'a formula that cannot be read',
      material('formula: Fe2(O3, density: 5 g/cm3'),
      'materials.X.formula: must close each group: a ")" is missing, got "Fe2(O3" (line 1, column 26)',
    ],
    [
      'a formula of an unknown element',
      material('formula: Ff, density: 5 g/cm3'),
      'materials.X.formula: must be the symbol of an element from H to Fm (upper and lower case as usual), got Ff (line 1, column 26); did you mean F?',
    ],
    [
      'mass fractions that do not add up',
      material('mass_fractions: {Fe: 0.5, Cr: 0.2}, density: 5 g/cm3'),
      'materials.X.mass_fractions: must be mass fractions that add up to 1 (within 0.001), got a sum of 0.7 (line 1, column 33)',
    ],
    [
      'a negative mass fraction',
      material('mass_fractions: {Fe: 1.2, Cr: -0.2}, density: 5 g/cm3'),
      [
        'materials.X.mass_fractions.Fe: must be at most 1, got 1.2 (line 1, column 38)',
        'materials.X.mass_fractions.Cr: must be at least 0, got -0.2 (line 1, column 47)',
      ].join('\n'),
    ],
    [
      'an unknown part of a mixture',
      material('mass_fractions: {Fe: 0.5, watr: 0.5}, density: 5 g/cm3'),
      'materials.X.mass_fractions: must be the name of a material, the symbol of an element or a chemical formula, got "watr" (line 1, column 33); did you mean water?',
    ],
    [
      'no mass fractions',
      material('mass_fractions: {}, density: 5 g/cm3'),
      'materials.X.mass_fractions: must be mass fractions that add up to 1 (within 0.001), got a sum of 0 (line 1, column 33)',
    ],
    [
      'an own vacuum',
      `materials: {Vacuum: {formula: H, density: 1 g/cm3}}\n${BEAM}\n${WALL}`,
      'materials.Vacuum: "Vacuum" cannot be used as a name (line 1, column 13); choose another one',
    ],
    [
      'a detector of vacuum',
      layer('material: vacuum, thickness: 1 cm, detector: {}'),
      'stack[0].detector: a vacuum cannot be a detector (line 3, column 63); give it a material',
    ],
    [
      'true instead of a detector',
      detector('true'),
      'stack[0].detector: must be a mapping with keys such as fwhm, threshold, windows, got true (line 3, column 60)',
    ],
    [
      'a detector without content',
      detector(''),
      'stack[0].detector: must be a mapping with keys such as fwhm, threshold, windows, got nothing (line 3, column 60)',
    ],
    [
      'a width without energy',
      detector('{fwhm: 7 %}'),
      'stack[0].detector.fwhm: must be a width at an energy, the coefficients a, b and c, or a list of widths, got 7 % (line 3, column 67); write it as in "7 % at 661.7 keV"',
    ],
    [
      'a width as number',
      detector('{fwhm: 7}'),
      'stack[0].detector.fwhm: must be a width at an energy, the coefficients a, b and c, or a list of widths, got 7 (line 3, column 67); write it as in "7 % at 661.7 keV"',
    ],
    [
      'a width in an unknown unit',
      detector('{fwhm: 7 mm at 661.7 keV}'),
      'stack[0].detector.fwhm: unknown unit "mm", got 7 mm at 661.7 keV (line 3, column 67); units here: keV, MeV, eV, %',
    ],
    [
      'a width at no energy',
      detector('{fwhm: 7 % at 661.7}'),
      'stack[0].detector.fwhm: needs a unit, got 7 % at 661.7 (line 3, column 67); write one of keV, MeV, eV behind it, as in "661.7 keV"',
    ],
    [
      'a width of zero',
      detector('{fwhm: 0 % at 661.7 keV}'),
      'stack[0].detector.fwhm: must be more than 0, got 0 % at 661.7 keV (line 3, column 67)',
    ],
    [
      'a width at an energy out of range',
      detector('{fwhm: 7 % at 661.7 eV}'),
      'stack[0].detector.fwhm: must be between 1 keV and 20 MeV, got 7 % at 661.7 eV (line 3, column 67)',
    ],
    [
      'a width formula without c',
      detector('{fwhm: {a: 1 keV, b: 1}}'),
      'stack[0].detector.fwhm.c: is missing (line 3, column 67); add it, as in c: 0.2 1/MeV',
    ],
    [
      'a width formula with text',
      detector('{fwhm: {a: wide, b: 1, c: 0}}'),
      'stack[0].detector.fwhm.a: must be a number and a unit, got wide (line 3, column 71); write it as in "661.7 keV"; units here: keV, MeV, eV',
    ],
    [
      'a width formula that gives none',
      detector('{fwhm: {a: -1, b: 0, c: 0}}'),
      'stack[0].detector.fwhm: gives no width above 0 at any energy (line 3, column 67); a or b must be more than 0',
    ],
    [
      'a width formula in MeV without unit',
      detector('{fwhm: {a: -30 keV, b: 0.05, c: 0}}'),
      'stack[0].detector.fwhm: gives a width of -28.42 keV at the highest source energy, 1000 keV (line 3, column 67); a, b and c are in units of keV',
    ],
    [
      'a width table that descends',
      detector('{fwhm: [{energy: 662 keV, fwhm: 7 %}, {energy: 100 keV, fwhm: 10 %}]}'),
      'stack[0].detector.fwhm[1].energy: must be above the one before, 662 keV, got 100 keV (line 3, column 107)',
    ],
    [
      'a width table of one row',
      detector('{fwhm: [{energy: 662 keV, fwhm: 7 %}]}'),
      'stack[0].detector.fwhm: needs 2 entries or more, has 1 (line 3, column 67)',
    ],
    [
      'a negative threshold',
      detector('{threshold: -1 keV}'),
      'stack[0].detector.threshold: must be at least 0, got -1 keV (line 3, column 72)',
    ],
    [
      'a window backwards',
      detector('{windows: [{name: peak, from: 700 keV, to: 600 keV}]}'),
      'stack[0].detector.windows[0].to: must be above from, 700 keV, got 600 keV (line 3, column 103)',
    ],
    [
      'two windows of the same name',
      detector('{windows: [{name: a, from: 1 keV, to: 2 keV}, {name: a, from: 3 keV, to: 4 keV}]}'),
      'stack[0].detector.windows[1].name: the name "a" is taken by stack[0].detector.windows[0] (line 3, column 113); give each its own name',
    ],
    [
      'an extent without size',
      more('extent: {}'),
      'extent: has no size (line 3, column 9); give a radius, or a width and a height',
    ],
    [
      'an extent with radius and width',
      more('extent: {radius: 1 cm, width: 1 cm}'),
      'extent: has both a radius and sides (line 3, column 9); give a radius, or a width and a height',
    ],
    [
      'an extent with width alone',
      more('extent: {width: 1 cm}'),
      'extent: cannot be made of width alone (line 3, column 9); give a radius, or a width and a height',
    ],
    [
      'an extent of no radius',
      more('extent: {radius: 0 cm}'),
      'extent.radius: must be more than 0, got 0 cm (line 3, column 18)',
    ],
  ])('refuses %s', (_, text, problems) => {
    expect(problemsOf(text)).toBe(problems);
  });
});
