/** The warnings a run can give: one closed vocabulary, each given once with its count. */
import { materialCoefficients } from '../materials/index.js';
import { electronRangeWarning, fastestElectron } from './electron-range.js';
import type { Balance, Warning } from './result.js';
import type { Oddities } from './run-sums.js';
import type { Setup } from './setup.js';
import { PAIR_THRESHOLD_KEV } from './constants.js';

/** Warnings that stand before the first history is played. */
export function setupWarnings(setup: Setup, topKeV: number): Warning[] {
  const warnings: Warning[] = [];
  if (!setup.physics.pair && topKeV > PAIR_THRESHOLD_KEV) {
    warnings.push({
      code: 'pair_off',
      message:
        `the source reaches ${topKeV} keV but pair production is switched off: ` +
        'attenuation is too low above 1022 keV and annihilation quanta are missing',
      count: 1,
    });
  }
  return [...warnings, ...electronRangeWarnings(setup, topKeV)];
}

/** Detector layers that are thin against the range of the fastest electrons set free in them. */
function electronRangeWarnings(setup: Setup, topKeV: number): Warning[] {
  return setup.stack.flatMap(({ name, material, thicknessCm, detector }) => {
    if (detector === null || material === null) return [];
    const { photoelectric, total } = materialCoefficients(material, topKeV);
    const { warning } = electronRangeWarning({
      layer: name,
      material,
      thicknessCm,
      photonKeV: topKeV,
      electron: fastestElectron(topKeV, photoelectric / total),
    });
    return warning === null ? [] : [{ code: 'electron_range', message: warning, count: 1 }];
  });
}

/** Warnings from what was counted during the run. */
export function oddityWarnings({ dopplerGivenUp, strayed }: Readonly<Oddities>): Warning[] {
  return [
    {
      code: 'doppler_given_up',
      message: 'scatterings for which no electron momentum was found kept the free-electron energy',
      count: dopplerGivenUp,
    },
    {
      code: 'photons_strayed',
      message: 'photons were found outside the layer they were in',
      count: strayed,
    },
  ].filter(({ count }) => count > 0);
}

/** Doses that were asked for but cannot be scored in this transport. */
export function doseWarnings({ tally }: Setup, weighted: boolean): Warning[] {
  if (weighted || tally.dosePoints.length + (tally.depthProfile === null ? 0 : 1) === 0) return [];
  return [
    {
      code: 'dose_not_scored',
      message:
        'dose points and depth profiles are left unknown here: deep transport scores them, and it takes neither ' +
        'detector layers nor layers with an edge; run the stack without detector, extent and radius to get them',
      count: 1,
    },
  ];
}

/** Standard errors by which the mean energy of weighted histories may be off before it is told. */
const BALANCE_SIGMAS = 5;

/** Weighted histories conserve energy on the mean; too large a gap says that rare ones are missing. */
export function balanceWarnings({ relativeError, relativeStdError }: Balance): Warning[] {
  if (relativeStdError === undefined || relativeError <= BALANCE_SIGMAS * relativeStdError) return [];
  return [
    {
      code: 'balance_open',
      message:
        `energy in and energy accounted for differ by ${(100 * relativeError).toPrecision(2)} %, more than ` +
        `${BALANCE_SIGMAS} standard errors: rare histories are missing; run more histories`,
      count: 1,
    },
  ];
}
