/** What energies a source emits: one, several, a spectrum, a nuclide, or a series of them one after the other. */
import type { Emission, Source, SourceLine, SourceShape } from '../../engine/setup.js';
import { findNuclide, nearestNuclideName, nuclideLines } from '../../materials/index.js';
import { Complaint, complaints } from '../errors.js';
import { showNumber } from '../show.js';
import type { SetupKeys } from '../setup-schema.js';
import type { ProblemList } from './problem-list.js';
import type { Partially } from './read-keys.js';
import { EMISSION_KEYS, NUCLIDE_KEYS } from './schema-source.js';
import { readSpectrumFile } from './spectrum-file.js';
import type { StackDraft } from './stack.js';

type SourceKeys = Partially<SetupKeys['source']>;

export interface EmissionDraft {
  readonly emission: Emission;
  readonly energyGridKeV: readonly number[] | null;
  readonly lowestKeV: number;
  readonly highestKeV: number;
}

const NONE = { lines: [], continuum: [], photonsPerDecay: null, nuclide: null };

/** Null if something in it is wrong, and has been reported. */
export function makeEmission(
  keys: SourceKeys,
  directory: string | null,
  problems: ProblemList,
): EmissionDraft | null {
  const given = EMISSION_KEYS.filter((key) => key in keys);
  if (given.length !== 1) {
    problems.add(['source'], complaints.chooseOne(EMISSION_KEYS, given));
    return null;
  }
  reportStrayKeys(keys, given[0], problems);
  if (keys.energy !== undefined) return fromLines([{ energyKeV: keys.energy, perDecay: 1 }], null, null);
  if (keys.lines !== undefined) return makeLines(keys.lines, problems);
  if (keys.spectrum !== undefined) return makeSpectrum(keys.spectrum, directory, problems);
  if (keys.nuclide !== undefined) return makeNuclide(keys.nuclide, keys, problems);
  if (keys.energies !== undefined) return makeGrid(keys.energies, problems);
  return null;
}

function reportStrayKeys(keys: SourceKeys, chosen: string, problems: ProblemList): void {
  for (const key of NUCLIDE_KEYS) {
    if (chosen === 'nuclide' || !(key in keys)) continue;
    problems.addKey(['source', key], complaints.contradiction('applies to a nuclide only', 'remove it'));
  }
}

function fromLines(
  lines: readonly SourceLine[],
  photonsPerDecay: number | null,
  nuclide: string | null,
): EmissionDraft {
  const sorted = [...lines].sort((a, b) => a.energyKeV - b.energyKeV);
  return {
    emission: { ...NONE, lines: sorted, photonsPerDecay, nuclide },
    energyGridKeV: null,
    lowestKeV: sorted[0].energyKeV,
    highestKeV: sorted[sorted.length - 1].energyKeV,
  };
}

function sumPerDecay(lines: readonly SourceLine[]): number {
  return lines.reduce((sum, { perDecay }) => sum + perDecay, 0);
}

function makeLines(
  rows: readonly (Partially<{ energy: number; per_decay: number }> | undefined)[],
  problems: ProblemList,
): EmissionDraft | null {
  const first = new Map<number, number>();
  const lines: SourceLine[] = [];
  rows.forEach((row, index) => {
    if (row?.energy === undefined) return;
    const path = ['source', 'lines', index, 'energy'];
    const taken = first.get(row.energy);
    if (taken === undefined) first.set(row.energy, index);
    else
      problems.add(
        path,
        complaints.order(`must differ from source.lines[${taken}]`, 'add up their photons'),
        `${row.energy} keV`,
      );
    if (row.per_decay !== undefined) lines.push({ energyKeV: row.energy, perDecay: row.per_decay });
  });
  return lines.length > 0 && lines.length === rows.length ? fromLines(lines, sumPerDecay(lines), null) : null;
}

function makeSpectrum(name: string, directory: string | null, problems: ProblemList): EmissionDraft | null {
  const bins =
    directory === null
      ? complaints.fileUnreadable(name, 'the setup has no folder')
      : readSpectrumFile(name, directory);
  if (bins instanceof Complaint) {
    problems.add(['source', 'spectrum'], bins, name);
    return null;
  }
  return {
    emission: { ...NONE, continuum: bins },
    energyGridKeV: null,
    lowestKeV: bins[0].energyLowKeV,
    highestKeV: bins[bins.length - 1].energyHighKeV,
  };
}

