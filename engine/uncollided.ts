/**
 * Photons that go through the stack without a collision, by integrals instead of chance: their number, energy,
 * spectrum and dose are exact in deep transport, and what would be there without the stack likewise.
 *
 * Fluence and current of a source over a plane, behind an optical thickness τ, are per photon per area of the source:
 * those of a beam by exp(−τ/w), those of isotropic ones by exponential integrals E_n(τ). A single point or disc in front
 * of layers without end gives, summed over the plane, what sources spread over the plane give at one place.
 */
import { attenuationPerCm } from './deep/grid.js';
import type { DoseLayout } from './dose-layout.js';
import { cellOf } from './energy-grid.js';
import { exponentialIntegral } from './exponential-integrals.js';
import { DOSE_LINE, type Problem } from './problem.js';
import type { DosePoint } from './setup.js';
import { FIGURE } from './tally-layout.js';
import { uncollidedAtPoint } from './uncollided-points.js';

/** What every history adds, by figure, and by bin of the two spectra. Infinity: more than any number. */
export interface Constants {
  readonly figures: Float64Array;
  readonly transmitted: Float64Array;
  readonly reflected: Float64Array;
}

/** An energy that stands for a part of the source. */
interface SourcePart {
  readonly energyKeV: number;
  readonly share: number;
}

/** Gauss–Legendre nodes of order 2, as shares of a piece. */
const GAUSS = [0.5 - Math.sqrt(1 / 12), 0.5 + Math.sqrt(1 / 12)];

/** The constants of a problem. */
export function uncollidedConstants(problem: Problem, points: readonly DosePoint[]): Constants {
  const { bins, figures } = problem.tally;
  const constants = {
    figures: new Float64Array(figures),
    transmitted: new Float64Array(bins),
    reflected: new Float64Array(bins),
  };
  for (const part of sourceParts(problem)) addPart(problem, points, part, constants);
  return constants;
}

/** Lines as they are; bins of a continuum cut at all edges of spectra and tables. */
function sourceParts(problem: Problem): SourcePart[] {
  const { cumulative, lowKeV, highKeV } = problem.emission;
  const edges = [...problem.tally.edgesKeV, ...problem.grid.nodesKeV].sort((a, b) => a - b);
  return Array.from(cumulative).flatMap((upTo, i) => {
    const share = upTo - (i > 0 ? cumulative[i - 1] : 0);
    const [low, high] = [lowKeV[i], highKeV[i]];
    if (low === high) return [{ energyKeV: low, share }];
    const cuts = [low, ...edges.filter((edge) => edge > low && edge < high), high];
    return cuts.slice(1).flatMap((end, c) => {
      const width = end - cuts[c];
      return GAUSS.map((place) => ({
        energyKeV: cuts[c] + place * width,
        share: (share * width) / (2 * (high - low)),
      }));
    });
  });
}

function addPart(
  problem: Problem,
  points: readonly DosePoint[],
  { energyKeV, share }: SourcePart,
  constants: Constants,
): void {
  const { tally } = problem;
  const { dose } = tally;
  const depths = opticalDepths(problem, energyKeV);
  const dosePer = dosesPerFluence(problem, energyKeV);
  const bin = tally.edgesKeV.findIndex((edge) => edge > energyKeV) - 1;
  const add = (figure: number, value: number) => (constants.figures[figure] += share * value);
  const addDoses = (figure: number, fluence: number) =>
    dosePer.forEach((coefficient, d) => add(figure + d, coefficient * fluence));

  const far = crossing(problem, depths, tally.layers, true);
  add(FIGURE.transmitted, far.current);
  add(FIGURE.transmittedEnergy, far.current * energyKeV);
  add(FIGURE.uncollided, far.current);
  constants.transmitted[bin] += share * far.current;
  addDoses(dose.farFigure, far.fluence);
  addDoses(dose.farUncollidedFigure, far.fluence);
  addDoses(dose.farFreeFigure, freeFluence(problem));
  if (problem.source.kind === 'embedded') {
    const front = crossing(problem, depths, 0, false);
    add(FIGURE.reflected, front.current);
    add(FIGURE.reflectedEnergy, front.current * energyKeV);
    constants.reflected[bin] += share * front.current;
    addDoses(dose.frontFigure, front.fluence);
  }
  points.slice(0, dose.points).forEach((point, p) => {
    const { behindStack, free } = uncollidedAtPoint(problem, point, sum(depths));
    addDoses(dose.pointFigure + p * dose.doses, behindStack);
    addDoses(dose.pointUncollidedFigure + p * dose.doses, behindStack);
    addDoses(dose.pointFreeFigure + p * dose.doses, free);
  });
  if (dose.depthBins > 0) addDepths(problem, dose, depths, addDoses);
}

