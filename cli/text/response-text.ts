/** What detectors register and what their spectra show, as sections of the summary. */
import type { Resolution } from '../../engine/setup.js';
import type { Analysis } from '../response/analysis.js';
import type { FeatureName, PeakRow } from '../response/peaks/peak-row.js';
import type { Value } from '../response/pulses.js';
import type { DetectorResponse } from '../response/respond.js';
import type { Manifest } from '../result/manifest.js';
import { clip } from '../show.js';
import { displayWidth } from './display-width.js';
import { formatFigure, formatNumber, formatPercent, relativeError } from './figure-format.js';
import { scalesOf, type Scale } from './figures-text.js';
import type { Style } from './style.js';
import { alignFigures, alignRight, renderTable, wrap } from './text-table.js';

/** "FWHM 46.3 keV at 661.7 keV" */
export function widthText(resolution: Resolution): string {
  switch (resolution.kind) {
    case 'at_energy':
      return `FWHM ${formatNumber(resolution.fwhmKeV)} keV at ${formatNumber(resolution.atKeV, 6)} keV`;
    case 'formula': {
      const [a, b, c] = [resolution.a, resolution.b, resolution.c].map((x) => formatNumber(x));
      return `FWHM ${a} + ${b} sqrt(E${resolution.c === 0 ? '' : ` + ${c} E^2`}) in keV`;
    }
    case 'table':
      return `FWHM from a table of ${resolution.energyKeV.length} energies`;
  }
}

function conditions({ resolution, thresholdKeV, tally }: DetectorResponse): string {
  return [
    ...(tally === 'anticoincidence' ? ['without a pulse elsewhere'] : []),
    ...(resolution === null ? [] : [widthText(resolution)]),
    ...(thresholdKeV === null ? [] : [`above ${formatNumber(thresholdKeV)} keV`]),
  ].join(', ');
}

/** Whether a detector registers anything that its pulse heights do not say by themselves. */
export function isShaped({ resolution, thresholdKeV, windows }: DetectorResponse): boolean {
  return resolution !== null || thresholdKeV !== null || windows.length > 0;
}

/** Counts above the threshold and in windows, for each detector that has any of these. */
export function responseLines({ responses }: Analysis, manifest: Manifest, style: Style): string[] {
  return responses.filter(isShaped).flatMap((response) => {
    const figures: [string, string, Value][] = [['registered', '', response.registered]];
    for (const { window, gross, net } of response.windows) {
      const range = `${formatNumber(window.energyLowKeV, 6)} to ${formatNumber(window.energyHighKeV, 6)} keV`;
      figures.push([`${clip(window.name)}, gross`, range, gross]);
      if (net !== null) figures.push([`${clip(window.name)}, net`, range, net]);
    }
    const said = conditions(response);
    const heading = `Registered, ${clip(response.layer)}`;
    const note = said === '' ? [] : wrap(said, style.width - 2).map((line) => style.note(`  ${line}`));
    return ['', style.heading(heading), ...note, ...scaledTables(figures, scalesOf(manifest), style)];
  });
}

/** As many scales side by side as the width takes. */
function scaledTables(
  figures: readonly (readonly [string, string, Value])[],
  scales: readonly Scale[],
  style: Style,
): string[] {
  const table = (some: readonly Scale[]): string[] => {
    const columns = some.map(({ factor }) =>
      alignFigures(
        figures.map(([, , { mean, stdError }]) => ({
          ...formatFigure(mean * factor, stdError === null ? null : stdError * factor),
          unit: '',
        })),
        style.plusMinus,
      ),
    );
    const errors = alignRight(figures.map(([, , { mean, stdError }]) => errorText(mean, stdError)));
    const rows = figures.map(([name, range], at) => [
      name,
      range,
      ...columns.map((column) => column[at]),
      errors[at],
    ]);
    return renderTable([['', '', ...some.map(({ title }) => title), 'error'], ...rows]);
  };
  const groups: Scale[][] = [];
  for (const scale of scales) {
    const together = [...(groups.at(-1) ?? []), scale];
    if (groups.length > 0 && table(together).every((line) => displayWidth(line) <= style.width))
      groups[groups.length - 1] = together;
    else groups.push([scale]);
  }
  return groups.flatMap((group) => {
    const [header, ...lines] = table(group);
    return [style.note(header), ...lines];
  });
}

function errorText(mean: number | null, stdError: number | null): string {
  if (mean === 0 && stdError === null) return 'none seen';
  const error = relativeError(mean, stdError);
  return error === null ? '' : formatPercent(error);
}

/** Names for people; full energy stands among the figures of the detectors. */
const FEATURES: Readonly<Partial<Record<FeatureName, string>>> = {
  single_escape: 'single escape',
  double_escape: 'double escape',
  x_ray_escape: 'X-ray escape',
  annihilation: 'annihilation',
  peak_to_compton: 'peak to Compton',
  compton_edge: 'Compton edge, seen at',
  backscatter: 'backscatter peak, seen at',
};

/** The features that are seen, detector by detector. */
export function peakLines({ peaks }: Analysis, style: Style): string[] {
  const seen = peaks.filter(({ status, feature }) => status === 'seen' && FEATURES[feature] !== undefined);
  const layers = [...new Set(seen.map(({ layer }) => layer))];
  return layers.flatMap((layer) => {
    const own = seen.filter((row) => row.layer === layer);
    const heading = `Seen in the pulse heights, ${clip(layer)}`;
    const [header, ...lines] = renderTable([
      ['', '', '', 'expected at', '', 'error'],
      ...peakCells(own, style),
    ]);
    return ['', style.heading(heading), style.note(header), ...lines];
  });
}

function peakCells(rows: readonly PeakRow[], style: Style): string[][] {
  const figures = alignFigures(
    rows.map(({ mean, stdError, unit }) => ({
      ...formatFigure(mean, stdError),
      unit: unit === '1' ? '' : unit,
    })),
    style.plusMinus,
  );
  const energies = alignRight(rows.map(({ energyKeV }) => `${energyKeV.toFixed(1)} keV`));
  const errors = alignRight(rows.map(({ mean, stdError }) => errorText(mean, stdError)));
  return rows.map((row, at) => [
    FEATURES[row.feature]!,
    row.xRay ?? '',
    row.lineKeV === null ? '' : `${formatNumber(row.lineKeV, 6)} keV`,
    row.feature === 'peak_to_compton' ? '' : energies[at],
    figures[at],
    errors[at],
  ]);
}
