/**
 * The free-electron law of incoherent scattering (Klein and Nishina 1929), in the variable v = (1 − cos θ)/2, which
 * runs from 0 (forward) to 1 (backward) and keeps its precision where the law peaks forward.
 */
import { ELECTRON_REST_KEV } from '../constants.js';

/** Classical electron radius squared, cm² (CODATA 2018). */
const CLASSICAL_RADIUS_SQUARED_CM2 = 2.8179403262e-13 ** 2;

/** Share of its energy the photon keeps when scattered to v: 1 / (1 + 2 k v), k = E / m c². */
export function comptonEnergyRatio(energyKeV: number, v: number): number {
  return 1 / (1 + 2 * (energyKeV / ELECTRON_REST_KEV) * v);
}

/** Shape of dσ/dv, not normalised: ratio² (ratio + 1/ratio − sin² θ). */
export function kleinNishinaShape(energyKeV: number, v: number): number {
  const ratio = comptonEnergyRatio(energyKeV, v);
  return ratio * ratio * (ratio + 1 / ratio - 4 * v * (1 - v));
}

/** Total cross section per electron in cm², closed form (Klein and Nishina 1929; Evans 1955, ch. 23). */
export function kleinNishinaTotalCm2(energyKeV: number): number {
  const k = energyKeV / ELECTRON_REST_KEV;
  const scale = 2 * Math.PI * CLASSICAL_RADIUS_SQUARED_CM2;
  if (k < 1e-3) return scale * (4 / 3) * (1 - 2 * k + 5.2 * k * k); // series: the closed form cancels
  const log = Math.log1p(2 * k);
  const first = ((1 + k) / (k * k)) * ((2 * (1 + k)) / (1 + 2 * k) - log / k);
  return scale * (first + log / (2 * k) - (1 + 3 * k) / (1 + 2 * k) ** 2);
}
