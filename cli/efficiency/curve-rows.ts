/** An efficiency curve as a table: a row for each energy and detector. */
import type { QuantityRow } from '../../engine/result.js';

/** The figures of a row, in the order of its columns. */
export const CURVE_QUANTITIES = [
  'full_energy',
  'interacting',
  'intrinsic_full_energy',
  'intrinsic_interacting',
  'peak_to_total',
  'incident',
] as const;

export type CurveQuantity = (typeof CURVE_QUANTITIES)[number];

/** What is fitted: efficiencies per photon emitted. */
export const FITTED_QUANTITIES = ['full_energy', 'interacting'] as const;

export type FittedQuantity = (typeof FITTED_QUANTITIES)[number];

/** Of the polynomials that are fitted. */
export const HIGHEST_DEGREE = 6;

export interface CurveValue {
  readonly mean: number | null;
  readonly stdError: number | null;
}

export interface CurveRow extends Readonly<Record<CurveQuantity, CurveValue>> {
  readonly energyKeV: number;
  readonly layer: string;
  readonly histories: number;
}

const UNKNOWN: CurveValue = { mean: null, stdError: null };

/** The rows of these detectors from the totals of all energies, detector by detector. */
export function curveRows(
  energies: readonly { readonly energyKeV: number; readonly histories: number }[],
  totals: readonly QuantityRow[],
  detectors: readonly string[],
): CurveRow[] {
  const found = new Map(totals.map((row) => [keyOf(row.quantity, row.layer, row.lineKeV), row] as const));
  const valueOf = (quantity: CurveQuantity, layer: string, energyKeV: number): CurveValue => {
    const row = found.get(keyOf(quantity, quantity === 'incident' ? null : layer, energyKeV));
    return row ? { mean: row.mean, stdError: row.stdError } : UNKNOWN;
  };
  return detectors.flatMap((layer) =>
    energies.map(({ energyKeV, histories }) => ({
      energyKeV,
      layer,
      histories,
      ...(Object.fromEntries(
        CURVE_QUANTITIES.map((quantity) => [quantity, valueOf(quantity, layer, energyKeV)]),
      ) as Record<CurveQuantity, CurveValue>),
    })),
  );
}

function keyOf(quantity: string, layer: string | null, lineKeV: number | null): string {
  return JSON.stringify([quantity, layer, lineKeV]);
}
