/**
 * How fast electrons lose their direction: the first transport coefficient G₁ = n ∫ (1 − cos θ) dσ of elastic
 * scattering. After a path the mean cosine to the first direction is exp(−∫ G₁ ds), exactly (S. Goudsmit and
 * J. L. Saunderson, Phys. Rev. 57 (1940) 24; H. W. Lewis, Phys. Rev. 78 (1950) 526).
 */
import { elementOf, type Matter } from '../../materials/index.js';
import { ELECTRON_REST_KEV, FINE_STRUCTURE } from '../constants.js';

/** 2 π r_e² N_A in cm²/mol (CODATA 2018). */
const SCATTERING_UNIT = 2 * Math.PI * 2.8179403262e-13 ** 2 * 6.02214076e23;
/** Thomas–Fermi radius of hydrogen in Compton wavelengths (ħ / m c): 0.88534 a₀. */
const THOMAS_FERMI = 0.88534 / FINE_STRUCTURE;

/**
 * G₁ per mass per area, in cm²/g: Rutherford's law with Molière's screening angle (Z. Naturforsch. 2a (1947) 133)
 * and the relativistic factor of W. A. McKinley and H. Feshbach (Phys. Rev. 74 (1948) 1759), on nucleus and
 * electrons, Z (Z + 1).
 *
 * @param electronKeV kinetic energy
 */
export function transportCoefficient(material: Matter, electronKeV: number): number {
  const tau = electronKeV / ELECTRON_REST_KEV;
  const momentumSquared = tau * (tau + 2);
  const betaSquared = momentumSquared / (tau + 1) ** 2;
  const rutherford = SCATTERING_UNIT / (momentumSquared * betaSquared);
  let sum = 0;
  for (const { z, massFraction } of material.constituents) {
    const alphaZ = FINE_STRUCTURE * z;
    const bornAngle = Math.cbrt(z) / THOMAS_FERMI;
    const screening = (bornAngle ** 2 * (1.13 + (3.76 * alphaZ ** 2) / betaSquared)) / (4 * momentumSquared);
    // ∫ (1 − cos θ) of 1 / (1 − cos θ + 2 A)², and of the factor 1 − β² s² + π α Z β s (1 − s), s = sin(θ/2)
    const moment =
      Math.log(1 + 1 / screening) -
      1 / (1 + screening) -
      betaSquared +
      Math.PI * alphaZ * Math.sqrt(betaSquared);
    sum += (massFraction / elementOf(z).atomicWeight) * z * (z + 1) * moment;
  }
  return rutherford * sum;
}
