/** Figures and spectra of detectors that count together, from the sums of a run. */
import { pairsOf, type CoincidenceLayout } from './coincidence.js';
import type { QuantityRow, Spectrum, SpectrumTally } from './result.js';
import { estimate } from './statistics.js';
import { fullEnergyLines } from './tally-layout.js';
import type { RunFigures } from './totals.js';

/** Sum and sum of squares over histories. */
interface HistorySums {
  readonly sum: number;
  readonly square: number;
}

/**
 * By detector: `anticoincidence`, `coincidence`, `anticoincidence_full_energy` by line; `pair_coincidence` of each pair,
 * named "a + b"; `sum_interacting` and `sum_full_energy` of all detectors together. Empty where not asked for.
 */
export function coincidenceRows(run: RunFigures): QuantityRow[] {
  const layout = run.layout.coincidence;
  if (layout === null) return [];
  const names = Array.from(layout.layerOfDetector, (layer) => run.setup.stack[layer].name);
  return [
    ...names.flatMap((name, detector) => detectorRows(run, layout, name, detector)),
    ...pairsOf(names.length).map(([a, b], pair) =>
      makeRow(
        run,
        figureSums(run, layout.pairFigure + pair),
        'pair_coincidence',
        `${names[a]} + ${names[b]}`,
      ),
    ),
    makeRow(run, figureSums(run, layout.anyFigure), 'sum_interacting', null),
    ...lineRows(run, layout.sumFullEnergyFigure, 'sum_full_energy', null),
  ];
}

function detectorRows(
  run: RunFigures,
  layout: CoincidenceLayout,
  name: string,
  detector: number,
): QuantityRow[] {
  const alone = figureSums(run, layout.aloneFigure + detector);
  const pulses = figureSums(run, run.layout.interactingFigure + layout.layerOfDetector[detector]);
  return [
    makeRow(run, alone, 'anticoincidence', name),
    makeRow(run, difference(pulses, alone), 'coincidence', name),
    ...lineRows(
      run,
      layout.aloneFullEnergyFigure + detector * run.layout.lines,
      'anticoincidence_full_energy',
      name,
    ),
  ];
}

/** A row for each line, and one for all together where there are several. */
function lineRows(run: RunFigures, first: number, quantity: string, layer: string | null): QuantityRow[] {
  const lines = fullEnergyLines(run.setup);
  const byLine = lines.map((_, line) => figureSums(run, first + line));
  const rows = lines.map((line, i) => makeRow(run, byLine[i], quantity, layer, line?.energyKeV ?? null));
  if (lines.length > 1) {
    // A history is of one line, so squares add up too.
    const sum = byLine.reduce((all, part) => all + part.sum, 0);
    const square = byLine.reduce((all, part) => all + part.square, 0);
    rows.push(makeRow(run, { sum, square }, quantity, layer));
  }
  return rows;
}

/** By detector the spectra of lone pulses and of the others; the spectrum of the sums. Empty where not asked for. */
export function coincidenceSpectra(run: RunFigures): Spectrum[] {
  const { layout, setup } = run;
  if (layout.coincidence === null) return [];
  const { aloneCell, sumCell, layerOfDetector } = layout.coincidence;
  const spectra = [...layerOfDetector].flatMap((layer, detector) => {
    const { name } = setup.stack[layer];
    const alone = (bin: number) => cellSums(run, aloneCell + detector * layout.bins + bin);
    const pulses = (bin: number) => cellSums(run, layout.pulseHeightCell + detector * layout.bins + bin);
    return [
      makeSpectrum(run, 'anticoincidence', name, alone),
      makeSpectrum(run, 'coincidence', name, (bin) => difference(pulses(bin), alone(bin))),
    ];
  });
  return [...spectra, makeSpectrum(run, 'pulse_height_sum', null, (bin) => cellSums(run, sumCell + bin))];
}

function figureSums({ sums }: RunFigures, figure: number): HistorySums {
  return { sum: sums.figureSum[figure], square: sums.figureSquare[figure] };
}

function cellSums({ sums }: RunFigures, cell: number): HistorySums {
  return { sum: sums.cellSum[cell], square: sums.cellSquare[cell] };
}

/** A pulse is either alone or not, so sums and squares of those that are not are what is left; rounding apart. */
function difference(all: HistorySums, part: HistorySums): HistorySums {
  const rounding = 1e-12 * all.square;
  const square = all.square - part.square;
  return square > rounding ? { sum: all.sum - part.sum, square } : { sum: 0, square: 0 };
}

function makeRow(
  { histories, historyWeight }: RunFigures,
  { sum, square }: HistorySums,
  quantity: string,
  layer: string | null,
  lineKeV: number | null = null,
): QuantityRow {
  const { mean, stdError } = estimate(sum, square, histories, historyWeight);
  return { quantity, layer, lineKeV, mean, stdError, unit: '1' };
}

function makeSpectrum(
  { layout, histories, historyWeight }: RunFigures,
  tally: SpectrumTally,
  layer: string | null,
  sumsOf: (bin: number) => HistorySums,
): Spectrum {
  const mean = new Float64Array(layout.bins);
  const stdError = new Float64Array(layout.bins);
  for (let bin = 0; bin < layout.bins; bin++) {
    const { sum, square } = sumsOf(bin);
    const value = estimate(sum, square, histories, historyWeight);
    mean[bin] = value.mean;
    stdError[bin] = value.stdError ?? NaN;
  }
  const { edgesKeV, bins } = layout;
  return {
    tally,
    layer,
    energyLowKeV: edgesKeV.slice(0, bins),
    energyHighKeV: edgesKeV.slice(1),
    mean,
    stdError,
  };
}
