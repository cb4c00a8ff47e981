/** What the detectors of a run register: smeared spectra, counts above the threshold and in windows. */
import type { Spectrum } from '../../engine/result.js';
import type { EnergyWindow, Resolution } from '../../engine/setup.js';
import { widthFromManifest, type ManifestLayer } from '../result/manifest.js';
import type { StoredResult } from '../result/stored-result.js';
import { pulsesOf, type Value } from './pulses.js';
import { registeredEdges, registeredSpectrum } from './registered-spectrum.js';
import { smear, type SmearedPulses } from './smear.js';
import { registeredCounts, windowCounts, type WindowCounts } from './windows.js';

/** Spectra that a detector registers pulse by pulse, with the figure of their full-energy pulses. */
const REGISTERED = { pulse_height: 'full_energy', anticoincidence: 'anticoincidence_full_energy' } as const;
export type RegisteredTally = keyof typeof REGISTERED;

export interface DetectorResponse {
  readonly layer: string;
  /** All pulses, or those without a pulse in another detector. */
  readonly tally: RegisteredTally;
  readonly resolution: Resolution | null;
  readonly thresholdKeV: number | null;
  /** As the run tallied it. */
  readonly tallied: Spectrum;
  readonly smeared: SmearedPulses;
  readonly spectrum: Spectrum;
  readonly registered: Value;
  readonly windows: readonly WindowCounts[];
}

/** Widths to take instead of those of the setup: null is none; a layer that is not in it keeps its own. */
export type WidthChoice = ReadonlyMap<string, Resolution | null>;

/** The responses of all detectors, in the order of the stack. */
export function detectorResponses(result: StoredResult, widths: WidthChoice = new Map()): DetectorResponse[] {
  return result.manifest.stack
    .filter(({ detector }) => detector)
    .flatMap((layer) =>
      (Object.keys(REGISTERED) as RegisteredTally[]).flatMap((tally) => {
        const tallied = result.spectra.find((found) => found.tally === tally && found.layer === layer.name);
        return tallied === undefined ? [] : [respond(result, layer, tally, tallied, widths)];
      }),
    );
}

function respond(
  { manifest, totals }: StoredResult,
  { name, response }: ManifestLayer,
  tally: RegisteredTally,
  tallied: Spectrum,
  widths: WidthChoice,
): DetectorResponse {
  const own = response?.fwhm ? widthFromManifest(response.fwhm) : null;
  const resolution = widths.has(name) ? widths.get(name)! : own;
  const thresholdKeV = response?.threshold_keV ?? null;
  const fullEnergy = totals.filter(({ quantity, layer }) => quantity === REGISTERED[tally] && layer === name);
  const smeared = smear(pulsesOf(tallied, fullEnergy, manifest.histories), resolution);
  const threshold = thresholdKeV ?? 0;
  return {
    layer: name,
    tally,
    resolution,
    thresholdKeV,
    tallied,
    smeared,
    spectrum: registeredSpectrum(
      { tally, layer: name },
      registeredEdges(tallied, smeared),
      smeared,
      threshold,
    ),
    registered: registeredCounts(smeared, threshold),
    windows: windowsOf(response?.windows ?? []).map((window) => windowCounts(smeared, threshold, window)),
  };
}

type ManifestWindows = NonNullable<ManifestLayer['response']>['windows'];

function windowsOf(windows: ManifestWindows): EnergyWindow[] {
  return windows.map(({ name, energy_low_keV: energyLowKeV, energy_high_keV: energyHighKeV }) => ({
    name,
    energyLowKeV,
    energyHighKeV,
  }));
}
