/** A finished run on one screen: what went in, the figures with their errors, the spectra, what to be careful of. */
import type { Spectrum, SpectrumTally, StopReason } from '../../engine/result.js';
import type { Analysis } from '../response/analysis.js';
import type { Manifest } from '../result/manifest.js';
import type { StoredResult } from '../result/stored-result.js';
import { clip } from '../show.js';
import { LEAST_CONTRIBUTING, VOV_LIMIT } from '../../engine/reliability-verdict.js';
import { CAUTION } from './caution.js';
import { CONVERGED_BELOW, type Flaw } from './convergence.js';
import { curveSections } from './curve-text.js';
import { doseRateLines } from './dose-text.js';
import { displayWidth } from './display-width.js';
import { figuresText, flawsIn, MARKS } from './figures-text.js';
import { formatCount, formatDuration, formatNumber } from './figure-format.js';
import { GROUPS, type Group } from './quantities.js';
import { isShaped, peakLines, responseLines } from './response-text.js';
import { describeSetup } from './setup-text.js';
import { plotSpectrum } from './spectrum-plot.js';
import type { Style } from './style.js';
import { wrap } from './text-table.js';

/** Which spectra are drawn: those of photons that leave and of detectors, every one, or none. */
export type SpectraChoice = 'main' | 'all' | 'none';

const STOPPED: Readonly<Record<StopReason, string>> = {
  histories: 'all planned histories done',
  until: 'stopped at the precision asked for',
  time_limit: 'stopped by the time limit',
  interrupted: 'interrupted',
};

const SPECTRUM_TITLES: Readonly<Record<SpectrumTally, string>> = {
  transmitted: 'Transmitted photons',
  reflected: 'Reflected photons',
  side_escape: 'Photons through the sides',
  deposited: 'Energy deposited',
  pulse_height: 'Pulse heights',
  anticoincidence: 'Pulse heights without a pulse elsewhere',
  coincidence: 'Pulse heights with a pulse elsewhere',
  pulse_height_sum: 'Pulse heights of all detectors added up',
};

function head({ title, histories, seed, stopped, timings, balance }: Manifest, style: Style): string[] {
  // Only weighted histories have an error of their energy balance.
  const transport = balance.relative_std_error === undefined ? '' : ' by deep transport';
  return [
    ...wrap(clip(title, 200), style.width).map(style.heading),
    ...wrap(
      `${formatCount(histories)} histories${transport}, ${STOPPED[stopped]}; seed ${clip(seed)}`,
      style.width,
    ),
    style.note(
      `${formatDuration(timings.wall_s)}, ${formatCount(timings.histories_per_second)} histories per second`,
    ),
  ];
}

function curveIntroduction({ manifest }: StoredResult, style: Style): string[] {
  return ['', style.heading(GROUPS.in), ...describeSetup(manifest, style.width)];
}

/** The titles of the columns stand beside the heading where there is room, else under it. */
function headed(heading: string, header: string, style: Style): string[] {
  const room = ' '.repeat(displayWidth(heading) + 1);
  return header.startsWith(room)
    ? [`${style.heading(heading)}${style.note(header.slice(displayWidth(heading)))}`]
    : [style.heading(heading), style.note(header)];
}

function figureSections(result: StoredResult, style: Style): string[] {
  const [main, ...others] = figuresText(result, style);
  const lines = ['', style.heading(GROUPS.in), ...describeSetup(result.manifest, style.width)];
  for (const group of Object.keys(GROUPS) as Group[]) {
    const own = main.byGroup.get(group) ?? [];
    if (own.length > 0) {
      lines.push(
        ...(group === 'in' ? [style.note(main.header)] : ['', ...headed(GROUPS[group], main.header, style)]),
      );
      lines.push(...own);
    }
  }
  for (const { header, byGroup } of others) {
    lines.push('', ...headed('With this source', header, style), ...[...byGroup.values()].flat());
  }
  lines.push(...doseRateLines(result, style));
  return lines;
}