function makeNuclide(name: string, keys: SourceKeys, problems: ProblemList): EmissionDraft | null {
  const nuclide = findNuclide(name);
  if (nuclide === undefined) {
    problems.add(
      ['source', 'nuclide'],
      complaints.unknownName(
        'nuclide',
        name,
        nearestNuclideName(name) ?? null,
        'give its lines with the key lines',
      ),
    );
    return null;
  }
  const { minimum_yield: minimumYield, minimum_energy: minimumEnergyKeV } = keys;
  const lines = mergeEqual(nuclideLines(nuclide, { minimumYield, minimumEnergyKeV }));
  if (lines.length > 0) return fromLines(lines, sumPerDecay(lines), nuclide.name);
  const rule = `minimum_yield and minimum_energy leave no line of ${nuclide.name}`;
  problems.add(['source', 'nuclide'], complaints.contradiction(rule, 'lower them'));
  return null;
}

/** One line for each energy: in a chain several members may emit the same, such as 511 keV. */
function mergeEqual(lines: readonly SourceLine[]): SourceLine[] {
  const photons = new Map<number, number>();
  for (const { energyKeV, perDecay } of lines)
    photons.set(energyKeV, (photons.get(energyKeV) ?? 0) + perDecay);
  return [...photons].map(([energyKeV, perDecay]) => ({ energyKeV, perDecay }));
}

function makeGrid(keys: NonNullable<SourceKeys['energies']>, problems: ProblemList): EmissionDraft | null {
  const { from, to, count, spacing = 'log' } = keys;
  if (from === undefined || to === undefined || count === undefined) return null;
  if (!(to > from)) {
    problems.add(
      ['source', 'energies', 'to'],
      complaints.order(`must be above from, ${from} keV`),
      `${to} keV`,
    );
    return null;
  }
  const energies = Array.from({ length: count }, (_, i) => {
    const part = i / (count - 1);
    return spacing === 'log' ? from * (to / from) ** part : from + (to - from) * part;
  });
  // Rounding must not carry the ends past the bounds that were asked for.
  energies[0] = from;
  energies[count - 1] = to;
  return {
    emission: { ...NONE, lines: [{ energyKeV: to, perDecay: 1 }] },
    energyGridKeV: energies,
    lowestKeV: from,
    highestKeV: to,
  };
}

/** Photons below the cutoff are not followed, so a source may not start any. */
export function reportBelowCutoff(
  keys: SourceKeys,
  draft: EmissionDraft,
  cutoffKeV: number,
  problems: ProblemList,
): void {
  if (draft.lowestKeV >= cutoffKeV) return;
  const key = EMISSION_KEYS.find((name) => keys[name] !== undefined) ?? 'energy';
  const rule = `has photons of ${showNumber(draft.lowestKeV)} keV, below the cutoff of ${showNumber(cutoffKeV)} keV`;
  const way =
    key === 'nuclide'
      ? `set minimum_energy: ${showNumber(cutoffKeV)} keV or lower physics.cutoff`
      : 'lower physics.cutoff';
  problems.add(['source', key], complaints.contradiction(rule, way));
}

/** Null if something in it is wrong, and has been reported. */
export function makeShape(keys: SourceKeys, stack: StackDraft, problems: ProblemList): SourceShape | null {
  switch (keys.kind) {
    case 'beam':
      return { kind: 'beam', angleDeg: keys.angle ?? 0, diameterCm: keys.diameter ?? 0 };
    case 'diffuse':
      return { kind: 'diffuse', law: keys.law ?? 'isotropic' };
    case 'point':
      return keys.distance === undefined
        ? null
        : { kind: 'point', distanceCm: keys.distance, offsetCm: keys.offset ?? 0 };
    case 'disc':
      return keys.distance === undefined || keys.radius === undefined
        ? null
        : { kind: 'disc', distanceCm: keys.distance, radiusCm: keys.radius };
    case 'embedded':
      if (keys.layer === undefined || stack.find(keys.layer, ['source', 'layer'], problems) === null)
        return null;
      return { kind: 'embedded', layer: keys.layer };
    default:
      return null;
  }
}

export function reportLiveTime(keys: SourceKeys, problems: ProblemList): void {
  if (keys.live_time === undefined || 'activity' in keys) return;
  problems.add(
    ['source', 'live_time'],
    complaints.contradiction('needs an activity', 'add activity to the source'),
  );
}

export function makeSource(keys: SourceKeys, shape: SourceShape, emission: Emission): Source {
  return { shape, emission, activityBq: keys.activity ?? null, liveTimeS: keys.live_time ?? null };
}
