/** What setups that are right come to. */
import { readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { parse } from 'yaml';
import { EXIT_CODES, SetupError } from '../../cli/errors.js';
import { checkSetup, parseSetup, readSetup, readSetupFile } from '../../cli/setup-reader.js';
import type { Setup } from '../../engine/setup.js';
import { BEAM, detector, layer, more, problemsOf, source, stack, WALL } from './setup-cases.js';

const EXAMPLES = 'cli/examples';
const setupOf = (text: string): Setup => parseSetup(text).setup;
const thicknessOf = (text: string): number => setupOf(text).stack[0].thicknessCm;

describe('Examples', () => {
  const files = readdirSync(EXAMPLES).filter((name) => name.endsWith('.yaml'));

  it('are there', () => {
    expect(files).toEqual(expect.arrayContaining(['window.yaml', 'reference.yaml', 'lead-wall.yaml']));
  });

  it.each(files)('%s is read without a warning', (name) => {
    const { setup, warnings } = readSetupFile(join(EXAMPLES, name));
    expect(warnings).toEqual([]);
    expect(setup.stack.length).toBeGreaterThan(0);
    const { lines, continuum } = setup.source.emission;
    const highest = lines.at(-1)?.energyKeV ?? continuum[continuum.length - 1].energyHighKeV;
    expect(setup.tally.energyEdgesKeV[0]).toBe(0);
    expect(setup.tally.energyEdgesKeV.at(-1)).toBeGreaterThan(highest);
  });

  it('give the numbers that stand in the file, in cm, keV, Bq and seconds', () => {
    const setup = readSetup(join(EXAMPLES, 'check-source.yaml'));
    expect(setup).toMatchObject({
      title: 'Crystal behind an aluminium window',
      seed: 'window-1',
      source: {
        shape: { kind: 'point', distanceCm: 25, offsetCm: 0 },
        emission: { continuum: [], nuclide: 'Cs-137' },
        activityBq: 37_000,
        liveTimeS: null,
      },
      extent: { kind: 'radius', radiusCm: 3.81 },
      tally: { dose: ['air_kerma', 'ambient_dose'], dosePoints: [], depthProfile: null },
      run: {
        histories: 1e6,
        until: { quantity: 'full_energy', layer: null, relativeError: 0.005 },
        timeLimitS: 600,
        transport: 'auto',
      },
      energyGridKeV: null,
    });
    expect(setup.stack.map(({ name, thicknessCm }) => [name, thicknessCm])).toEqual([
      ['window', 0.05],
      ['crystal', 7.62],
    ]);
    expect(setup.stack[1].detector).toEqual({
      resolution: { kind: 'at_energy', fwhmKeV: 46.319, atKeV: 661.7 },
      thresholdKeV: null,
      windows: [],
    });
  });
});

describe('A setup of source and stack alone', () => {
  const setup = setupOf(`${BEAM}\n${WALL}\n`);

  it('has the defaults of the documentation', () => {
    expect(setup).toMatchObject({
      title: 'Untitled',
      seed: 'thickset',
      source: { shape: { kind: 'beam', angleDeg: 0, diameterCm: 0 }, activityBq: null, liveTimeS: null },
      extent: null,
      physics: {
        coherent: true,
        boundIncoherent: true,
        doppler: true,
        fluorescence: true,
        pair: true,
        bremsstrahlung: true,
        cutoffKeV: 1,
      },
      run: { histories: 1_000_000, until: null, timeLimitS: null, transport: 'auto' },
    });
    expect(setup.stack[0]).toMatchObject({ radiusCm: null, detector: null });
  });

  it('takes its title from the name of the file', () => {
    const { setup: named } = parseSetup(`${BEAM}\n${WALL}\n`, { fileName: 'walls/lead-wall.yaml' });
    expect(named.title).toBe('lead-wall');
  });
});

describe('Sources', () => {
  it('of one energy emit one photon where no decay is meant', () => {
    expect(setupOf(source('kind: beam, energy: 1 MeV')).source.emission).toEqual({
      lines: [{ energyKeV: 1000, perDecay: 1 }],
      continuum: [],
      photonsPerDecay: null,
      nuclide: null,
    });
  });

  it('of lines are sorted and add up their photons', () => {
    const text = source(
      'kind: beam, lines: [{energy: 1332.5 keV, per_decay: 99.98 %}, {energy: 1.1732 MeV, per_decay: 0.9985}]',
    );
    const { lines, photonsPerDecay } = setupOf(text).source.emission;
    expect(lines).toEqual([
      { energyKeV: 1173.2, perDecay: 0.9985 },
      { energyKeV: 1332.5, perDecay: 0.9998 },
    ]);
    expect(photonsPerDecay).toBeCloseTo(1.9983, 12);
  });

  it('of a nuclide leave out lines below minimum_yield and minimum_energy', () => {
    const all = setupOf(source('kind: beam, nuclide: Co-57')).source.emission;
    const strong = setupOf(source('kind: beam, nuclide: Co-57, minimum_yield: 20 %')).source.emission;
    const hard = setupOf(source('kind: beam, nuclide: co57, minimum_energy: 130 keV')).source.emission;
    expect(strong.lines).toEqual(all.lines.filter(({ perDecay }) => perDecay >= 0.2));
    expect(hard.lines).toEqual(all.lines.filter(({ energyKeV }) => energyKeV >= 130));
    expect(strong.lines.length).toBeGreaterThan(0);
    expect(hard.lines.length).toBeGreaterThan(0);
    expect(all.lines.length).toBeGreaterThan(strong.lines.length);
    expect(hard.nuclide).toBe('Co-57');
  });

  it('of a chain hold every energy once, with the photons of all members', () => {
    const { lines, photonsPerDecay } = setupOf(source('kind: beam, nuclide: Th-232+')).source.emission;
    expect(new Set(lines.map(({ energyKeV }) => energyKeV)).size).toBe(lines.length);
    expect(photonsPerDecay).toBeCloseTo(
      lines.reduce((sum, { perDecay }) => sum + perDecay, 0),
      12,
    );
  });

  it('of an efficiency curve give a grid with exact ends and stand for its highest energy', () => {
    const setup = setupOf(source('kind: beam, energies: {from: 30 keV, to: 3 MeV, count: 3}'));
    expect(setup.energyGridKeV).toHaveLength(3);
    expect(setup.energyGridKeV?.[0]).toBe(30);
    expect(setup.energyGridKeV?.[1]).toBeCloseTo(300, 9);
    expect(setup.energyGridKeV?.[2]).toBe(3000);
    expect(setup.source.emission.lines).toEqual([{ energyKeV: 3000, perDecay: 1 }]);
    const linear = setupOf(
      source('kind: beam, energies: {from: 1 keV, to: 3 keV, count: 3, spacing: linear}'),
    );
    expect(linear.energyGridKeV).toEqual([1, 2, 3]);
  });

  it.each([
    ['kind: beam, angle: 30 deg, diameter: 5 mm', { kind: 'beam', angleDeg: 30, diameterCm: 0.5 }],
    ['kind: diffuse', { kind: 'diffuse', law: 'isotropic' }],
    ['kind: diffuse, law: uniform_solid_angle', { kind: 'diffuse', law: 'uniform_solid_angle' }],
    ['kind: point, distance: 0 cm, offset: 1 in', { kind: 'point', distanceCm: 0, offsetCm: 2.54 }],
    ['kind: disc, distance: 1 m, radius: 25 mm', { kind: 'disc', distanceCm: 100, radiusCm: 2.5 }],
    ['kind: embedded, layer: wall', { kind: 'embedded', layer: 'wall' }],
  ])('of "%s" have their shape', (keys, shape) => {
    expect(setupOf(source(`${keys}, energy: 1 MeV`)).source.shape).toEqual(shape);
  });

  it('take activity and live time together', () => {
    const setup = setupOf(source('kind: beam, energy: 1 MeV, activity: 2 mCi, live_time: 1 h'));
    expect(setup.source).toMatchObject({ activityBq: 7.4e7, liveTimeS: 3600 });
  });
});

describe('Layers', () => {
  it('without a name are called by material and position', () => {
    const names = setupOf(
      stack('material: lead, thickness: 1 cm', 'material: vacuum, thickness: 1 cm'),
    ).stack;
    expect(names.map(({ name }) => name)).toEqual(['lead-1', 'vacuum-2']);
  });

  it('of vacuum and of density 0 have no material', () => {
    const layers = stack(
      'material: Vacuum, thickness: 1 cm',
      'material: dry air, thickness: 1 cm, density: 0 g/cm3',
    );
    expect(setupOf(layers).stack.map(({ material }) => material)).toEqual([null, null]);
  });

  it('with a density of their own keep the composition', () => {
    const [plain, light] = setupOf(
      stack('material: lead, thickness: 1 cm', 'material: lead, thickness: 1 cm, density: 9000 kg/m3'),
    ).stack;
    expect(light.material).toEqual({ ...plain.material, densityGPerCm3: 9 });
  });

  it('may be of a formula with its density', () => {
    const { material } = setupOf(layer('material: Fe2O4, thickness: 1 cm, density: 5 g/cm3')).stack[0];
    expect(material?.densityGPerCm3).toBe(5);
    expect(material?.constituents.map(({ z }) => z)).toEqual([8, 26]);
  });

  it('of one material share one object', () => {
    const [a, b] = setupOf(stack('material: lead, thickness: 1 cm', 'material: lead, thickness: 2 cm')).stack;
    expect(a.material).toBe(b.material);
  });

  it('take own materials before known ones', () => {
    const own = `materials: {lead: {mass_fractions: {Pb: 50 %, water: 0.5}, density: 2 g/cm3}}\n`;
    const { material } = setupOf(`${own}${layer('material: lead, thickness: 1 cm')}`).stack[0];
    expect(material?.constituents.map(({ z }) => z)).toEqual([1, 8, 82]);
    expect(material?.densityGPerCm3).toBe(2);
  });

  it('measured in mass per area are as thick as their density makes them', () => {
    expect(thicknessOf(layer('material: iron, thickness: 10 g/cm2, density: 5 g/cm3'))).toBe(2);
    expect(thicknessOf(layer('material: iron, thickness: 100 kg/m2, density: 5 g/cm3'))).toBe(2);
    expect(thicknessOf(layer('material: iron, thickness: 500 mg/cm2, density: 5 g/cm3'))).toBe(0.1);
  });

  it('may be 64 and no more', () => {
    const rows = Array.from({ length: 64 }, () => 'material: lead, thickness: 1 mm');
    expect(setupOf(stack(...rows)).stack).toHaveLength(64);
    expect(problemsOf(stack(...rows, 'material: lead, thickness: 1 mm'))).toContain(
      'takes at most 64 entries',
    );
  });
});

describe('Detectors', () => {
  const detectorOf = (keys: string) => setupOf(detector(keys)).stack[0].detector;

  it.each([
    ['{}', null],
    ['{fwhm: 1.8 keV at 1332.5 keV}', { kind: 'at_energy', fwhmKeV: 1.8, atKeV: 1332.5 }],
    ['{fwhm: {a: -2 keV, b: 1.5, c: 0.2 1/MeV}}', { kind: 'formula', a: -2, b: 1.5, c: 0.0002 }],
    [
      '{fwhm: [{energy: 100 keV, fwhm: 12 %}, {energy: 662 keV, fwhm: 46 keV}]}',
      { kind: 'table', energyKeV: [100, 662], fwhmKeV: [12, 46] },
    ],
  ])('with %s have their resolution', (keys, resolution) => {
    expect(detectorOf(keys)).toEqual({ resolution, thresholdKeV: null, windows: [] });
  });

  it('have a threshold and windows', () => {
    expect(detectorOf('{threshold: 10 keV, windows: [{name: peak, from: 600 keV, to: 0.7 MeV}]}')).toEqual({
      resolution: null,
      thresholdKeV: 10,
      windows: [{ name: 'peak', energyLowKeV: 600, energyHighKeV: 700 }],
    });
  });
});

describe('Energy bins', () => {
  const edgesOf = (bins: string, energy = '1 MeV') =>
    setupOf(`source: {kind: beam, energy: ${energy}}\n${WALL}\ntally: {energy_bins: {${bins}}}\n`).tally
      .energyEdgesKeV;

  it('of a width reach the first multiple above the highest energy', () => {
    expect([...edgesOf('width: 300 keV')]).toEqual([0, 300, 600, 900, 1200]);
    expect([...edgesOf('width: 500 keV')]).toEqual([0, 500, 1000, 1500]);
    expect(edgesOf('width: 0.1 keV', '59.5 keV')).toHaveLength(597);
    expect(edgesOf('width: 0.1 keV', '59.5 keV')[3]).toBe(0.3);
  });

  it('with an upper end reach it', () => {
    expect([...edgesOf('width: 600 keV, to: 3 MeV')]).toEqual([0, 600, 1200, 1800, 2400, 3000]);
    expect([...edgesOf('count: 4, to: 2 MeV')]).toEqual([0, 500, 1000, 1500, 2000]);
  });

  it('of a count have the highest energy in the middle of the last bin', () => {
    const edges = edgesOf('count: 10');
    expect(edges).toHaveLength(11);
    expect((edges[9] + edges[10]) / 2).toBeCloseTo(1000, 9);
  });

  it('of equal ratios begin at the cutoff after one bin down to 0', () => {
    const edges = edgesOf('count: 20, spacing: log');
    expect([...edges.slice(0, 2)]).toEqual([0, 1]);
    expect(edges).toHaveLength(21);
    expect(Math.sqrt(edges[19] * edges[20])).toBeCloseTo(1000, 8);
    expect(edges[3] / edges[2]).toBeCloseTo(edges[20] / edges[19], 12);
    expect(edgesOf('count: 4, spacing: log, to: 8 MeV')[4]).toBe(8000);
  });

  it('may be given by their edges', () => {
    expect([...edgesOf('edges: [0 keV, 10 keV, 2 MeV]')]).toEqual([0, 10, 2000]);
  });

  it.each([
    ['99.9 keV', 0.1],
    ['100 keV', 1],
    ['5 MeV', 1],
    ['5.01 MeV', 10],
  ])('are for %s by default %s keV wide', (energy, width) => {
    const { energyEdgesKeV } = setupOf(source(`kind: beam, energy: ${energy}`)).tally;
    expect(energyEdgesKeV[1]).toBe(width);
  });
});

describe('Tallies and runs', () => {
  it('count dose points from the front face', () => {
    const setup = setupOf(
      more(
        'tally: {dose: [air_kerma], dose_points: [{behind: 30 cm}, {name: seat, in_front: 1 m, offset: 5 mm}]}',
      ),
    );
    expect(setup.tally.dosePoints).toEqual([
      { name: 'point-1', zCm: 31, offsetCm: 0 },
      { name: 'seat', zCm: -100, offsetCm: 0.5 },
    ]);
  });

  it('have 100 slices in a depth profile by default', () => {
    expect(setupOf(more('tally: {depth_profile: {layer: wall}}')).tally.depthProfile).toEqual({
      layer: 'wall',
      bins: 100,
    });
  });

  it.each(['1e6', '"1e6"', '1000000', '1.0e+6'])('take %s as a million histories', (histories) => {
    expect(setupOf(more(`run: {histories: ${histories}}`)).run.histories).toBe(1_000_000);
  });

  it.each(['transmitted', 'deposited_energy, layer: wall', 'interacting', 'incident', 'uncollided'])(
    'may stop by %s',
    (quantity) => {
      expect(problemsOf(more(`run: {until: {quantity: ${quantity}, relative_error: 1 %}}`))).toBe('');
    },
  );

  it('may stop by a dose at a point', () => {
    const text = more(
      'tally: {dose: [air_kerma], dose_points: [{name: seat, behind: 1 m}]}\nrun: {until: {quantity: air_kerma, layer: seat, relative_error: 0.01}}',
    );
    expect(setupOf(text).run.until).toEqual({ quantity: 'air_kerma', layer: 'seat', relativeError: 0.01 });
  });

  it('may stop by side escape where one layer has an edge', () => {
    const text = `${layer('material: lead, thickness: 1 cm, radius: 1 cm')}run: {until: {quantity: side_escape, relative_error: 1 %}}\n`;
    expect(problemsOf(text)).toBe('');
  });

  it('take numbers as seeds by their digits', () => {
    expect(setupOf(more('seed: 42')).seed).toBe('42');
  });

  it('warn of Doppler broadening without binding, and leave it out', () => {
    const { setup, warnings } = parseSetup(more('physics: {doppler: true, bound_incoherent: false}'));
    expect(setup.physics.doppler).toBe(false);
    expect(warnings).toEqual([
      {
        code: 'doppler_without_binding',
        message: 'physics.doppler has no effect with bound_incoherent: false',
        count: 1,
      },
    ]);
  });
});

describe('Problems', () => {
  const text = [
    'run: {histories: 0}',
    'stack:',
    '  - {name: a, material: leed, thickness: -1 cm, detector: {fwhm: 7}}',
    '  - {name: a, material: lead, thicknes: 1 cm}',
    'source: {kind: point, energy: 30, distance: 1 cm}',
  ].join('\n');

  it('are told all at once, in the order in which they stand in the file', () => {
    expect(problemsOf(text).split('\n')).toEqual([
      'run.histories: must be at least 1, got 0 (line 1, column 18)',
      'stack[0].material: unknown material "leed" (line 3, column 25); did you mean lead?',
      'stack[0].thickness: must be more than 0, got -1 cm (line 3, column 42)',
      'stack[0].detector.fwhm: must be a width at an energy, the coefficients a, b and c, or a list of widths, got 7 (line 3, column 66); write it as in "7 % at 661.7 keV"',
      'stack[1].name: the name "a" is taken by stack[0] (line 4, column 12); give each its own name',
      'stack[1].thicknes: unknown key (line 4, column 31); did you mean thickness?',
      'source.energy: needs a unit, got 30 (line 5, column 31); write one of keV, MeV, eV behind it, as in "661.7 keV"',
    ]);
  });

  it('come as one error with the file, the parts of each problem and an exit code', () => {
    const error = thrown(() => parseSetup(text, { fileName: 'wall.yaml' }));
    expect(error.exitCode).toBe(EXIT_CODES.setup);
    expect(error.format().split('\n')[0]).toMatch(/^wall\.yaml: run\.histories: /);
    expect(error.problems[2]).toEqual({
      code: 'out_of_range',
      path: ['stack', 0, 'thickness'],
      rule: 'must be more than 0',
      got: '-1 cm',
      place: { line: 3, column: 42 },
      wayOut: null,
    });
  });

  it('beyond 50 are counted', () => {
    const rows = Array.from({ length: 60 }, () => 'material: lead, thickness: 1');
    const lines = thrown(() => parseSetup(stack(...rows), { fileName: 'wall.yaml' }))
      .format()
      .split('\n');
    expect(lines).toHaveLength(51);
    expect(lines[50]).toBe('wall.yaml: and 10 more problems');
  });
});

describe('A setup from a plain object', () => {
  it('is the same as from text', () => {
    const text = readFileSync(join(EXAMPLES, 'reference.yaml'), 'utf8');
    expect(checkSetup(parse(text))).toEqual(parseSetup(text));
  });

  it('is refused without places', () => {
    const error = thrown(() =>
      checkSetup({ source: { kind: 'beam', energy: 30 }, stack: [{ material: 'leed' }] }),
    );
    expect(error.format().split('\n')).toEqual([
      'setup: source.energy: needs a unit, got 30; write one of keV, MeV, eV behind it, as in "661.7 keV"',
      'setup: stack[0].thickness: is missing; add it, as in thickness: 7.62 cm',
      'setup: stack[0].material: unknown material "leed"; did you mean lead?',
    ]);
  });

  it('cannot change the prototype of objects', () => {
    const raw: unknown = JSON.parse(
      '{"__proto__": {"polluted": 1}, "source": {"kind": "beam", "energy": "1 MeV", "__proto__": {"polluted": 1}},' +
        '"materials": {"__proto__": {"formula": "Fe", "density": "7 g/cm3"}, "constructor": {"formula": "Fe", "density": "7 g/cm3"}},' +
        '"stack": [{"material": "constructor", "thickness": "1 cm"}]}',
    );
    const paths = thrown(() => checkSetup(raw)).problems.map(({ path }) => path.join('.'));
    expect(paths).toEqual([
      '__proto__',
      'source.__proto__',
      'materials.__proto__',
      'materials.constructor',
      'stack.0.material',
    ]);
    expect({}).not.toHaveProperty('polluted');
  });

  it.each([undefined, null, 'text', 3, [], () => 1])('is refused when it is %s', (raw) => {
    expect(thrown(() => checkSetup(raw)).problems[0].rule).toMatch(/^must be a mapping/);
  });
});

function thrown(act: () => unknown): SetupError {
  try {
    act();
  } catch (error) {
    if (error instanceof SetupError) return error;
    throw error;
  }
  throw new Error('nothing was thrown');
}
