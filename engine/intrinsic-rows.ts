/**
 * Efficiencies of detectors per photon of a line: absolute (per photon of the line emitted) and intrinsic (per photon
 * of the line that strikes the front face). Directions do not depend on energies, so `incident` holds for each line.
 */
import type { QuantityRow } from './result.js';
import { estimate, jointRatio } from './statistics.js';
import { FIGURE } from './tally-layout.js';
import type { RunFigures } from './totals.js';

/** A relative error of `incident` below this is rounding: every history is incident with the same weight. */
const ROUNDING = 1e-12;

/** `absolute_full_energy` where there are several lines, `intrinsic_full_energy` by line, `intrinsic_interacting`. */
export function intrinsicRows(run: RunFigures): QuantityRow[] {
  const { setup, layout } = run;
  const { lines } = setup.source.emission;
  const photons = lines.reduce((sum, { perDecay }) => sum + perDecay, 0);
  return setup.stack.flatMap((layer, l) => {
    const detector = layout.detectorOfLayer[l];
    if (detector < 0) return [];
    const product = layout.incidentProductFigure + detector * (1 + layout.lines);
    const interacting = intrinsicRow(run, layout.interactingFigure + l, product, 1);
    const rows: QuantityRow[] = [
      { quantity: 'intrinsic_interacting', layer: layer.name, lineKeV: null, ...interacting, unit: '1' },
    ];
    lines.forEach(({ energyKeV, perDecay }, i) => {
      const figure = layout.fullEnergyFigure + detector * layout.lines + i;
      const share = perDecay / photons;
      const of = { layer: layer.name, lineKeV: energyKeV, unit: '1' };
      if (lines.length > 1) {
        rows.push({ quantity: 'absolute_full_energy', ...of, ...absolute(run, figure, share) });
      }
      const intrinsic = intrinsicRow(run, figure, product + 1 + i, share);
      rows.push({ quantity: 'intrinsic_full_energy', ...of, ...intrinsic });
    });
    return rows;
  });
}

type Value = Pick<QuantityRow, 'mean' | 'stdError'>;

function absolute({ sums, histories, historyWeight }: RunFigures, figure: number, share: number): Value {
  return estimate(sums.figureSum[figure], sums.figureSquare[figure], histories, historyWeight / share);
}

/** A figure per incident photon of a line with this share of all photons. */
function intrinsicRow(
  { sums, histories }: RunFigures,
  figure: number,
  product: number,
  share: number,
): Value {
  const { figureSum, figureSquare } = sums;
  const incident = estimate(figureSum[FIGURE.incident], figureSquare[FIGURE.incident], histories);
  if (incident.mean === 0) return { mean: null, stdError: null };
  if ((incident.stdError ?? 0) <= ROUNDING * incident.mean) {
    return estimate(figureSum[figure], figureSquare[figure], histories, 1 / (share * incident.mean));
  }
  const { mean, stdError } = jointRatio(
    { sum: figureSum[figure], square: figureSquare[figure] },
    { sum: figureSum[FIGURE.incident], square: figureSquare[FIGURE.incident] },
    figureSum[product],
  );
  return { mean: mean / share, stdError: stdError === null ? null : stdError / share };
}
