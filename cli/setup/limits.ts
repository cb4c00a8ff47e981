/** Bounds of what a setup may ask for, and what stands where a key is left out. */
import { MAX_ENERGY_KEV, MIN_ENERGY_KEV } from '../../engine/setup.js';
import type { Range } from './fields.js';

/** A hundredth of an atom's radius to ten kilometres: outside it is a slip of the pen. */
export const MIN_LENGTH_CM = 1e-9;
export const MAX_LENGTH_CM = 1e6;
/** Osmium, the densest element, has 22.6 g/cm³. */
export const MAX_DENSITY_G_PER_CM3 = 30;

export const ENERGY: Range = {
  atLeast: MIN_ENERGY_KEV,
  atMost: MAX_ENERGY_KEV,
  words: 'between 1 keV and 20 MeV',
};
/** A length that something has. */
export const SIZE: Range = { moreThan: 0, atMost: MAX_LENGTH_CM };
/** A length that may be nothing. */
export const DISTANCE: Range = { atLeast: 0, atMost: MAX_LENGTH_CM };
export const DENSITY: Range = { moreThan: 0, atMost: MAX_DENSITY_G_PER_CM3 };

export const MAX_TEXT = 500;
export const MAX_NAME = 64;
export const MAX_LINES = 1000;
export const MAX_MATERIALS = 200;
export const MAX_WINDOWS = 100;
export const MAX_DOSE_POINTS = 100;
export const MAX_DEPTH_BINS = 10_000;
export const MAX_GRID_ENERGIES = 1000;
/** Over all spectra together: 16 MB of sums and sums of squares for each worker thread. */
export const MAX_BINS = 1_000_000;
export const MAX_HISTORIES = 1e13;

export const DEFAULTS = {
  seed: 'thickset',
  histories: 1e6,
  depthBins: 100,
  cutoffKeV: MIN_ENERGY_KEV,
} as const;
