/**
 * Radiative stopping power of the elements. The dimensionless radiative cross section
 * φ = S_rad A / (α r_e² N_A Z² (T + m c²)) of ESTAR (Seltzer and Berger, Nucl. Instrum. Methods B 12 (1985) 95)
 * divided by 1 + 1/Z, its leading dependence on Z from the field of the electrons, is smooth in Z: natural cubic
 * splines of its logarithm in ln Z, then in ln T, give back any tabulated element left out within 1 %. Beyond the
 * table (Z > 83, T < 12.5 keV) straight lines go on.
 */
import { naturalSpline, polynomialAt, type PiecewiseCubic } from './cubic-spline.js';
import { radiativeTable } from './electron-data.js';
import { elementOf } from './elements.js';

/** α r_e² N_A in cm²/mol (CODATA 2018). */
const RADIATIVE_UNIT_CM2_PER_MOL = 7.2973525693e-3 * 2.8179403262e-13 ** 2 * 6.02214076e23;
const ELECTRON_REST_KEV = 510.99895;

const curves: (PiecewiseCubic | undefined)[] = [];
const polynomial = new Float64Array(4);

/** Radiative stopping power of an element in MeV cm²/g; T in keV, 1–20 000. */
export function elementRadiativeStopping(z: number, energyKeV: number): number {
  const curve = (curves[z] ??= curveOfElement(z));
  return Math.exp(valueOn(curve, Math.log(energyKeV))) * stoppingPerPhi(z, energyKeV);
}

/** S_rad of an element whose φ is 1 + 1/Z, MeV cm²/g. */
function stoppingPerPhi(z: number, energyKeV: number): number {
  const totalMeV = (energyKeV + ELECTRON_REST_KEV) / 1000;
  return (RADIATIVE_UNIT_CM2_PER_MOL * z * (z + 1) * totalMeV) / elementOf(z).atomicWeight;
}

function curveOfElement(z: number): PiecewiseCubic {
  const table = radiativeTable();
  const count = table.energyKeV.length;
  const logZ = table.z.map(Math.log);
  const logPhi = table.energyKeV.map((energyKeV, i) => {
    const column = table.z.map((node, row) =>
      Math.log(table.radiative[row * count + i] / stoppingPerPhi(node, energyKeV)),
    );
    return valueOn(naturalSpline(logZ, column), Math.log(z));
  });
  return naturalSpline(table.energyKeV.map(Math.log), logPhi);
}

/** Value of the curve, which goes on as a straight line beyond its ends. */
function valueOn(curve: PiecewiseCubic, u: number): number {
  const end = curve.x[curve.x.length - 1];
  polynomialAt(curve, Math.min(u, end), polynomial, 0);
  return polynomial[0] + Math.max(0, u - end) * polynomial[1];
}
