/** A run played in this thread as the result that its folder would hold. */
import { packResult, type StoredResult } from '../../cli/result/stored-result.js';
import { detectorXRays } from '../../engine/detector-x-rays.js';
import type { Played } from '../engine/slab-run.js';

export function storedRun({ setup, histories, totals, spectra }: Played): StoredResult {
  const result = {
    setup,
    histories,
    batches: 1,
    totals,
    spectra,
    xRays: detectorXRays(setup),
    balance: { energyInKeV: 1, energyDepositedKeV: 1, energyOutKeV: 0, relativeError: 0 },
    warnings: [],
    timings: { wallS: 1, workerS: 1, historiesPerSecond: histories },
    stopped: 'histories' as const,
  };
  return packResult(result, { setupText: null, threads: 1, finished: new Date(0) });
}