/** Optical thickness of each layer. */
function opticalDepths(problem: Problem, energyKeV: number): number[] {
  return Array.from(
    { length: problem.layers },
    (_, layer) =>
      attenuationPerCm(problem, problem.slotOfLayer[layer], energyKeV) *
      (problem.boundariesCm[layer + 1] - problem.boundariesCm[layer]),
  );
}

function dosesPerFluence(problem: Problem, energyKeV: number): number[] {
  const cell = cellOf(problem.grid, energyKeV);
  return Array.from({ length: problem.tally.dose.doses }, (_, d) => {
    const at = (d * problem.cellCount + cell) * DOSE_LINE;
    return problem.doseLines[at] + problem.doseLines[at + 1] * energyKeV;
  });
}

const sum = (values: readonly number[]) => values.reduce((total, value) => total + value, 0);

interface Crossing {
  readonly current: number;
  readonly fluence: number;
}

/** Uncollided photons at boundary `to`, of those on their way to it; per history. */
function crossing(problem: Problem, depths: readonly number[], to: number, forwards: boolean): Crossing {
  if (problem.source.kind !== 'embedded') return plane(problem, sum(depths.slice(0, to)));
  const own = problem.sourceLayer;
  const between = sum(forwards ? depths.slice(own + 1, to) : depths.slice(to, own));
  return fromLayer(between, depths[own]);
}

/** Per history, behind an optical thickness. */
function plane({ source, beamCosine }: Problem, depth: number): Crossing {
  if (source.kind === 'beam') {
    const current = Math.exp(-depth / beamCosine);
    return { current, fluence: current / beamCosine };
  }
  const likeCosine = source.kind === 'diffuse' && source.law === 'isotropic';
  const n = likeCosine ? 2 : 1;
  return { current: n * exponentialIntegral(n + 1, depth), fluence: n * exponentialIntegral(n, depth) };
}

/** From an emitting layer of optical thickness `own`, behind another thickness. */
function fromLayer(between: number, own: number): Crossing {
  const mean = (n: number) =>
    own < 1e-9
      ? exponentialIntegral(n - 1, between + own / 2) / 2
      : (exponentialIntegral(n, between) - exponentialIntegral(n, between + own)) / (2 * own);
  return { current: mean(3), fluence: mean(2) };
}

function freeFluence(problem: Problem): number {
  return problem.source.kind === 'embedded' ? NaN : plane(problem, 0).fluence;
}

/** Uncollided dose in and behind each slice of the depth profile. */
function addDepths(
  problem: Problem,
  dose: DoseLayout,
  depths: readonly number[],
  addDoses: (figure: number, fluence: number) => void,
): void {
  const { depthBins, depthLayer, doses } = dose;
  const step = depths[depthLayer] / depthBins;
  const isSource = problem.source.kind === 'embedded' && problem.sourceLayer === depthLayer;
  const backwards = problem.source.kind === 'embedded' && problem.sourceLayer > depthLayer;
  const flow = (n: number) => {
    if (problem.source.kind !== 'embedded')
      return plane(problem, sum(depths.slice(0, depthLayer)) + n * step);
    const own = problem.sourceLayer;
    if (backwards) {
      return fromLayer(sum(depths.slice(depthLayer + 1, own)) + (depthBins - n) * step, depths[own]);
    }
    return fromLayer(sum(depths.slice(own + 1, depthLayer)) + n * step, depths[own]);
  };
  for (let bin = 0; bin < depthBins; bin++) {
    const lost = isSource ? NaN : Math.abs(flow(bin).current - flow(bin + 1).current);
    const inside = isSource ? insideSource(bin, depthBins, step) : step > 0 ? lost / step : flow(bin).fluence;
    addDoses(dose.insideFigure + bin * doses, inside);
    // A stack that ends in a slice, on the mean over it.
    const behind = isSource || backwards ? NaN : inside;
    addDoses(dose.behindFigure + bin * doses, behind);
    addDoses(dose.behindUncollidedFigure + bin * doses, behind);
  }
}

/** Mean uncollided fluence in a slice of the emitting layer: (2 − E₂(to the left) − E₂(to the right))/(2 t). */
function insideSource(bin: number, bins: number, step: number): number {
  const meanE2 = (n: number) =>
    (exponentialIntegral(3, n * step) - exponentialIntegral(3, (n + 1) * step)) / step;
  return (2 - meanE2(bin) - meanE2(bins - 1 - bin)) / (2 * bins * step);
}
