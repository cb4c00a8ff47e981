/**
 * Spectra of the photons scattered by moving electrons to one angle, by quadrature of the impulse approximation over
 * the tabulated Compton profiles. Written apart from the sampler: here the scattered energy is the variable.
 */
import { comptonProfiles } from '../../materials/index.js';

const REST = 510.99895; // m c², keV (CODATA 2018)
const FINE_STRUCTURE = 1 / 137.035999; // CODATA 2018: an atomic unit of momentum is α m c

export type DopplerForm =
  /** Σ n J(p) dp/dE′: momenta weighed by their profile alone. */
  | 'profile'
  /** The double-differential cross section of Ribberfors (Phys. Rev. B 12 (1975) 2067), with its flux factors. */
  | 'full';

/** Component of the electron's momentum along the transfer, m c, for E → E′ at angle cosine c. */
export function momentumOf(energyKeV: number, scatteredKeV: number, cosine: number): number {
  const lost = energyKeV - scatteredKeV;
  const gain = (energyKeV * scatteredKeV * (1 - cosine)) / REST - lost;
  return gain / transferOf(energyKeV, scatteredKeV, cosine);
}

function transferOf(energyKeV: number, scatteredKeV: number, cosine: number): number {
  return Math.sqrt(energyKeV ** 2 + scatteredKeV ** 2 - 2 * energyKeV * scatteredKeV * cosine);
}

/** Factor on Σ n J(p) that makes it the spectrum per scattered energy. */
function factorOf(
  form: DopplerForm,
  energyKeV: number,
  scatteredKeV: number,
  cosine: number,
  p: number,
): number {
  const q = transferOf(energyKeV, scatteredKeV, cosine);
  if (form === 'profile') {
    return ((energyKeV * (1 - cosine)) / REST + 1 - (p * (scatteredKeV - energyKeV * cosine)) / q) / q;
  }
  const r = (energyKeV / REST) * (Math.sqrt(1 + p * p) + ((energyKeV - scatteredKeV * cosine) * p) / q);
  const rOut = r - (energyKeV * scatteredKeV * (1 - cosine)) / REST ** 2;
  const difference = 1 / r - 1 / rOut;
  const x = r / rOut + rOut / r + 2 * difference + difference * difference;
  return (scatteredKeV / energyKeV) * (x / q / Math.sqrt(1 + p * p));
}

/** Σ n J(p) over the shells that can lose their electron, J straight in ln J between the tabulated momenta. */
function profileSum(z: number, p: number, lostKeV: number): number {
  const { pz, shells } = comptonProfiles(z);
  const at = Math.abs(p) / FINE_STRUCTURE;
  if (at >= pz[pz.length - 1]) return 0;
  let i = 0;
  while (pz[i + 1] <= at) i++;
  const part = (at - pz[i]) / (pz[i + 1] - pz[i]);
  let sum = 0;
  for (const { electrons, bindingKeV, j } of shells) {
    if (lostKeV < bindingKeV || j[i] <= 0 || j[i + 1] <= 0) continue;
    sum += electrons * j[i] ** (1 - part) * j[i + 1] ** part;
  }
  return sum;
}

/** Share of photons in each of `bins` bins of the scattered energy from `lowKeV` to `highKeV`. */
export function scatteredSpectrum(
  form: DopplerForm,
  z: number,
  energyKeV: number,
  cosine: number,
  { lowKeV, highKeV, bins }: { lowKeV: number; highKeV: number; bins: number },
): Float64Array {
  const width = (highKeV - lowKeV) / bins;
  const parts = 8;
  const shares = Float64Array.from({ length: bins }, (_, bin) => {
    let sum = 0;
    for (let n = 0; n < parts; n++) {
      const scatteredKeV = lowKeV + (bin + (n + 0.5) / parts) * width;
      const p = momentumOf(energyKeV, scatteredKeV, cosine);
      if (p <= -0.999) continue;
      sum += profileSum(z, p, energyKeV - scatteredKeV) * factorOf(form, energyKeV, scatteredKeV, cosine, p);
    }
    return sum;
  });
  const total = shares.reduce((sum, share) => sum + share, 0);
  return shares.map((share) => share / total);
}

/** Full width at half maximum of a spectrum in bins of `width`, running means of 5 bins smoothing its noise. */
export function fullWidth(spectrum: Float64Array, width: number): number {
  const smooth = spectrum.map((_, i) => {
    const part = spectrum.subarray(Math.max(0, i - 2), i + 3);
    return part.reduce((sum, value) => sum + value, 0) / part.length;
  });
  const top = smooth.indexOf(Math.max(...smooth));
  const half = smooth[top] / 2;
  const crossing = (step: number) => {
    let i = top;
    while (smooth[i + step] > half) i += step;
    return i + (step * (smooth[i] - half)) / (smooth[i] - smooth[i + step]);
  };
  return (crossing(1) - crossing(-1)) * width;
}
