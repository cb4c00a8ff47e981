/**
 * Where one interaction leaves what it sets free: photons with their energy and the cosine of their direction to that
 * of the photon that came in (an isotropic photon has a uniform cosine), azimuth left to the history loop.
 */

/** Photons one interaction may set free: fluorescence cascade, two quanta, bremsstrahlung of two particles. */
export const MAX_SECONDARIES = 256;

export class Secondaries {
  count = 0;
  readonly energyKeV = new Float64Array(MAX_SECONDARIES);
  readonly cosine = new Float64Array(MAX_SECONDARIES);
  /** 1: flies exactly opposite to the one before it. */
  readonly opposite = new Uint8Array(MAX_SECONDARIES);
  /**
   * What the direction is made of, for those who need its density: speed β of the electron that radiated the photon
   * (0: isotropic), the cosine of its first direction to that of the photon that came in, and the cosine between the
   * first direction and that in which it radiated. Azimuths are uniform; see bremsstrahlung.ts.
   */
  readonly beta = new Float64Array(MAX_SECONDARIES);
  readonly electronCosine = new Float64Array(MAX_SECONDARIES);
  readonly turnedCosine = new Float64Array(MAX_SECONDARIES);

  /** Adds a photon. Throws when there is no room: nothing is dropped silently. */
  push(energyKeV: number, cosine: number, opposite: 0 | 1): void {
    const i = this.count;
    if (i >= MAX_SECONDARIES) throw new Error(`more than ${MAX_SECONDARIES} photons from one interaction`);
    this.energyKeV[i] = energyKeV;
    this.cosine[i] = cosine;
    this.opposite[i] = opposite;
    this.beta[i] = 0;
    this.count = i + 1;
  }
}
