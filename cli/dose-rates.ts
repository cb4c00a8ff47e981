/** Doses per photon turned into dose rates by the activity of the source. */
import type { QuantityRow } from '../engine/result.js';
import type { ManifestSource } from './result/manifest.js';

const SECONDS_PER_HOUR = 3600;
/** From pico to micro. */
const MICRO_PER_PICO = 1e-6;

/** A dose rate at a point, in micro units per hour. */
export interface DoseRate {
  readonly row: QuantityRow;
  readonly mean: number;
  readonly stdError: number | null;
  readonly unit: 'uGy/h' | 'uSv/h';
}

/** Photons the source emits in a second; null without an activity. */
export function photonsPerSecond({
  activity_Bq,
  photons_per_decay,
}: Pick<ManifestSource, 'activity_Bq' | 'photons_per_decay'>): number | null {
  return activity_Bq === null ? null : activity_Bq * (photons_per_decay ?? 1);
}

/** Rates of all doses at points; none without an activity. */
export function doseRates(totals: readonly QuantityRow[], source: ManifestSource): DoseRate[] {
  const perSecond = photonsPerSecond(source);
  if (perSecond === null) return [];
  const factor = perSecond * SECONDS_PER_HOUR * MICRO_PER_PICO;
  return totals.flatMap((row) => {
    if ((row.unit !== 'pGy' && row.unit !== 'pSv') || row.mean === null) return [];
    const stdError = row.stdError === null ? null : row.stdError * factor;
    return [{ row, mean: row.mean * factor, stdError, unit: row.unit === 'pGy' ? 'uGy/h' : 'uSv/h' }];
  });
}

const PREFIXES = ['p', 'n', 'µ', 'm', '', 'k'] as const;
const MICRO = 2;

/** A rate with the prefix that keeps it between 1 and 1000, as people read it: 2.5 µSv/h, 13 mSv/h. */
export function readableRate({ mean, stdError, unit }: Pick<DoseRate, 'mean' | 'stdError' | 'unit'>): {
  mean: number;
  stdError: number | null;
  unit: string;
} {
  const thousands = mean > 0 ? Math.floor(Math.log10(mean) / 3 + 1e-12) : 0;
  const place = Math.max(0, Math.min(PREFIXES.length - 1, MICRO + thousands));
  const factor = 1000 ** (MICRO - place);
  return {
    mean: mean * factor,
    stdError: stdError === null ? null : stdError * factor,
    unit: `${PREFIXES[place]}${unit.slice(1)}`,
  };
}
