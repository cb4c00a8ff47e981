// Builds ../relaxation.arrow: what fills a vacancy in K, L1, L2 or L3 of the elements 1-100, and how often.
// Usage: node materials/data/build/relaxation.mjs [folder of the fisx tables]   (after photon-cross-sections.mjs)
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { Float64, Int8, Uint8, tableFromIPC } from 'apache-arrow';
import { writeArrowFile } from './arrow-file.mjs';
import { readSpecFile } from './specfile.mjs';

const MAX_Z = 100;
const TRACKED = ['K', 'L1', 'L2', 'L3'];
const SMALLEST_PROBABILITY = 1e-7;

const folder = process.argv[2] ?? '/usr/share/fisx';
const blocks = (file) => readSpecFile(join(folder, file));
const [larkins] = blocks('BindingEnergies.dat');
const [eadlBindings] = blocks('EADL97_BindingEnergies.dat');
const [kYields] = blocks('EADL97_KShellConstants.dat');
// Scofield's 1974 line shares with exchange: EADL97 has too few K-beta quanta and loses K lines above Z = 86.
const [kLines] = blocks('KShellRates.dat');
const [kAuger] = blocks('EADL97_KShellNonradiativeRates.dat');
const lLines = blocks('EADL97_LShellRadiativeRates.dat');
const lAuger = blocks('EADL97_LShellNonradiativeRates.dat');

// A photon above an absorption edge must be able to leave the vacancy: the edges in use are the binding energies.
// They are Larkins' within 0.01 % but for argon (0.1 %), the elements from 84 on (0.07 %) and 98-100 (0.8 %).
const edges = new Map();
for (const row of tableFromIPC(readFileSync(new URL('../photon-cross-sections.arrow', import.meta.url)))) {
  if (row.edge_shell !== null) edges.set(`${row.z} ${row.edge_shell}`, row.energy_keV);
}

const rowOf = (block, z) => block.rows.find((row) => row[0] === z) ?? [];

function bindingsOf(block, z) {
  const row = rowOf(block, z);
  return new Map(block.labels.map((label, i) => [label.split('(')[0], row[i] ?? 0]).slice(1));
}

/** Entries of a rates row with the label's shells, TOTAL left out. */
function rates(block, z) {
  const row = rowOf(block, z);
  return block.labels.slice(2).map((label, i) => ({ label, rate: row[i + 2] ?? 0 }));
}

const tracked = (shell) => TRACKED.indexOf(shell);

/** Mean binding energy of the shells a line's last part names: L3, O (all of that n), N67, P23. */
function outerBinding(z, name) {
  const [larkinsRow, eadlRow] = [bindingsOf(larkins, z), bindingsOf(eadlBindings, z)];
  const shells =
    name.length > 1 ? [...name.slice(1)].map((digit) => name[0] + digit) : [`${name}2`, `${name}3`];
  const values = shells.map((shell) => larkinsRow.get(shell) || eadlRow.get(shell) || 0);
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}

/** Binding energy of a shell: XCOM's absorption edge from 1 keV on, Larkins' value below. */
function bindingOf(z, shell) {
  return edges.get(`${z} ${shell}`) ?? bindingsOf(larkins, z).get(shell);
}

function radiative(z, shell, lines, scale) {
  const vacancyKeV = bindingOf(z, shell);
  return lines
    .filter(({ rate }) => rate * scale > SMALLEST_PROBABILITY)
    .map(({ label, rate }) => {
      const from = label.slice(shell.length);
      const photonKeV = vacancyKeV - (tracked(from) < 0 ? outerBinding(z, from) : bindingOf(z, from));
      if (!(photonKeV > 0)) throw new Error(`Z=${z}: ${label} at ${photonKeV} keV`);
      return { probability: rate * scale, photonKeV, a: tracked(from), b: -1 };
    });
}

