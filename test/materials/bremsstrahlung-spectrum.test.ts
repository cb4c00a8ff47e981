import { describe, expect, it } from 'vitest';
import { bremsstrahlungSpectrum, electronStopping, resolveMaterial } from '../../materials/index.js';

const REST_KEV = 510.99895;

/** k dσ/dk in units of α r_e² Z²: formula 3BN of Koch and Motz, Rev. Mod. Phys. 31 (1959) 920 (no screening). */
function born(electronKeV: number, photonKeV: number): number {
  const k = photonKeV / REST_KEV;
  const e0 = 1 + electronKeV / REST_KEV;
  const e = e0 - k;
  const p0 = Math.sqrt(e0 * e0 - 1);
  const p = Math.sqrt(e * e - 1);
  const eps0 = Math.log((e0 + p0) / (e0 - p0));
  const eps = Math.log((e + p) / (e - p));
  const l = 2 * Math.log((e0 * e + p0 * p - 1) / k);
  const last =
    ((e0 * e + p0 * p0) / p0 ** 3) * eps0 -
    ((e0 * e + p * p) / p ** 3) * eps +
    (2 * k * e0 * e) / (p * p0) ** 2;
  const inner =
    (8 * e0 * e) / (3 * p0 * p) +
    (k * k * ((e0 * e) ** 2 + (p0 * p) ** 2)) / (p0 * p) ** 3 +
    (k / (2 * p0 * p)) * last;
  const first = 4 / 3 - (2 * e0 * e * (p * p + p0 * p0)) / (p * p0) ** 2;
  return (
    (p / p0) * (first + (eps0 * e) / p0 ** 3 + (eps * e0) / p ** 3 - (eps * eps0) / (p0 * p) + l * inner)
  );
}

/** Integral by the midpoint rule in √(1 − k/T), fine where the spectrum bends. */
function energyEmitted(spectrum: (photonKeV: number) => number, electronKeV: number): number {
  const points = 20_000;
  let sum = 0;
  for (let i = 0; i < points; i++) {
    const s = (i + 0.5) / points;
    sum += (spectrum(electronKeV * (1 - s * s)) * 2 * s) / points;
  }
  return (sum * electronKeV) / 1000;
}

describe.each(['graphite', 'NaI', 'lead', 'concrete', 'uranium'])('bremsstrahlung in %s', (name) => {
  const material = resolveMaterial(name);
  const energies = [1, 12.5, 70, 511, 3300, 20_000];

  it.each(energies)('of %d keV electrons carries their radiative stopping power', (electronKeV) => {
    const emitted = energyEmitted(bremsstrahlungSpectrum(material, electronKeV), electronKeV);
    expect(Math.abs(emitted / electronStopping(material, electronKeV).radiative - 1)).toBeLessThan(1e-3);
  });

  it.each(energies.slice(1))(
    'of %d keV electrons ends at their energy, at a finite height that is the lowest',
    (electronKeV) => {
      const spectrum = bremsstrahlungSpectrum(material, electronKeV);
      expect(spectrum(electronKeV)).toBeGreaterThan(0);
      expect(spectrum(electronKeV * 1.000001)).toBe(0);
      expect(spectrum(0.9 * electronKeV)).toBeGreaterThanOrEqual(spectrum(electronKeV));
    },
  );

  it('falls with the photon energy for relativistic electrons', () => {
    const spectrum = bremsstrahlungSpectrum(material, 2000);
    for (let share = 0.02; share < 1; share += 0.02) {
      expect(spectrum(2000 * share)).toBeGreaterThan(spectrum(2000 * Math.min(1, share + 0.02)));
    }
  });
});

// In hydrogen screening and Coulomb effects are small away from both ends.
it.each([500, 1000, 2000])(
  'bremsstrahlung of hydrogen at %d keV has the form of the Bethe-Heitler law',
  (electronKeV) => {
    const spectrum = bremsstrahlungSpectrum(resolveMaterial('hydrogen'), electronKeV);
    const reference = spectrum(electronKeV / 2) / born(electronKeV, electronKeV / 2);
    for (const share of [0.2, 0.3, 0.4, 0.6, 0.7, 0.8]) {
      const photonKeV = share * electronKeV;
      const ratio = spectrum(photonKeV) / born(electronKeV, photonKeV) / reference;
      expect(Math.abs(ratio - 1), `k/T = ${share}: ${ratio}`).toBeLessThan(0.025);
    }
  },
);

// L. I. Schiff, Phys. Rev. 83 (1951) 252 (formula 3BS of Koch and Motz): screened, relativistic energies.
function schiff(z: number, electronKeV: number, photonKeV: number): number {
  const k = photonKeV / REST_KEV;
  const e0 = 1 + electronKeV / REST_KEV;
  const e = e0 - k;
  const b = (2 * e0 * e * Math.cbrt(z)) / (111 * k);
  const logM = -Math.log((k / (2 * e0 * e)) ** 2 + (Math.cbrt(z) / 111) ** 2);
  const ratio = e / e0;
  const arctan = Math.atan(b) / b;
  const bracket = (2 / b ** 2) * Math.log(1 + b * b) + ((4 * (2 - b * b)) / (3 * b * b)) * arctan;
  return (
    2 *
    ((1 + ratio ** 2 - (2 * ratio) / 3) * (logM + 1 - 2 * arctan) +
      ratio * (bracket - 8 / (3 * b * b) + 2 / 9))
  );
}

it.each([
  { name: 'aluminium', z: 13 },
  { name: 'lead', z: 82 },
])(
  'bremsstrahlung of $name at 20 MeV has the form of the screened law of Schiff within 6 %',
  ({ name, z }) => {
    const spectrum = bremsstrahlungSpectrum(resolveMaterial(name), 20_000);
    const reference = spectrum(6000) / schiff(z, 20_000, 6000);
    for (const photonKeV of [200, 1000, 3000, 9000, 12_000, 15_000]) {
      const ratio = spectrum(photonKeV) / schiff(z, 20_000, photonKeV) / reference;
      expect(Math.abs(ratio - 1), `${photonKeV} keV: ${ratio}`).toBeLessThan(0.06);
    }
  },
);
