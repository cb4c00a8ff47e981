/** Physical constants of the engine (CODATA 2018). */

/** Electron rest energy m c², keV. */
export const ELECTRON_REST_KEV = 510.99895;

/** h c, keV·Å: photon momentum transfer x = sin(θ/2)/λ = E sin(θ/2) / HC. */
export const HC_KEV_ANGSTROM = 12.398419843320026;

/** Fine-structure constant; 1 atomic unit of momentum is α m c. */
export const FINE_STRUCTURE = 7.2973525693e-3;

/** Threshold of pair production, 2 m c², keV. */
export const PAIR_THRESHOLD_KEV = 2 * ELECTRON_REST_KEV;
