/** Everything that a detector's spectrum shows of the source's lines. */
import type { QuantityRow } from '../../../engine/result.js';
import type { Manifest } from '../../result/manifest.js';
import type { StoredResult } from '../../result/stored-result.js';
import type { DetectorResponse } from '../respond.js';
import { backscatterPeak, comptonEdge } from './broad-features.js';
import { Continuum, edgesOf } from './continuum.js';
import { binsOf, escapePeaks, expectedPeaks, finding, UNRESOLVED, type Bins } from './escape-peaks.js';
import { backscatteredKeV, comptonEdgeKeV, type FeatureName, type PeakRow } from './peak-row.js';
import { peakToCompton } from './peak-to-compton.js';

/** Broad features of lines with a smaller share of the photons drown in those of the others. */
const PROMINENT = 0.2;
/** Lines with less of the photons of the line in question do not count as being in its peak. */
const DISTURBING = 0.05;

type Lines = Manifest['source']['lines'];

/** All features of all lines in all detectors; empty where the source has no lines. */
export function findPeaks(result: StoredResult, responses: readonly DetectorResponse[]): PeakRow[] {
  return responses
    .filter(({ tally }) => tally === 'pulse_height')
    .flatMap((response) => peaksOf(result, response));
}

function peaksOf({ manifest, totals }: StoredResult, response: DetectorResponse): PeakRow[] {
  const { lines } = manifest.source;
  const layer = manifest.stack.find(({ name }) => name === response.layer)!;
  const continuum = new Continuum(edgesOf(response.tallied), response.smeared.pulses);
  const expected = expectedPeaks(manifest.source, layer);
  const places = expected.map((peak) => binsOf(continuum, peak));
  const ofLines = lines.flatMap((line) => [
    fullEnergy(totals, layer.name, line.energy_keV),
    ...broadFeatures(continuum, places, response, lines, line),
  ]);
  const rows = [...ofLines, ...escapePeaks(continuum, layer.name, expected)];
  // Line by line, those of all lines together last.
  const order = new Map(lines.map(({ energy_keV: energy }, at) => [energy, at]));
  const rank = ({ lineKeV }: PeakRow) => (lineKeV === null ? lines.length : order.get(lineKeV)!);
  return rows.sort((a, b) => rank(a) - rank(b));
}

/** The full-energy peak is tallied as such and needs no background taken from it. */
function fullEnergy(totals: readonly QuantityRow[], layer: string, lineKeV: number): PeakRow {
  const row = totals.find(
    (found) => found.quantity === 'full_energy' && found.layer === layer && found.lineKeV === lineKeV,
  );
  const found = finding({ mean: row?.mean ?? 0, stdError: row?.stdError ?? null });
  return { ...empty('full_energy', layer, lineKeV, lineKeV, '1'), ...found };
}

function broadFeatures(
  continuum: Continuum,
  peaks: readonly Bins[],
  response: DetectorResponse,
  lines: Lines,
  { energy_keV: lineKeV, per_decay: photons }: Lines[number],
): PeakRow[] {
  const all = lines.reduce((sum, { per_decay: share }) => sum + share, 0);
  const prominent = photons >= PROMINENT * all;
  const others = lines
    .filter(({ energy_keV: energy, per_decay: share }) => energy !== lineKeV && share > DISTURBING * photons)
    .map(({ energy_keV: energy }) => energy);
  const { layer } = response;
  return [
    {
      ...empty('peak_to_compton', layer, lineKeV, lineKeV, '1'),
      ...(prominent ? peakToCompton(response, lineKeV, others) : UNRESOLVED),
    },
    {
      ...empty('compton_edge', layer, lineKeV, comptonEdgeKeV(lineKeV), 'keV'),
      ...(prominent ? comptonEdge(continuum, peaks, lineKeV) : UNRESOLVED),
    },
    {
      ...empty('backscatter', layer, lineKeV, backscatteredKeV(lineKeV), 'keV'),
      ...(prominent ? backscatterPeak(continuum, peaks, lineKeV) : UNRESOLVED),
    },
  ];
}

function empty(
  feature: FeatureName,
  layer: string,
  lineKeV: number,
  energyKeV: number,
  unit: PeakRow['unit'],
): Omit<PeakRow, 'mean' | 'stdError' | 'status'> {
  return { feature, layer, lineKeV, xRay: null, energyKeV, unit };
}
