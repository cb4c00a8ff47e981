/** Rows of dose: at the dose points and at the two faces, with what is uncollided and what the stack takes away. */
import { figureEstimate } from './figure-estimate.js';
import type { QuantityRow, Reliability } from './result.js';
import { reliabilityOf } from './reliability.js';
import type { DosePoint, DoseQuantity, Setup } from './setup.js';
import type { Estimate } from './statistics.js';
import type { RunFigures } from './totals.js';

const UNITS: Readonly<Record<DoseQuantity, string>> = {
  air_kerma: 'pGy',
  ambient_dose: 'pSv',
  effective_dose_ap: 'pSv',
};

/** Unit of a dose quantity at a point; at a face, where it is per photon per area of the source, times cm². */
export function doseUnit(quantity: DoseQuantity, isPlane: boolean): string {
  return isPlane ? `${UNITS[quantity]}·cm²` : UNITS[quantity];
}

/** The ratios belong to the first quantity asked for; those of others bear its name. */
export function ratioName(ratio: 'dose_transmission' | 'buildup', quantity: string, index: number): string {
  return index === 0 ? ratio : `${ratio}_${quantity}`;
}

/** What is known at one place for one quantity. */
interface PlaceDose {
  readonly whole: Estimate;
  readonly uncollided: number;
  readonly free: number;
  readonly reliability: Reliability | null;
}

/** Rows of all dose quantities; values are null where the transport scores no dose. */
export function doseRows(run: RunFigures): QuantityRow[] {
  const { setup } = run;
  const rows = setup.tally.dose.flatMap((quantity, d) => [
    ...setup.tally.dosePoints.flatMap((point, p) => pointRows(run, quantity, d, point, p)),
    ...faceRows(run, quantity, d),
  ]);
  if (run.layout.weighted) return rows;
  // Analog transport scores at the faces alone.
  return rows.map((row) => (row.layer === null ? row : unknown(row)));
}

function unknown({ quantity, layer, lineKeV, unit }: QuantityRow): QuantityRow {
  return { quantity, layer, lineKeV, mean: null, stdError: null, unit };
}

function pointRows(
  run: RunFigures,
  quantity: DoseQuantity,
  d: number,
  point: DosePoint,
  p: number,
): QuantityRow[] {
  if (hasEnd(run.setup)) {
    const { dose } = run.layout;
    const offset = p * dose.doses + d;
    const place = placeDose(
      run,
      dose.pointFigure + offset,
      dose.pointUncollidedFigure + offset,
      dose.pointFreeFigure + offset,
    );
    return placeRows(quantity, d, point.name, doseUnit(quantity, false), place);
  }
  // Layers and sources without end look the same from everywhere on their side.
  const unit = doseUnit(quantity, true);
  return placeRows(quantity, d, point.name, unit, point.zCm > 0 ? farDose(run, d) : frontDose(run, d));
}

function hasEnd({ source }: Setup): boolean {
  return source.shape.kind !== 'diffuse' && source.shape.kind !== 'embedded';
}

function faceRows(run: RunFigures, quantity: DoseQuantity, d: number): QuantityRow[] {
  const unit = doseUnit(quantity, true);
  const front = figureEstimate(run, run.layout.dose.frontFigure + d);
  return [
    ...placeRows(quantity, d, null, unit, farDose(run, d)),
    makeRow(`${quantity}_reflected`, null, unit, front, reliability(run, run.layout.dose.frontFigure + d)),
  ];
}

function farDose(run: RunFigures, d: number): PlaceDose {
  const { dose } = run.layout;
  return placeDose(run, dose.farFigure + d, dose.farUncollidedFigure + d, dose.farFreeFigure + d);
}

/** On the source side: what comes back, and what arrives (nothing from a source inside). */
function frontDose(run: RunFigures, d: number): PlaceDose {
  const { dose } = run.layout;
  const back = figureEstimate(run, dose.frontFigure + d);
  const inside = run.setup.source.shape.kind === 'embedded';
  const free = inside ? NaN : meanOf(run, dose.farFreeFigure + d);
  const arriving = inside ? 0 : free;
  return {
    whole: { mean: back.mean + arriving, stdError: back.stdError },
    uncollided: inside ? NaN : arriving,
    free,
    reliability: reliability(run, dose.frontFigure + d),
  };
}

function placeDose(run: RunFigures, whole: number, uncollided: number, free: number): PlaceDose {
  return {
    whole: figureEstimate(run, whole),
    uncollided: meanOf(run, uncollided),
    free: meanOf(run, free),
    reliability: reliability(run, whole),
  };
}

function placeRows(
  quantity: DoseQuantity,
  d: number,
  place: string | null,
  unit: string,
  { whole, uncollided, free, reliability }: PlaceDose,
): QuantityRow[] {
  const over = (divisor: number): Estimate => ({
    mean: Number.isFinite(divisor) ? whole.mean / divisor : NaN,
    stdError: whole.stdError === null ? null : whole.stdError / divisor,
  });
  const exact: Estimate = { mean: uncollided, stdError: 0 };
  const collided: Estimate = { mean: whole.mean - uncollided, stdError: whole.stdError };
  const rest = reliability;
  return [
    makeRow(quantity, place, unit, whole, rest),
    makeRow(`${quantity}_uncollided`, place, unit, exact, null),
    makeRow(`${quantity}_collided`, place, unit, collided, rest),
    makeRow(ratioName('dose_transmission', quantity, d), place, '1', over(free), rest),
    makeRow(ratioName('buildup', quantity, d), place, '1', over(uncollided), rest),
  ];
}

function meanOf({ sums, histories, historyWeight }: RunFigures, figure: number): number {
  return (historyWeight * sums.figureSum[figure]) / histories;
}

function reliability({ sums, layout, histories }: RunFigures, figure: number): Reliability | null {
  return reliabilityOf(sums, layout, figure, histories);
}

/** A figure that has no bound, or that nothing is known of, is null. */
function makeRow(
  quantity: string,
  layer: string | null,
  unit: string,
  { mean, stdError }: Estimate,
  reliability: Reliability | null,
): QuantityRow {
  const known = Number.isFinite(mean);
  const error = known && stdError !== null && Number.isFinite(stdError) ? stdError : null;
  const row = { quantity, layer, lineKeV: null, mean: known ? mean : null, stdError: error, unit };
  return reliability !== null && known ? { ...row, reliability } : row;
}
