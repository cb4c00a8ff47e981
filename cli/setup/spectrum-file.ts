/** Source spectra from CSV files beside the setup file. */
import { closeSync, constants, fstatSync, openSync, readFileSync, realpathSync } from 'node:fs';
import { resolve, sep } from 'node:path';
import { MAX_ENERGY_KEV, MIN_ENERGY_KEV, type SpectrumBin } from '../../engine/setup.js';
import { Complaint, complaints, reason } from '../errors.js';
import { showValue } from '../show.js';
import { parseNumber } from '../units.js';

const MAX_FILE_BYTES = 8 * 1024 * 1024;
const MAX_ROWS = 100_000;

/**
 * The bins of a spectrum file.
 *
 * @param name path relative to `directory`; it must not lead outside, not even by symbolic links
 */
export function readSpectrumFile(name: string, directory: string): SpectrumBin[] | Complaint {
  const text = readInside(name, directory);
  return text instanceof Complaint ? text : parseSpectrum(text, name);
}

function readInside(name: string, directory: string): string | Complaint {
  try {
    const root = realpathSync(directory);
    const wanted = resolve(root, name);
    // Asked before the file system is, so that an error cannot tell what exists elsewhere.
    if (!isInside(wanted, root)) return complaints.fileOutside();
    const real = realpathSync(wanted);
    if (!isInside(real, root)) return complaints.fileOutside();
    return readRegularFile(real, name);
  } catch (error) {
    const missing = (error as NodeJS.ErrnoException).code === 'ENOENT';
    return missing ? complaints.fileMissing(name) : complaints.fileUnreadable(name, reason(error));
  }
}

function isInside(path: string, root: string): boolean {
  return path.startsWith(root.endsWith(sep) ? root : root + sep);
}

/** Opens without waiting for the other end of a pipe, and without following a link put there in the meantime. */
function readRegularFile(path: string, name: string): string | Complaint {
  const file = openSync(path, constants.O_RDONLY | constants.O_NOFOLLOW | constants.O_NONBLOCK);
  try {
    const status = fstatSync(file);
    if (!status.isFile()) return complaints.fileUnreadable(name, 'it is not a file');
    if (status.size > MAX_FILE_BYTES)
      return complaints.badSpectrumFile(name, null, 'must not be larger than 8 MiB');
    return readFileSync(file, 'utf8');
  } finally {
    closeSync(file);
  }
}

interface Row {
  readonly line: number;
  readonly energyKeV: number;
  readonly photons: number;
}

/** Reads `energy_kev,photons` rows; commas, semicolons or tabs, an optional header, comments after #. */
export function parseSpectrum(text: string, name: string): SpectrumBin[] | Complaint {
  const bad = (line: number | null, rule: string, wayOut?: string) =>
    complaints.badSpectrumFile(name, line, rule, wayOut);
  const rows: Row[] = [];
  let headerSeen = false;
  for (const [index, full] of text
    .replace(/^\ufeff/, '')
    .split(/\r\n|\n|\r/)
    .entries()) {
    const line = index + 1;
    const content = full.trim();
    if (content === '' || content.startsWith('#')) continue;
    const cells = content.split(/[,;\t]/).map((cell) => cell.trim().replace(/^"(.*)"$/, '$1'));
    if (rows.length === 0 && !headerSeen && /^[^\d+.-]/.test(cells[0]) && !/^(nan|inf)/i.test(cells[0])) {
      headerSeen = true;
      const unit = cells[0].toLowerCase().replace(/[^a-z]/g, '');
      if (unit !== 'energykev') {
        return bad(
          line,
          `the first column must be energy_kev, got ${showValue(cells[0])}`,
          'give energies in keV',
        );
      }
      continue;
    }
    const row = readRow(cells, line, rows.at(-1));
    if (typeof row === 'string') return bad(line, row);
    if (rows.length === MAX_ROWS) return bad(line, `takes at most ${MAX_ROWS} rows`);
    rows.push(row);
  }
  if (rows.length === 0) return bad(null, 'is empty', 'give rows of energy_kev and relative photons');
  if (rows.length === 1)
    return bad(rows[0].line, 'needs at least two rows', 'use energy for a single energy');
  if (rows.every(({ photons }) => photons === 0)) return bad(null, 'needs a row with photons above 0');
  return makeBins(rows);
}

/** The row, or the rule it breaks. */
function readRow(cells: readonly string[], line: number, last: Row | undefined): Row | string {
  if (cells.length !== 2) return `must have two columns, energy_kev and photons, got ${cells.length}`;
  const [energyKeV, photons] = cells.map(parseNumber);
  if (!Number.isFinite(energyKeV)) return `the energy must be a number, got ${showValue(cells[0])}`;
  if (!Number.isFinite(photons)) return `the photons must be a number, got ${showValue(cells[1])}`;
  if (photons < 0) return `photons must not be negative, got ${photons}`;
  if (energyKeV < 0) return `energies must not be negative, got ${energyKeV}`;
  if (last !== undefined && !(energyKeV > last.energyKeV)) {
    return `energies must ascend, got ${energyKeV} after ${last.energyKeV}`;
  }
  if (photons > 0 && !(energyKeV >= MIN_ENERGY_KEV && energyKeV <= MAX_ENERGY_KEV)) {
    return `energies with photons must be between 1 keV and 20 MeV, got ${energyKeV}`;
  }
  return { line, energyKeV, photons };
}

/**
 * Edges half-way between neighbouring energies, the outer bins symmetric about theirs, all within the range of
 * energies that can be followed. Empty bins at both ends are left out.
 */
function makeBins(rows: readonly Row[]): SpectrumBin[] {
  const first = rows.findIndex(({ photons }) => photons > 0);
  const last = rows.findLastIndex(({ photons }) => photons > 0);
  const edge = (index: number) => (rows[index].energyKeV + rows[index + 1].energyKeV) / 2;
  const bins: SpectrumBin[] = [];
  for (let i = first; i <= last; i++) {
    const { energyKeV, photons } = rows[i];
    const low = i === 0 ? 2 * energyKeV - edge(0) : edge(i - 1);
    const high = i === rows.length - 1 ? 2 * energyKeV - edge(i - 1) : edge(i);
    bins.push({
      energyLowKeV: Math.max(MIN_ENERGY_KEV, low),
      energyHighKeV: Math.min(MAX_ENERGY_KEV, high),
      relativePhotons: photons,
    });
  }
  return bins;
}
