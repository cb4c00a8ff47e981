// Builds ../bremsstrahlung-shape.arrow: the form of the photon spectrum that electrons emit in single collisions.
// Usage: node materials/data/build/bremsstrahlung-shape.mjs
//
// Born approximation screened by the form factor of the Thomas-Fermi atom (G. Moliere, Z. Naturforsch. 2a (1947)
// 133), times the Coulomb factor of G. Elwert (Ann. Phys. 34 (1939) 178), which makes the high end finite. Only the
// form is used: the size comes from the radiative stopping power.
import { Field, FixedSizeList, Float32, Float64, Uint8 } from 'apache-arrow';
import { writeArrowFile } from './arrow-file.mjs';
import { bornByMomentum, bornUnscreened } from './born-kernel.mjs';

const FINE_STRUCTURE = 7.2973525693e-3;
const ELECTRON_REST_KEV = 510.99895;
// Moliere's sum of exponentials: share and reciprocal length in units of the Thomas-Fermi radius 0.88534 a0 / Z^1/3.
const MOLIERE = [
  [0.1, 6],
  [0.55, 1.2],
  [0.35, 0.3],
];
const THOMAS_FERMI = 0.88534 / FINE_STRUCTURE;

const Z_NODES = [1, 3, 6, 13, 26, 42, 58, 74, 92, 100];
const ENERGY_INTERVALS = 24;
const ENERGY_LOW_KEV = 1;
const ENERGY_HIGH_KEV = 20_000;
// Photon energy / electron energy: equal in the logarithm to SPLIT, then equal in the root of its distance from 1.
const SHARE_LOW = 1e-4;
const SPLIT = 0.1;
const LOW_INTERVALS = 12;
const HIGH_INTERVALS = 20;
// At the end point itself the factors are 0 and infinite; the product is finite and flat there.
const LAST_SHARE = 1 - 1e-6;
// Below it, rounding spoils the unscreened sum (not the screened one: small q, where terms cancel, is screened off).
const CHECKED_FROM_SHARE = 1e-3;

const energies = Array.from(
  { length: ENERGY_INTERVALS + 1 },
  (_, i) => ENERGY_LOW_KEV * (ENERGY_HIGH_KEV / ENERGY_LOW_KEV) ** (i / ENERGY_INTERVALS),
);
const shares = [
  ...Array.from({ length: LOW_INTERVALS }, (_, i) => SHARE_LOW * (SPLIT / SHARE_LOW) ** (i / LOW_INTERVALS)),
  ...Array.from({ length: HIGH_INTERVALS + 1 }, (_, i) => 1 - (1 - SPLIT) * (1 - i / HIGH_INTERVALS) ** 2),
];

function screening(z, q) {
  const radius = THOMAS_FERMI / Math.cbrt(z);
  let factor = 0;
  for (const [share, reciprocal] of MOLIERE) factor += share / (1 + ((q * radius) / reciprocal) ** 2);
  return (1 - factor) ** 2;
}

function elwert(z, kinetic, share) {
  const beta = (t) => Math.sqrt(t * (t + 2)) / (1 + t);
  const [before, after] = [beta(kinetic), beta(kinetic * (1 - share))];
  const charge = 2 * Math.PI * FINE_STRUCTURE * z;
  return ((before / after) * (1 - Math.exp(-charge / before))) / (1 - Math.exp(-charge / after));
}

let worst = 0;
const rows = energies.flatMap((energy) => {
  const kinetic = energy / ELECTRON_REST_KEV;
  const byShare = shares.map((share) => {
    const used = Math.min(share, LAST_SHARE);
    const born = bornByMomentum(kinetic, used);
    const sum = born.weight.reduce((total, weight) => total + weight, 0);
    if (used >= CHECKED_FROM_SHARE)
      worst = Math.max(worst, Math.abs(sum / bornUnscreened(kinetic, used) - 1));
    return { used, ...born };
  });
  return Z_NODES.map((z) => ({
    z,
    energy,
    values: byShare.map(({ used, q, weight }) => {
      let sum = 0;
      for (let i = 0; i < q.length; i++) sum += weight[i] * screening(z, q[i]);
      return sum * elwert(z, kinetic, used);
    }),
  }));
});
if (worst > 1e-4) throw new Error(`Born integral off by ${worst} from its closed form`);

writeArrowFile(
  new URL('../bremsstrahlung-shape.arrow', import.meta.url),
  [
    { name: 'z', type: new Uint8(), unit: '1', description: 'atomic number', values: rows.map((r) => r.z) },
    {
      name: 'energy_keV',
      type: new Float64(),
      unit: 'keV',
      description: 'kinetic energy of the electron',
      values: rows.map((r) => r.energy),
    },
    {
      name: 'cross_section',
      type: new FixedSizeList(shares.length, new Field('item', new Float32(), false)),
      unit: 'alpha r_e^2 Z^2',
      description:
        'k dsigma/dk at the photon energies (as shares of the electron energy) in the file metadata',
      values: rows.map((r) => r.values),
    },
  ],
  {
    source:
      'computed: Bethe-Heitler formula (Koch and Motz, Rev. Mod. Phys. 31 (1959) 920, 1BN) with the form factor of ' +
      'Moliere (Z. Naturforsch. 2a (1947) 133) and the factor of Elwert (Ann. Phys. 34 (1939) 178)',
    photon_shares: JSON.stringify(shares),
  },
);
console.log(
  `bremsstrahlung-shape.arrow: ${rows.length} spectra of ${shares.length} points; unscreened sum within ` +
    `${worst.toExponential(1)} of the closed form`,
);
