/** Setup and spectrum files on the disk, among them such as are made to make the reader look where it should not. */
import { execFileSync } from 'node:child_process';
import { mkdirSync, mkdtempSync, rmSync, symlinkSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { SetupError } from '../../cli/errors.js';
import { readSetup, readSetupFile } from '../../cli/setup-reader.js';
import { parseSpectrum } from '../../cli/setup/spectrum-file.js';
import { BEAM, problemsOf, source, WALL } from './setup-cases.js';

let top: string;
let folder: string;

beforeAll(() => {
  top = mkdtempSync(join(tmpdir(), 'thickset-setup-'));
  folder = join(top, 'inside');
  mkdirSync(join(folder, 'spectra'), { recursive: true });
  writeFileSync(join(top, 'secret.csv'), '100,1\n200,1\n');
  mkdirSync(join(top, 'inside-out'));
  writeFileSync(join(top, 'inside-out', 'secret.csv'), '100,1\n200,1\n');
  writeFileSync(join(folder, 'tube.csv'), 'energy_kev,photons\n20,1\n30,4\n50,0\n');
  writeFileSync(join(folder, 'spectra', 'tube.csv'), '20,1\n30,4\n');
  symlinkSync(join(top, 'secret.csv'), join(folder, 'link.csv'));
  symlinkSync(top, join(folder, 'way-out'));
  symlinkSync('tube.csv', join(folder, 'alias.csv'));
});

afterAll(() => rmSync(top, { recursive: true }));

function failure(path: string): string {
  try {
    readSetup(path);
  } catch (error) {
    if (error instanceof SetupError) return error.format().replaceAll(`${top}/`, '');
    throw error;
  }
  return '';
}

function write(name: string, content: string | Uint8Array): string {
  const path = join(top, name);
  writeFileSync(path, content);
  return path;
}

describe('A setup file', () => {
  it('gives its setup, its very text and its name as title', () => {
    const text = `\ufeff${BEAM}\r\n${WALL}\r\n`;
    const file = readSetupFile(write('wall.yaml', text));
    expect(file.setup.title).toBe('wall');
    expect(file.text).toBe(text);
  });

  it('that does not exist is named', () => {
    expect(failure(join(top, 'none.yaml'))).toBe('none.yaml: does not exist');
  });

  it('that is a folder is refused', () => {
    expect(failure(top + '/inside')).toBe('inside: is not a file');
  });

  it('that is a pipe is refused without waiting for it', () => {
    execFileSync('mkfifo', [join(top, 'pipe.yaml')]);
    expect(failure(join(top, 'pipe.yaml'))).toBe('pipe.yaml: is not a file');
  });

  it('that is larger than any setup is refused', () => {
    expect(failure(write('large.yaml', `# ${'x'.repeat(262_144)}`))).toBe(
      'large.yaml: must not be larger than 256 KiB',
    );
  });

  it('that is no text is refused', () => {
    expect(failure(write('binary.yaml', Uint8Array.of(0x61, 0xff, 0xfe)))).toBe(
      'binary.yaml: is not YAML: the file is not UTF-8 text',
    );
  });

  it('made of twenty thousand keys is refused in its turn', () => {
    const keys = Array.from({ length: 20_000 }, (_, i) => `k${i}: 1`).join('\n');
    expect(failure(write('keys.yaml', keys)).split('\n')).toHaveLength(51);
  });

  it('whose aliases would unfold to a billion values is refused before they do', () => {
    let bomb = 'a0: &a0 [x, x, x, x, x, x, x, x, x, x]\n';
    for (let i = 1; i < 10; i++)
      bomb += `a${i}: &a${i} [${Array(10)
        .fill(`*a${i - 1}`)
        .join(', ')}]\n`;
    const lines = failure(write('bomb.yaml', bomb)).split('\n');
    expect(lines[0]).toMatch(/^bomb\.yaml: a0: /);
    expect(lines.filter((line) => /anchors|aliases/.test(line)).length).toBeGreaterThan(20);
  });
});

describe('A spectrum file', () => {
  const problems = (name: string) =>
    problemsOf(source(`kind: beam, spectrum: ${name}`), { directory: folder });

  it.each(['tube.csv', './tube.csv', 'spectra/tube.csv', 'spectra/../tube.csv', 'alias.csv'])(
    'is read from %s',
    (name) => {
      expect(problems(name)).toBe('');
    },
  );

  it('is looked for beside the setup file', () => {
    writeFileSync(join(folder, 'tube.yaml'), source('kind: beam, spectrum: tube.csv'));
    expect(readSetup(join(folder, 'tube.yaml')).source.emission).toEqual({
      lines: [],
      continuum: [
        { energyLowKeV: 15, energyHighKeV: 25, relativePhotons: 1 },
        { energyLowKeV: 25, energyHighKeV: 40, relativePhotons: 4 },
      ],
      photonsPerDecay: null,
      nuclide: null,
    });
  });

  const OUTSIDE =
    /^source\.spectrum: must lie in the folder of the setup file or below it, got .* \(line 1, column 32\); copy/;

  it.each([
    '../secret.csv',
    '../inside-out/secret.csv',
    'spectra/../../secret.csv',
    '/etc/passwd',
    '..',
    '.',
  ])('is not read from %s, outside the folder', (name) => {
    expect(problems(name)).toMatch(OUTSIDE);
  });

  it.each(['link.csv', 'way-out/secret.csv'])('is not read through the link %s', (name) => {
    expect(problems(name)).toMatch(OUTSIDE);
  });

  it('outside the folder is not even looked for', () => {
    expect(problems('../nothing.csv')).toMatch(OUTSIDE);
  });

  it('that is missing or a folder is named', () => {
    expect(problems('tubes.csv')).toBe(
      'source.spectrum: file "tubes.csv" does not exist (line 1, column 32)',
    );
    expect(problems('spectra')).toBe(
      'source.spectrum: file "spectra" cannot be read, it is not a file (line 1, column 32)',
    );
  });

  it('tells the line of its first mistake', () => {
    writeFileSync(join(folder, 'bad.csv'), 'energy_kev,photons\n20,1\n10,1\n');
    expect(problems('bad.csv')).toBe(
      'source.spectrum: bad.csv line 3: energies must ascend, got 10 after 20 (line 1, column 32)',
    );
  });

  it('keeps the source above the cutoff', () => {
    const text = `${source('kind: beam, spectrum: tube.csv')}physics: {cutoff: 16 keV}\n`;
    expect(problemsOf(text, { directory: folder })).toBe(
      'source.spectrum: has photons of 15 keV, below the cutoff of 16 keV (line 1, column 32); lower physics.cutoff',
    );
  });

  it('has no line for a full-energy peak', () => {
    const text = [
      'source: {kind: beam, spectrum: tube.csv}',
      'stack: [{material: NaI, thickness: 1 cm, detector: {}}]',
      'run: {until: {quantity: full_energy, relative_error: 1 %}}',
    ].join('\n');
    expect(problemsOf(text, { directory: folder })).toBe(
      'run.until.quantity: full_energy needs source lines, not a spectrum (line 3, column 25); watch interacting instead',
    );
  });
});

describe('The text of a spectrum', () => {
  const bins = (text: string) => parseSpectrum(text, 'tube.csv');

  it.each([
    ['commas', '20,1\n30,2\n'],
    ['semicolons', '20;1\n30;2\n'],
    ['tabs', '20\t1\n30\t2\n'],
    ['a header', 'energy_keV,relative photons\n20,1\n30,2\n'],
    ['a header in quotes', '"Energy (keV)","photons"\n20,1\n30,2\n'],
    ['comments, blank lines and line breaks of all kinds', '\ufeff# tube\r\n\r\n20, 1\r30 ,2\n# end'],
    ['empty bins at both ends', '10,0\n20,1\n30,2\n40,0\n'],
  ])('may have %s', (_, text) => {
    expect(bins(text)).toEqual([
      { energyLowKeV: 15, energyHighKeV: 25, relativePhotons: 1 },
      { energyLowKeV: 25, energyHighKeV: 35, relativePhotons: 2 },
    ]);
  });

  it('keeps empty bins between others, and every edge joins two bins', () => {
    const read = bins('10,1\n20,0\n40,0.5\n');
    expect(read).toEqual([
      { energyLowKeV: 5, energyHighKeV: 15, relativePhotons: 1 },
      { energyLowKeV: 15, energyHighKeV: 30, relativePhotons: 0 },
      { energyLowKeV: 30, energyHighKeV: 50, relativePhotons: 0.5 },
    ]);
  });

  it('is cut at the ends of the energy range', () => {
    expect(bins('0,0\n1,1\n3,1\n')).toEqual([
      { energyLowKeV: 1, energyHighKeV: 2, relativePhotons: 1 },
      { energyLowKeV: 2, energyHighKeV: 4, relativePhotons: 1 },
    ]);
    expect(bins('10000,1\n20000,1\n')).toEqual([
      { energyLowKeV: 5000, energyHighKeV: 15_000, relativePhotons: 1 },
      { energyLowKeV: 15_000, energyHighKeV: 20_000, relativePhotons: 1 },
    ]);
  });

  it.each([
    ['nothing', '', 'tube.csv: is empty', 'give rows of energy_kev and relative photons'],
    [
      'a header alone',
      'energy_kev,photons\n',
      'tube.csv: is empty',
      'give rows of energy_kev and relative photons',
    ],
    ['one row', '20,1\n', 'tube.csv line 1: needs at least two rows', 'use energy for a single energy'],
    ['energies that descend', '20,1\n10,1\n', 'tube.csv line 2: energies must ascend, got 10 after 20', null],
    ['an energy twice', '20,1\n20,1\n', 'tube.csv line 2: energies must ascend, got 20 after 20', null],
    ['a negative energy', '-20,1\n10,1\n', 'tube.csv line 1: energies must not be negative, got -20', null],
    ['negative photons', '10,1\n20,-1\n', 'tube.csv line 2: photons must not be negative, got -1', null],
    ['no photons at all', '10,0\n20,0\n', 'tube.csv: needs a row with photons above 0', null],
    ['a word for an energy', '10,1\nabc,1\n', 'tube.csv line 2: the energy must be a number, got abc', null],
    [
      'a word for photons',
      '10,1\n20,many\n',
      'tube.csv line 2: the photons must be a number, got many',
      null,
    ],
    [
      'photons left out',
      '10,1\n20,\n',
      'tube.csv line 2: the photons must be a number, got an empty text',
      null,
    ],
    [
      'photons that are not a number',
      '10,1\n20,nan\n',
      'tube.csv line 2: the photons must be a number, got nan',
      null,
    ],
    [
      'infinite photons',
      '10,1\n20,1e999\n',
      'tube.csv line 2: the photons must be a number, got 1e999',
      null,
    ],
    ['an infinite energy', 'inf,1\n20,1\n', 'tube.csv line 1: the energy must be a number, got inf', null],
    ['one column', '10\n20\n', 'tube.csv line 1: must have two columns, energy_kev and photons, got 1', null],
    [
      'three columns',
      '10,1,2\n',
      'tube.csv line 1: must have two columns, energy_kev and photons, got 3',
      null,
    ],
    [
      'energies in MeV',
      'energy_mev,photons\n1,1\n2,1\n',
      'tube.csv line 1: the first column must be energy_kev, got energy_mev',
      'give energies in keV',
    ],
    [
      'energies below the range',
      '0.5,1\n2,1\n',
      'tube.csv line 1: energies with photons must be between 1 keV and 20 MeV, got 0.5',
      null,
    ],
    [
      'energies above the range',
      '2,1\n20001,1\n',
      'tube.csv line 2: energies with photons must be between 1 keV and 20 MeV, got 20001',
      null,
    ],
  ])('of %s is refused', (_, text, rule, wayOut) => {
    expect(bins(text)).toMatchObject({ code: 'bad_spectrum_file', rule, wayOut });
  });
});
