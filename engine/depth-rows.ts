/** Depth profile of a layer: dose and energy by depth, and the half- and tenth-value layers of its curves. */
import {
  curveOf,
  equilibriumTenth,
  layerBetween,
  thicknessFor,
  type CurvePoint,
  type Thickness,
} from './attenuation-curve.js';
import { figureEstimate } from './figure-estimate.js';
import { doseUnit } from './dose-rows.js';
import type { DepthRow, QuantityRow } from './result.js';
import type { RunFigures } from './totals.js';

/** Rows of depth.arrow; none without a profile or where the transport scores none. */
export function depthRows(run: RunFigures): DepthRow[] {
  const { setup, layout } = run;
  const { dose } = layout;
  const { dose: quantities, depthProfile } = setup.tally;
  if (depthProfile === null || !layout.weighted) return [];
  const slices = Array.from({ length: dose.depthBins }, (_, bin) => bin);
  const sliceCm = setup.stack[dose.depthLayer].thicknessCm / dose.depthBins;
  const rows = (quantity: string, unit: string, figureOf: (bin: number) => number) =>
    slices.map((bin) => {
      const { mean, stdError } = figureEstimate(run, figureOf(bin));
      return {
        layer: depthProfile.layer,
        depthLowCm: bin * sliceCm,
        depthHighCm: (bin + 1) * sliceCm,
        quantity,
        mean: Number.isFinite(mean) ? mean : null,
        stdError: stdError !== null && Number.isFinite(stdError) ? stdError : null,
        unit,
      };
    });
  return [
    ...quantities.flatMap((quantity, d) => {
      const unit = doseUnit(quantity, true);
      return [
        ...rows(quantity, unit, (bin) => dose.insideFigure + bin * dose.doses + d),
        ...rows(`${quantity}_behind`, unit, (bin) => dose.behindFigure + bin * dose.doses + d),
        ...rows(
          `${quantity}_behind_uncollided`,
          unit,
          (bin) => dose.behindUncollidedFigure + bin * dose.doses + d,
        ),
      ];
    }),
    ...rows('deposited_energy', 'keV', (bin) => dose.depthDepositFigure + bin),
  ];
}

/** The curves of one dose quantity against the thickness of the layer profiled, if the stack ended with it. */
export function attenuationCurves(run: RunFigures, d: number): { broad: CurvePoint[]; narrow: CurvePoint[] } {
  const { dose } = run.layout;
  const sliceCm = run.setup.stack[dose.depthLayer].thicknessCm / dose.depthBins;
  const isBare = run.setup.stack.slice(0, dose.depthLayer).every(({ material }) => material === null);
  const free = figureEstimate(run, dose.farFreeFigure + d).mean;
  const start = isBare && Number.isFinite(free) ? free : null;
  const at = (figure: number) =>
    Array.from({ length: dose.depthBins }, (_, bin) => {
      const { mean, stdError } = figureEstimate(run, figure + bin * dose.doses + d);
      return { mean, stdError: stdError ?? 0 };
    });
  return {
    broad: curveOf(sliceCm, at(dose.behindFigure), start),
    narrow: curveOf(sliceCm, at(dose.behindUncollidedFigure), start),
  };
}

/** Half- and tenth-value layers, broad and narrow beam. */
export function valueLayerRows(run: RunFigures): QuantityRow[] {
  const { depthProfile, dose } = run.setup.tally;
  if (depthProfile === null || !run.layout.weighted) return [];
  return dose.flatMap((quantity, d) => {
    const { broad, narrow } = attenuationCurves(run, d);
    const ending = d === 0 ? '' : `_${quantity}`;
    return [
      ...rowsOf(broad, depthProfile.layer, '', ending),
      ...rowsOf(narrow, depthProfile.layer, 'narrow_', ending),
    ];
  });
}

function rowsOf(
  curve: readonly CurvePoint[],
  layer: string,
  beginning: string,
  ending: string,
): QuantityRow[] {
  const free = curve[0]?.thicknessCm === 0 ? curve[0].dose : null;
  const row = (name: string, thickness: Thickness | null): QuantityRow => ({
    quantity: `${beginning}${name}${ending}`,
    layer,
    lineKeV: null,
    mean: thickness?.mean ?? null,
    stdError: thickness?.stdError ?? null,
    unit: 'cm',
  });
  const first = (factor: number) => (free === null ? null : thicknessFor(curve, free / factor));
  const second = (factor: number) =>
    free === null ? null : layerBetween(curve, free / factor, free / factor ** 2);
  return [
    row('half_value_layer_1', first(2)),
    row('half_value_layer_2', second(2)),
    row('tenth_value_layer_1', first(10)),
    row('tenth_value_layer_2', second(10)),
    row('tenth_value_layer_equilibrium', equilibriumTenth(curve)),
  ];
}