/** Non-radiative transitions grouped by the tracked shells that stay empty. */
function nonRadiative(shell, entries, scale) {
  const groups = new Map();
  for (const { label, rate } of entries) {
    const [, first, second] = /-([K-Q]\d+)([K-Q]\d+)$/.exec(label);
    const [a, b] = [tracked(first), tracked(second)].sort((p, q) => (p < 0 ? 9 : p) - (q < 0 ? 9 : q));
    const key = `${a},${b}`;
    groups.set(key, { probability: (groups.get(key)?.probability ?? 0) + rate * scale, photonKeV: 0, a, b });
  }
  return [...groups.values()].filter(({ probability }) => probability > SMALLEST_PROBABILITY);
}

function kTransitions(z) {
  const fluorescenceYield = rowOf(kYields, z)[1] ?? 0;
  const lines = rates(kLines, z);
  const auger = rates(kAuger, z);
  const [lineSum, augerSum] = [lines, auger].map((list) => list.reduce((sum, { rate }) => sum + rate, 0));
  return [
    ...(fluorescenceYield > 0 ? radiative(z, 'K', lines, fluorescenceYield / lineSum) : []),
    ...(augerSum > 0 ? nonRadiative('K', auger, (1 - fluorescenceYield) / augerSum) : []),
  ];
}

let largestRest = { rest: 0 };
/** What the tables leave out goes to non-radiative transitions among outer shells, which they do not list. */
function completed(z, shell, transitions) {
  const rest = 1 - transitions.reduce((sum, { probability }) => sum + probability, 0);
  if (rest < -1e-4) throw new Error(`Z=${z} ${shell}: probabilities add up to ${1 - rest}`);
  if (transitions.length > 0 && rest > largestRest.rest) largestRest = { z, shell, rest };
  const outer = transitions.find(({ photonKeV, a, b }) => photonKeV === 0 && a < 0 && b < 0);
  if (outer) outer.probability += rest;
  else if (rest > SMALLEST_PROBABILITY) transitions.push({ probability: rest, photonKeV: 0, a: -1, b: -1 });
  const sum = transitions.reduce((total, { probability }) => total + probability, 0);
  for (const transition of transitions) transition.probability /= sum;
  return transitions.sort((p, q) => q.probability - p.probability);
}

const rows = [];
for (let z = 1; z <= MAX_Z; z++) {
  TRACKED.forEach((shell, index) => {
    const bindingKeV = bindingOf(z, shell);
    if (!(bindingKeV > 0)) return;
    const found =
      shell === 'K'
        ? kTransitions(z)
        : [
            ...radiative(z, shell, rates(lLines[index - 1], z), 1),
            ...nonRadiative(shell, rates(lAuger[index - 1], z), 1),
          ];
    for (const transition of completed(z, shell, found)) rows.push({ z, index, bindingKeV, ...transition });
  });
}

const column = (name, type, unit, description, pick) => ({
  name,
  type,
  unit,
  description,
  values: rows.map(pick),
});
writeArrowFile(
  new URL('../relaxation.arrow', import.meta.url),
  [
    column('z', new Uint8(), '1', 'atomic number', (r) => r.z),
    column('shell', new Uint8(), '', 'shell of the vacancy: 0 K, 1 L1, 2 L2, 3 L3', (r) => r.index),
    column('binding_keV', new Float64(), 'keV', 'binding energy of that shell', (r) => r.bindingKeV),
    column('probability', new Float64(), '1', 'share of the transition', (r) => r.probability),
    column('photon_keV', new Float64(), 'keV', 'photon emitted; 0: none', (r) => r.photonKeV),
    column('vacancy_a', new Int8(), '', 'vacancy left, as in shell; -1: none in K to L3', (r) => r.a),
    column('vacancy_b', new Int8(), '', 'second vacancy left, likewise', (r) => r.b),
  ],
  {
    source:
      'EADL97: D. E. Cullen et al., UCRL-50400 Vol. 30 (1991); K line shares J. H. Scofield, Phys. Rev. A 9 (1974) ' +
      '1041; binding energies XCOM and F. P. Larkins, At. Data Nucl. Data Tables 20 (1977) 311; all from the fisx data package',
  },
);
console.log(`relaxation.arrow: ${rows.length} rows; largest share added to outer shells:`, largestRest);
