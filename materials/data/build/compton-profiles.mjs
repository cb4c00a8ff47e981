// Builds ../compton-profiles.arrow: Compton profile, occupation and binding energy of every occupied shell.
// Usage: node materials/data/build/compton-profiles.mjs xraylib.json [folder of the fisx tables]
// (xraylib.json is made by dump-xraylib.py)
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { Field, FixedSizeList, Float32, Float64, Uint8, Utf8 } from 'apache-arrow';
import { writeArrowFile } from './arrow-file.mjs';
import { readSpecFile } from './specfile.mjs';
import { monotoneCubic } from './spline.mjs';

// Beyond the last tabulated momentum, in atomic units; 5 % of a K profile lies there in lead, 10 % in fermium.
const TAIL_NODES = [120, 150, 200, 250, 300, 400, 500, 700, 1000];
const SLOW_MOMENTUM = 3;
const SLOW_STEPS = 3;
const FAST_STEPS = 2;
// Partner of the same n and l: without an own profile a shell takes its partner's.
const PARTNER = { L2: 'L3', M2: 'M3', M4: 'M5', N2: 'N3', N4: 'N5', N6: 'N7', O2: 'O3', O4: 'O5', O6: 'O7' };
Object.assign(PARTNER, { P2: 'P3', P4: 'P5' });
for (const [a, b] of Object.entries(PARTNER)) PARTNER[b] = a;
// Berkelium has no 6d profile but a 5f one, fermium no occupation: 5f12 7s2 beside the closed shells.
const REPLACEMENT = { P4: 'O6', P5: 'O7' };
const FERMIUM_ELECTRONS = { O6: 36 / 7, O7: 48 / 7, Q1: 2 };
const CAPACITY = [2, 2, 4, 4, 6, 6, 8];

const dump = JSON.parse(readFileSync(process.argv[2], 'utf8'));
const folder = process.argv[3] ?? '/usr/share/fisx';
const bindingTables = ['BindingEnergies.dat', 'EADL97_BindingEnergies.dat'].map(
  (file) => readSpecFile(join(folder, file))[0],
);

const nodes = dump.momentumNodes;
// A misprint of the packaged table by a factor of a thousand: 4.61 between 0.011 and 0.0017.
const misprint = dump.elements[63 - 1].shells.find(({ name }) => name === 'L2').profile;
const misprintNode = nodes.indexOf(30);
if (Math.abs(misprint[misprintNode] - 4.61) > 1e-3) throw new Error('the misprint at europium L2 has gone');
misprint[misprintNode] = 4.61e-3;
const momenta = [0];
for (let i = 1; i < nodes.length; i++) {
  const steps = nodes[i] <= SLOW_MOMENTUM ? SLOW_STEPS : FAST_STEPS;
  for (let k = 1; k <= steps; k++) momenta.push(nodes[i - 1] + ((nodes[i] - nodes[i - 1]) * k) / steps);
}
momenta.push(...TAIL_NODES);

/** Larkins' binding energy in keV; EADL97's where Larkins has none; then that of the partner shell. */
function bindingKeV(z, name) {
  for (const shell of [name, PARTNER[name]]) {
    for (const { labels, rows } of bindingTables) {
      const column = labels.findIndex((label) => label.split('(')[0] === shell);
      const value = column < 0 ? 0 : rows.find((row) => row[0] === z)[column];
      if (value > 0) return value;
    }
  }
  throw new Error(`Z=${z}: no binding energy of ${name}`);
}

/** J beyond the table: J ~ (1 + p^2/a^2)^-3, the law of a hydrogen-like s electron, through the last two nodes. */
function tail(profile) {
  const [p1, p2] = nodes.slice(-2);
  const [j1, j2] = profile.slice(-2);
  const r = Math.cbrt(j1 / j2);
  const inverseA2 = (r - 1) / (p2 ** 2 - r * p1 ** 2);
  if (inverseA2 > 0) return (p) => j2 * ((1 + inverseA2 * p2 ** 2) / (1 + inverseA2 * p ** 2)) ** 3;
  const slope = Math.log(j2 / j1) / Math.log(p2 / p1);
  return (p) => j2 * (p / p2) ** slope;
}

