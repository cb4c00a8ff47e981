// Builds ../photon-cross-sections.arrow from the XCOM tables of the Debian package python-fisx-common.
// Usage: node materials/data/build/photon-cross-sections.mjs [folder of the fisx tables]
import { join } from 'node:path';
import { Float64, Uint8, Utf8 } from 'apache-arrow';
import { writeArrowFile } from './arrow-file.mjs';
import { readSpecFile } from './specfile.mjs';

const MAX_Z = 100;
// XCOM begins at 1 keV; what the package lists at 0.1 and 0.5 keV is extrapolated, to 10³⁰ times the neighbour
// in places.
const FIRST_ENERGY_KEV = 1;
// The range in use ends at 20 MeV; a few rows above it keep the end of the splines away from it.
const LAST_ENERGY_KEV = 30_000;
// Most XCOM edges are Larkins' binding energies to all digits. They differ by up to 8 % in the N shells of the
// transuranium elements, where a shell is still the only one nearby.
const EDGE_MATCH_TOLERANCE = 0.08;

const folder = process.argv[2] ?? '/usr/share/fisx';
const elements = readSpecFile(join(folder, 'XCOM_CrossSections.dat'));
const [bindings] = readSpecFile(join(folder, 'BindingEnergies.dat'));

// Rows midway between two M edges whose scattering coefficients stand out of their own curve, by 5 % and 1 %
// (protactinium even goes down again). The photoelectric value there is that of the straight line between the
// edges, so that leaving the row out loses nothing.
// The one of rhenium is interpolated from the misplaced edge below.
const BROKEN_ROWS = new Set(['91 5.1807', '87 3.3894', '75 1.8846']);

// XCOM has the M5 edge of rhenium at 1.8224 keV, out of line with its neighbours (1.8092 for tungsten, 1.9601 for
// osmium); the coefficients there are those of the edge at 1.8829 keV, Larkins' binding energy.
const MISPLACED_EDGE = { z: 75, energyKeV: 1.8224, rightKeV: 1.8829 };

/** Name of the shell of element z whose edge is the one of the given rank, counted down from the K edge (0). */
function shellOfRank(z, rank, energyKeV) {
  const row = bindings.rows.find((values) => values[0] === z);
  const difference = Math.abs(row[rank + 1] / energyKeV - 1);
  if (!(difference < EDGE_MATCH_TOLERANCE)) {
    throw new Error(`Z=${z}: edge at ${energyKeV} keV is not that of ${bindings.labels[rank + 1]}`);
  }
  return bindings.labels[rank + 1];
}

/** Moves the misplaced edge; the scattering coefficients of its rows are taken along their own curve. */
function moveEdge(rows) {
  const { energyKeV, rightKeV } = MISPLACED_EDGE;
  const moved = rows.filter(({ energy }) => energy === energyKeV);
  const next = rows[rows.indexOf(moved[1]) + 1];
  const share = Math.log(rightKeV / energyKeV) / Math.log(next.energy / energyKeV);
  for (const row of moved) {
    row.energy = rightKeV;
    row.incoherent *= (next.incoherent / row.incoherent) ** share;
    row.coherent *= (next.coherent / row.coherent) ** share;
  }
}

/** Rows of one element without repeats; an edge stays as two rows, the upper one with the shell's name. */
function rowsOf({ number: z, labels, rows }) {
  const column = (word) => labels.findIndex((label) => label.startsWith(word));
  const [energy, coherent, incoherent, photoelectric, pair, total] = [
    'PhotonEnergy',
    'Rayleigh',
    'Compton',
    'Photoelectric',
    'PairProduction',
    'TotalCrossSection',
  ].map(column);
  const kept = [];
  for (const row of rows) {
    if (row[energy] < FIRST_ENERGY_KEV || row[energy] > LAST_ENERGY_KEV) continue;
    if (BROKEN_ROWS.has(`${z} ${row[energy]}`)) continue;
    const last = kept.at(-1);
    if (last && row[energy] < last.energy)
      throw new Error(`Z=${z}: energies not ascending at ${row[energy]}`);
    const isEdge = last !== undefined && last.energy === row[energy];
    if (isEdge && last.photoelectric === row[photoelectric]) continue;
    if (isEdge && row[photoelectric] < last.photoelectric) throw new Error(`Z=${z}: downward edge`);
    const sum = row[photoelectric] + row[incoherent] + row[coherent] + row[pair];
    if (Math.abs(sum / row[total] - 1) > 2e-4)
      throw new Error(`Z=${z}: parts do not add up at ${row[energy]} keV`);
    kept.push({
      z,
      energy: row[energy],
      photoelectric: row[photoelectric],
      incoherent: row[incoherent],
      coherent: row[coherent],
      pair: row[pair],
      isEdge,
      shell: null,
    });
  }
  if (z === MISPLACED_EDGE.z) moveEdge(kept);
  const edges = kept.filter(({ isEdge }) => isEdge).reverse();
  edges.forEach((edge, rank) => (edge.shell = shellOfRank(z, rank, edge.energy)));
  return kept;
}

const rows = elements.filter(({ number }) => number <= MAX_Z).flatMap(rowsOf);
const numbers = (name, unit, description, pick) => ({
  name,
  type: new Float64(),
  unit,
  description,
  values: rows.map(pick),
});

writeArrowFile(
  new URL('../photon-cross-sections.arrow', import.meta.url),
  [
    { name: 'z', type: new Uint8(), unit: '1', description: 'atomic number', values: rows.map(({ z }) => z) },
    numbers(
      'energy_keV',
      'keV',
      'photon energy; an absorption edge is two rows of one energy',
      (r) => r.energy,
    ),
    numbers('photoelectric', 'cm2/g', 'photoelectric mass attenuation coefficient', (r) => r.photoelectric),
    numbers('incoherent', 'cm2/g', 'incoherent (Compton) mass attenuation coefficient', (r) => r.incoherent),
    numbers('coherent', 'cm2/g', 'coherent (Rayleigh) mass attenuation coefficient', (r) => r.coherent),
    numbers('pair', 'cm2/g', 'pair production in the nuclear and the electron field together', (r) => r.pair),
    {
      name: 'edge_shell',
      type: new Utf8(),
      unit: '',
      description: 'shell whose edge lies between the row before and this row; null where there is no edge',
      values: rows.map(({ shell }) => shell),
      nullable: true,
    },
  ],
  {
    source:
      'XCOM: M. J. Berger and J. H. Hubbell, Photon Cross Sections on a Personal Computer, NBSIR 87-3597 (1987), ' +
      'as tabulated in the fisx data package; shells by the binding energies of F. P. Larkins, ' +
      'Atomic Data and Nuclear Data Tables 20 (1977) 311',
  },
);
console.log(`photon-cross-sections.arrow: ${rows.length} rows`);
