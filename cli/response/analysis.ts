/** What is made of a stored run without running it again: responses of its detectors and the features they show. */
import type { StoredResult } from '../result/stored-result.js';
import { findPeaks } from './peaks/find-peaks.js';
import type { PeakRow } from './peaks/peak-row.js';
import { detectorResponses, type DetectorResponse, type WidthChoice } from './respond.js';

export interface Analysis {
  readonly responses: readonly DetectorResponse[];
  readonly peaks: readonly PeakRow[];
}

/** @param widths widths of peaks to take instead of those of the setup */
export function analyse(result: StoredResult, widths?: WidthChoice): Analysis {
  const responses = detectorResponses(result, widths);
  return { responses, peaks: findPeaks(result, responses) };
}
