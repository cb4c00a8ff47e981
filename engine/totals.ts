/** Figures and spectra of a run from its sums. */
import type { QuantityRow, Spectrum, SpectrumTally } from './result.js';
import type { Sums } from './run-sums.js';
import type { Setup } from './setup.js';
import { estimate, partRatio } from './statistics.js';
import { coincidenceRows, coincidenceSpectra } from './coincidence-rows.js';
import { valueLayerRows } from './depth-rows.js';
import { figureEstimate } from './figure-estimate.js';
import { doseRows } from './dose-rows.js';
import { intrinsicRows } from './intrinsic-rows.js';
import { reliabilityOf } from './reliability.js';
import { FIGURE, fullEnergyLines, type TallyLayout } from './tally-layout.js';

/** What the figures are made of. */
export interface RunFigures {
  readonly setup: Setup;
  readonly layout: TallyLayout;
  readonly historyWeight: number;
  readonly histories: number;
  readonly sums: Sums;
}

const STACK_QUANTITIES = [
  ['incident', FIGURE.incident, '1'],
  ['transmitted', FIGURE.transmitted, '1'],
  ['transmitted_energy', FIGURE.transmittedEnergy, 'keV'],
  ['uncollided', FIGURE.uncollided, '1'],
  ['reflected', FIGURE.reflected, '1'],
  ['reflected_energy', FIGURE.reflectedEnergy, 'keV'],
  ['side_escape', FIGURE.sideEscape, '1'],
  ['side_escape_energy', FIGURE.sideEscapeEnergy, 'keV'],
] as const;

/** The rows of totals.arrow: the stack, then each layer, then each detector, then dose. */
export function totalsOf(run: RunFigures): QuantityRow[] {
  return [
    ...stackRows(run),
    ...layerRows(run),
    ...detectorRows(run),
    ...intrinsicRows(run),
    ...coincidenceRows(run),
    ...doseRows(run),
    ...valueLayerRows(run),
  ];
}

function row(
  run: RunFigures,
  figure: number,
  quantity: string,
  unit: string,
  layer: string | null = null,
  lineKeV: number | null = null,
): QuantityRow {
  const { sums, histories } = run;
  const value = figureEstimate(run, figure);
  const found = { quantity, layer, lineKeV, mean: value.mean, stdError: value.stdError, unit };
  const reliability = reliabilityOf(sums, run.layout, figure, histories);
  return reliability === null ? found : { ...found, reliability };
}

function stackRows(run: RunFigures): QuantityRow[] {
  return STACK_QUANTITIES.filter(
    ([quantity]) => hasSides(run.setup) || !quantity.startsWith('side_escape'),
  ).map(([quantity, figure, unit]) => row(run, figure, quantity, unit));
}

function layerRows(run: RunFigures): QuantityRow[] {
  return run.setup.stack.flatMap((layer, l) =>
    layer.material === null
      ? []
      : [
          row(run, run.layout.depositedFigure + l, 'deposited_energy', 'keV', layer.name),
          // Weighted histories do not tell how many there are.
          ...(run.layout.weighted
            ? []
            : [row(run, run.layout.interactingFigure + l, 'interacting', '1', layer.name)]),
        ],
  );
}

function detectorRows(run: RunFigures): QuantityRow[] {
  const { setup, layout, sums } = run;
  return setup.stack.flatMap((layer, l) => {
    const detector = layout.detectorOfLayer[l];
    if (detector < 0) return [];
    const first = layout.fullEnergyFigure + detector * layout.lines;
    const lines = fullEnergyLines(setup);
    const rows = lines.map((line, i) =>
      row(run, first + i, 'full_energy', '1', layer.name, line?.energyKeV ?? null),
    );
    // A history is of one line, so squares add up too.
    const all = lines.reduce((sum, _, i) => sum + sums.figureSum[first + i], 0);
    const allSquare = lines.reduce((sum, _, i) => sum + sums.figureSquare[first + i], 0);
    if (lines.length > 1) {
      const value = estimate(all, allSquare, run.histories, run.historyWeight);
      rows.push({ quantity: 'full_energy', layer: layer.name, lineKeV: null, ...value, unit: '1' });
    }
    const interacting = layout.interactingFigure + l;
    const ratio = partRatio(all, allSquare, sums.figureSum[interacting], sums.figureSquare[interacting]);
    rows.push({
      quantity: 'peak_to_total',
      layer: layer.name,
      lineKeV: null,
      mean: ratio?.mean ?? null,
      stdError: ratio?.stdError ?? null,
      unit: '1',
    });
    return rows;
  });
}

/** Whether the stack has lateral surfaces that photons can leave through. */
function hasSides(setup: Setup): boolean {
  return setup.extent !== null || setup.stack.some((layer) => layer.radiusCm !== null);
}

/** The spectra of a run; a bin where no history scored has standard error NaN (not known). */
export function spectraOf(run: RunFigures): Spectrum[] {
  const { layout, setup } = run;
  const spectra = [
    spectrum(run, 'transmitted', null, layout.transmittedCell),
    spectrum(run, 'reflected', null, layout.reflectedCell),
  ];
  if (hasSides(setup)) spectra.push(spectrum(run, 'side_escape', null, layout.sideEscapeCell));
  // Spectra of what a history leaves as a whole are not known of weighted ones.
  if (layout.weighted) return spectra;
  setup.stack.forEach((layer, l) => {
    if (layer.material === null) return;
    spectra.push(spectrum(run, 'deposited', layer.name, layout.depositedCell + l * layout.bins));
  });
  setup.stack.forEach((layer, l) => {
    const detector = layout.detectorOfLayer[l];
    if (detector < 0) return;
    spectra.push(spectrum(run, 'pulse_height', layer.name, layout.pulseHeightCell + detector * layout.bins));
  });
  spectra.push(...coincidenceSpectra(run));
  return spectra;
}

function spectrum(run: RunFigures, tally: SpectrumTally, layer: string | null, firstCell: number): Spectrum {
  const { layout, sums, histories, historyWeight } = run;
  const mean = new Float64Array(layout.bins);
  const stdError = new Float64Array(layout.bins);
  for (let bin = 0; bin < layout.bins; bin++) {
    const cell = firstCell + bin;
    const value = estimate(sums.cellSum[cell], sums.cellSquare[cell], histories, historyWeight);
    mean[bin] = value.mean;
    stdError[bin] = value.stdError ?? NaN;
  }
  return {
    tally,
    layer,
    energyLowKeV: layout.edgesKeV.slice(0, layout.bins),
    energyHighKeV: layout.edgesKeV.slice(1),
    mean,
    stdError,
  };
}