function legend(result: StoredResult, style: Style): string[] {
  const flaws = flawsIn(result);
  const until = result.manifest.run.until;
  const texts: Readonly<Record<Flaw, string | null>> = {
    none_seen: null,
    imprecise: `not converged: standard error above ${formatNumber(100 * CONVERGED_BELOW)} % of the value, or nothing seen; more histories help`,
    unreliable: `not reliable: fewer than ${LEAST_CONTRIBUTING} histories contributed, or so unequally (relative variance of the variance above ${VOV_LIMIT}) that the error itself is uncertain; run ten times the histories`,
    short_of_until:
      until &&
      `${STOPPED[result.manifest.stopped]} before ${clip(until.quantity)} reached ${formatNumber(100 * until.relative_error)} %`,
  };
  const shown = new Set<Flaw>([...flaws].map((flaw) => (flaw === 'none_seen' ? 'imprecise' : flaw)));
  const lines = [...shown].flatMap((flaw) => wrap(`${MARKS[flaw]} ${texts[flaw]}`, style.width));
  return lines.length === 0 ? [] : ['', ...lines.map(style.alert)];
}

function spectrumLines(spectrum: Spectrum, style: Style, registered = false): string[] {
  const { lines, logarithmic } = plotSpectrum(spectrum, style);
  const where = spectrum.layer === null ? '' : `, ${clip(spectrum.layer)}`;
  const how = registered ? ' as registered' : '';
  const name = `${SPECTRUM_TITLES[spectrum.tally] ?? clip(spectrum.tally)}${how}${where}`;
  if (lines.length === 0) {
    return ['', `${style.heading(name)} ${style.note('(none)')}`];
  }
  const what = spectrum.tally === 'deposited' ? 'keV per keV and photon' : 'per keV and photon';
  const caption = style.note(`(${what}${logarithmic ? ', logarithmic' : ''})`);
  return ['', `${style.heading(name)} ${caption}`, ...lines.map(style.drawing)];
}

/** Spectra that detectors shape are drawn as registered; as tallied too where every one is asked for. */
function spectraSections(
  spectra: readonly Spectrum[],
  analysis: Analysis | null,
  choice: SpectraChoice,
  style: Style,
): string[] {
  const shaped = (analysis?.responses ?? []).filter(isShaped);
  const drawn = spectra.filter(
    ({ tally, mean }) =>
      choice === 'all' || (choice === 'main' && tally !== 'deposited' && mean.some((value) => value > 0)),
  );
  return drawn.flatMap((spectrum) => {
    const response = shaped.find(({ tallied }) => tallied === spectrum);
    if (response === undefined) return spectrumLines(spectrum, style);
    const tallied = choice === 'all' ? spectrumLines(spectrum, style) : [];
    return [...tallied, ...spectrumLines(response.spectrum, style, true)];
  });
}

function warningLines({ warnings }: Manifest, style: Style): string[] {
  if (warnings.length === 0) {
    return [];
  }
  const texts = warnings.map(
    ({ message, count }) => clip(message, 300) + (count > 1 ? ` (${formatCount(count)} times)` : ''),
  );
  return [
    '',
    style.heading('Warnings'),
    ...texts.flatMap((text) => wrap(text, style.width - 2).map((line) => `  ${line}`)),
  ];
}

/** The lines of the summary, none wider than the style's width save for long names. */
export function summaryLines(
  result: StoredResult,
  style: Style,
  spectra: SpectraChoice,
  analysis: Analysis | null = null,
): string[] {
  const { manifest } = result;
  const energyGap = formatNumber(manifest.balance.relative_error, 2);
  const gapError = manifest.balance.relative_std_error;
  const ofError = gapError === undefined ? '' : ` (standard error ${formatNumber(gapError, 2)})`;
  const isCurve = result.efficiency !== undefined;
  return [
    ...head(manifest, style),
    ...(isCurve ? curveIntroduction(result, style) : figureSections(result, style)),
    ...(isCurve ? curveSections(result, style) : legend(result, style)),
    ...(analysis === null ? [] : responseLines(analysis, manifest, style)),
    ...(analysis === null ? [] : peakLines(analysis, style)),
    ...spectraSections(result.spectra, analysis, spectra, style),
    ...warningLines(manifest, style),
    '',
    ...wrap(`Energy in and energy accounted for differ by ${energyGap} of the whole${ofError}.`, style.width),
    ...wrap(CAUTION, style.width).map(style.note),
  ];
}