function finely(profile) {
  const inLogs = monotoneCubic(nodes.map(Math.asinh), profile.map(Math.log));
  const beyond = tail(profile);
  return momenta.map((p) => (p <= nodes.at(-1) ? Math.exp(inLogs(Math.asinh(p))) : beyond(p)));
}

/** Integral from minus to plus infinity of the broken line through the values (tail beyond the end: p^-6). */
function integral(values) {
  let sum = (values.at(-1) * momenta.at(-1)) / 5;
  for (let i = 1; i < momenta.length; i++) {
    sum += ((values[i] + values[i - 1]) / 2) * (momenta[i] - momenta[i - 1]);
  }
  return 2 * sum;
}

function capacity(name) {
  return name === 'K' ? 2 : CAPACITY[Number(name[1]) - 1];
}

/** Shells with electrons and a profile each; electrons of a shell without a profile go to its replacement. */
function occupiedShells({ z, shells }) {
  const profileOf = new Map(shells.filter((s) => s.profile).map((s) => [s.name, s.profile]));
  const occupied = new Map();
  for (const { name, electrons } of shells) {
    const count = z === 100 ? (FERMIUM_ELECTRONS[name] ?? capacity(name)) : electrons;
    if (!count) continue;
    const home = profileOf.has(name) || profileOf.has(PARTNER[name]) ? name : REPLACEMENT[name];
    occupied.set(home, (occupied.get(home) ?? 0) + count);
  }
  return [...occupied].map(([name, electrons]) => {
    const profile = profileOf.get(name) ?? profileOf.get(PARTNER[name]);
    return { z, name, electrons, profile };
  });
}

let worst = { deviation: 0 };
const rows = dump.elements.flatMap((element) => {
  const shells = occupiedShells(element);
  const electrons = shells.reduce((sum, shell) => sum + shell.electrons, 0);
  if (Math.abs(electrons - element.z) > 1e-4) throw new Error(`Z=${element.z}: ${electrons} electrons`);
  return shells.map(({ z, name, electrons: count, profile }) => {
    const fine = finely(profile);
    const norm = integral(fine);
    if (Math.abs(norm - 1) > Math.abs(worst.deviation)) worst = { z, name, deviation: norm - 1 };
    const share = (count * z) / electrons;
    return { z, name, electrons: share, binding: bindingKeV(z, name), profile: fine.map((j) => j / norm) };
  });
});

const column = (name, type, unit, description, pick) => ({
  name,
  type,
  unit,
  description,
  values: rows.map(pick),
});
writeArrowFile(
  new URL('../compton-profiles.arrow', import.meta.url),
  [
    column('z', new Uint8(), '1', 'atomic number', (r) => r.z),
    column('shell', new Utf8(), '', 'shell, K to Q', (r) => r.name),
    column('electrons', new Float64(), '1', 'electrons in the shell', (r) => r.electrons),
    column('binding_keV', new Float64(), 'keV', 'binding energy', (r) => r.binding),
    column(
      'profile',
      new FixedSizeList(momenta.length, new Field('item', new Float32(), false)),
      '1/atomic unit of momentum',
      'Compton profile J per electron at the momenta in the file metadata; its integral over all momenta is 1',
      (r) => r.profile,
    ),
  ],
  {
    source:
      'F. Biggs, L. B. Mendelsohn and J. B. Mann, Atomic Data and Nuclear Data Tables 16 (1975) 201, as tabulated in ' +
      'the xraylib data package; binding energies F. P. Larkins, ibid. 20 (1977) 311, EADL97 where he gives none',
    momentum_atomic_units: JSON.stringify(momenta),
  },
);
console.log(
  `compton-profiles.arrow: ${rows.length} shells, ${momenta.length} momenta; largest correction of a norm ` +
    `${(100 * worst.deviation).toFixed(1)} % (Z=${worst.z} ${worst.name})`,
);
