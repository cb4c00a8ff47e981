/** Responses, peaks and rates as they stand in the object that `--json` prints. */
import type { QuantityRow } from '../../engine/result.js';
import { photonsPerSecond } from '../dose-rates.js';
import { describeWidth, type ManifestSource } from '../result/manifest.js';
import { isExtensive } from '../text/quantities.js';
import type { Analysis } from './analysis.js';
import type { PeakRow } from './peaks/peak-row.js';
import type { Value } from './pulses.js';

type Json = Record<string, unknown>;

const valueJson = ({ mean, stdError }: Pick<QuantityRow, 'mean' | 'stdError'>, factor = 1): Json => ({
  mean: mean === null ? null : mean * factor,
  std_error: stdError === null ? null : stdError * factor,
});

/** Counts per second, and in the live time where there is one; nothing without an activity. */
function rates(value: Pick<QuantityRow, 'mean' | 'stdError'>, source: ManifestSource): Json {
  const perSecond = photonsPerSecond(source);
  if (perSecond === null) return {};
  const liveTime = source.live_time_s;
  return {
    per_second: valueJson(value, perSecond),
    in_live_time: liveTime === null ? null : valueJson(value, perSecond * liveTime),
  };
}

/** Every figure that grows with the source, per second and in the live time; empty without an activity. */
export function ratesJson(totals: readonly QuantityRow[], source: ManifestSource): Json[] {
  if (photonsPerSecond(source) === null) return [];
  return totals
    .filter(({ quantity, unit }) => isExtensive(quantity, unit))
    .map((row) => ({
      quantity: row.quantity,
      layer: row.layer,
      line_keV: row.lineKeV,
      unit: row.unit,
      ...rates(row, source),
    }));
}

/** One object for each detector, and one more where its pulses without another detector's are told apart. */
export function responseJson({ responses }: Analysis, source: ManifestSource): Json[] {
  const counts = (value: Value | null) => value && { ...valueJson(value), ...rates(value, source) };
  return responses.map((response) => ({
    layer: response.layer,
    tally: response.tally,
    fwhm: response.resolution && describeWidth(response.resolution),
    threshold_keV: response.thresholdKeV,
    registered: counts(response.registered),
    windows: response.windows.map(({ window, gross, net }) => ({
      name: window.name,
      energy_low_keV: window.energyLowKeV,
      energy_high_keV: window.energyHighKeV,
      gross: counts(gross),
      net: counts(net),
    })),
  }));
}

export function peaksJson({ peaks }: Analysis): Json[] {
  return peaks.map((row: PeakRow) => ({
    feature: row.feature,
    layer: row.layer,
    line_keV: row.lineKeV,
    x_ray: row.xRay,
    energy_keV: row.energyKeV,
    mean: row.mean,
    std_error: row.stdError,
    unit: row.unit,
    status: row.status,
  }));
}
