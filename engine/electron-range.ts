/**
 * Whether electrons stay where they are set free, as the transport assumes: their range against the thickness of the
 * layer. In reality those of a thin layer escape with part of their energy.
 */
import { csdaRangeGPerCm2, type Material } from '../materials/index.js';
import { ELECTRON_REST_KEV } from './constants.js';

/** Share of the thickness from which a range counts as long (common practice). */
export const LONG_RANGE_SHARE = 0.1;
/** Share of photoelectric absorption in all interactions from which photoelectrons count as being in play. */
export const PHOTOELECTRON_SHARE = 0.01;

const MIN_ELECTRON_KEV = 1;

export type ElectronOrigin = 'Compton edge' | 'photoelectron';

export interface FastestElectron {
  readonly energyKeV: number;
  readonly origin: ElectronOrigin;
}

/**
 * The fastest electron that photons of one energy set free: the photoelectron (its binding neglected), where
 * photoelectric absorption is not rare, or else the Compton recoil at 180°, 2 E² / (m c² + 2 E). A particle of a pair
 * gets E − 2 m c² at most, which is less than either.
 *
 * @param photoelectricShare share of photoelectric absorption in all interactions at this energy
 */
export function fastestElectron(photonKeV: number, photoelectricShare: number): FastestElectron {
  if (photoelectricShare >= PHOTOELECTRON_SHARE) return { energyKeV: photonKeV, origin: 'photoelectron' };
  const energyKeV = (2 * photonKeV ** 2) / (ELECTRON_REST_KEV + 2 * photonKeV);
  return { energyKeV, origin: 'Compton edge' };
}

export interface ElectronRange {
  readonly rangeCm: number;
  /** Range over thickness. */
  readonly share: number;
  /** What to tell the user; null where the range is short. */
  readonly warning: string | null;
}

export interface RangeQuestion {
  readonly layer: string;
  readonly material: Material;
  readonly thicknessCm: number;
  readonly photonKeV: number;
  readonly electron: FastestElectron;
}

/**
 * CSDA range of the fastest electron in a layer and its share of the thickness, with a warning when that is over 10 %.
 * Electrons below 1 keV count as 1 keV.
 *
 * @throws MaterialError for an electron above 20 MeV
 */
export function electronRangeWarning(question: RangeQuestion): ElectronRange {
  const { layer, material, thicknessCm, photonKeV, electron } = question;
  const energyKeV = Math.max(MIN_ELECTRON_KEV, electron.energyKeV);
  const rangeCm = csdaRangeGPerCm2(material, energyKeV) / material.densityGPerCm3;
  const share = rangeCm / thicknessCm;
  if (!(share > LONG_RANGE_SHARE)) return { rangeCm, share, warning: null };
  const cause = `${electron.origin} of ${round(photonKeV)} keV photons`;
  const warning =
    `layer ${layer}: electrons of ${round(electron.energyKeV)} keV (${cause}) have a range of ` +
    `${round(rangeCm)} cm, ${Math.round(100 * share)} % of its ${round(thicknessCm)} cm; they deposit on the spot ` +
    `here but would escape in part, so that its deposited energy and full-energy counts come out too high`;
  return { rangeCm, share, warning };
}

/** Three significant digits, whole numbers kept. */
function round(value: number): string {
  return value >= 100 ? String(Math.round(value)) : String(Number(value.toPrecision(3)));
}
