/**
 * Decay chains in equilibrium, made of the evaluated members the data holds. `perDecay` is the activity of a member
 * for each decay of the head: its branching ratio, in a transient equilibrium times T_head/(T_head − T_member).
 */

export interface ChainRow {
  readonly name: string;
  readonly aliases: readonly string[];
  readonly members: readonly { readonly nuclide: string; readonly perDecay: number }[];
  readonly note: string;
}

/** Share of Bi-212 decays by alpha emission, to Tl-208: DDEP, 35.93(7) %. */
const BI212_ALPHA = 0.3593;
/** T(Ba-140) / (T(Ba-140) − T(La-140)) with DDEP half-lives of 12.753 d and 1.6786 d. */
const LA140_TRANSIENT = 1.10186e6 / (1.10186e6 - 145029);

/** T(Pb-212) / (T(Pb-212) − T(Bi-212)) with DDEP half-lives of 10.64 h and 60.54 min. */
const BI212_TRANSIENT = 38304 / (38304 - 3632.4);

/**
 * Activity of U-235 for each decay of U-238 in natural uranium: abundances of 0.7204 and 99.2742 % (IUPAC 2013)
 * and DDEP half-lives of 7.040e8 and 4.468e9 a.
 */
const U235_NATURAL = ((0.7204 / 99.2742) * 1.41e17) / 2.2216e16;

const always = (...names: string[]) => names.map((nuclide) => ({ nuclide, perDecay: 1 }));
const TH228_PROGENY = [
  ...always('Ra-224', 'Rn-220', 'Pb-212', 'Bi-212'),
  { nuclide: 'Tl-208', perDecay: BI212_ALPHA },
];

export const CHAINS: readonly ChainRow[] = [
  {
    name: 'Th-232+',
    aliases: ['Th-232+progeny', 'thorium'],
    members: [...always('Th-232', 'Ra-228', 'Ac-228', 'Th-228'), ...TH228_PROGENY],
    note:
      'the whole chain to Pb-208 in secular equilibrium (older than 40 a, radon kept in); Po-216 and Po-212 have no ' +
      'line of at least 0.5 per 100 decays; the weak lines left out carry some 5 % of the photon energy',
  },
  {
    name: 'U-238+',
    aliases: ['U-238+progeny', 'uranium ore'],
    members: always('U-238', 'Th-234', 'Pa-234m', 'Ra-226+progeny'),
    note:
      'the whole chain to Pb-206 in secular equilibrium, as in undisturbed ore, radon kept in; without U-235 and its ' +
      'progeny, and without the X rays and weak lines (below 1 per 100) of U-234, Th-230, Pa-234 and Po-210; the weak ' +
      'lines left out carry some 9 % of the photon energy',
  },
  {
    name: 'U-238+Pa-234m',
    aliases: ['separated uranium-238'],
    members: always('U-238', 'Th-234', 'Pa-234m'),
    note: 'chemically separated uranium after half a year, without U-235 and U-234; Pa-234 (0.16 %) left out',
  },
  {
    name: 'U-nat',
    aliases: ['natural uranium'],
    members: [
      ...always('U-238', 'Th-234', 'Pa-234m'),
      { nuclide: 'U-235', perDecay: U235_NATURAL },
      { nuclide: 'Th-231', perDecay: U235_NATURAL },
    ],
    note: 'separated natural uranium after half a year, per decay of U-238; X rays of U-234 and Pa-234 left out',
  },
  {
    name: 'U-235+',
    aliases: [],
    members: always('U-235', 'Th-231'),
    note: 'with Th-231, as in separated uranium; Pa-231 and below, which take ten thousand years to grow in, left out',
  },
  {
    name: 'Th-228+',
    aliases: ['Th-228+progeny'],
    members: [...always('Th-228'), ...TH228_PROGENY],
    note: 'with progeny down to Pb-208 in secular equilibrium, radon kept in',
  },
  {
    name: 'Ra-228+',
    aliases: [],
    members: always('Ra-228', 'Ac-228'),
    note: 'with Ac-228; Th-228 and below, which grow in over years, left out',
  },
  {
    name: 'Rn-222+',
    aliases: ['radon'],
    members: always('Rn-222', 'Pb-214', 'Bi-214'),
    note: 'with its short-lived progeny in equilibrium; Po-218 decays to Pb-214 in 99.98 %; 1 % more Bi-214 in transient equilibrium neglected',
  },
  {
    name: 'Pb-212+',
    aliases: [],
    members: [
      ...always('Pb-212'),
      { nuclide: 'Bi-212', perDecay: BI212_TRANSIENT },
      { nuclide: 'Tl-208', perDecay: BI212_TRANSIENT * BI212_ALPHA },
    ],
    note: 'with Bi-212 (1.105 decays per decay of Pb-212) and Tl-208 (0.397) in transient equilibrium',
  },
  {
    name: 'Ge-68+',
    aliases: ['Ge-68/Ga-68'],
    members: always('Ge-68', 'Ga-68'),
    note: 'with Ga-68 in secular equilibrium',
  },
  {
    name: 'Ru-106+',
    aliases: ['Ru-106/Rh-106'],
    members: always('Ru-106', 'Rh-106'),
    note: 'with Rh-106 in secular equilibrium; Ru-106 itself emits no photons',
  },
  {
    name: 'Ce-144+',
    aliases: ['Ce-144/Pr-144'],
    members: always('Ce-144', 'Pr-144'),
    note: 'with Pr-144 in secular equilibrium',
  },
  {
    name: 'Ba-140+',
    aliases: ['Ba-140/La-140'],
    members: [...always('Ba-140'), { nuclide: 'La-140', perDecay: LA140_TRANSIENT }],
    note: 'with La-140 in transient equilibrium (1.152 of its decays per decay of Ba-140)',
  },
];

/** Other names of nuclides that are in the data as such. */
export const NUCLIDE_ALIASES: Readonly<Record<string, readonly string[]>> = {
  'Ra-226+progeny': ['Ra-226+', 'radium'],
  'Mo-99': ['Mo-99/Tc-99m', 'Mo-99+'],
  'Cs-137': ['Cs-137/Ba-137m', 'Cs-137+'],
};

/**
 * What the evaluated lines of a nuclide hold and what they lack. Shares of the photon energy are against the mean
 * energies of ICRP 107 (values from memory).
 */
export const NUCLIDE_NOTES: Readonly<Record<string, string>> = {
  'Ra-226+progeny':
    'with progeny in equilibrium down to Pb-210 and Bi-210, radon kept in; the weak lines left out carry some 9 % of ' +
    'the photon energy',
  'Bi-214': 'the weak lines left out carry some 9 % of the photon energy',
  'Ac-228': 'the weak lines left out carry some 9 % of the photon energy',
  'Mo-99': 'the 140.5 keV line is that of Tc-99m in equilibrium',
  'Cs-137': 'the lines are those of Ba-137m in equilibrium',
};
