// Builds the tables behind the stopping of electrons:
//   ../electron-elements.arrow   mean excitation energies of the elements
//   ../electron-shells.arrow     electrons and binding energy of their subshells
//   ../electron-radiative.arrow  radiative stopping powers of the elements ESTAR is at hand for
// Usage: node materials/data/build/electrons.mjs xraylib.json [folder of the fisx tables]
// (xraylib.json is made by dump-xraylib.py)
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { Float64, Uint8, Utf8 } from 'apache-arrow';
import { writeArrowFile } from './arrow-file.mjs';
import { readSpecFile } from './specfile.mjs';

// Fermium has no occupation in the package: 5f12 7s2 beside the closed shells.
const FERMIUM_ELECTRONS = { O6: 36 / 7, O7: 48 / 7, Q1: 2 };
const CAPACITY = [2, 2, 4, 4, 6, 6, 8];
// Hydrogen comes from water and oxygen; its mass fraction by the formula H2O (IUPAC atomic weights).
const HYDROGEN_IN_WATER = (2 * 1.008) / (2 * 1.008 + 15.999);
const ESTAR_ELEMENTS = {
  graphite: 6,
  oxygen: 8,
  sodium: 11,
  aluminum: 13,
  silicon: 14,
  iron: 26,
  copper: 29,
  germanium: 32,
  cadmium: 48,
  tin: 50,
  tellurium: 52,
  iodine: 53,
  xenon: 54,
  cesium: 55,
  tungsten: 74,
  lead: 82,
  bismuth: 83,
};

const dump = JSON.parse(readFileSync(process.argv[2], 'utf8'));
const folder = process.argv[3] ?? '/usr/share/fisx';
const [bindings] = readSpecFile(join(folder, 'EADL97_BindingEnergies.dat'));

function csvRows(name) {
  const lines = readFileSync(new URL(name, import.meta.url), 'utf8')
    .trim()
    .split('\n');
  return lines.slice(1).map((line) => line.split(','));
}

const elements = csvRows('mean-excitation-energies.csv').map(([z, excitation]) => ({
  z: Number(z),
  excitation: Number(excitation),
}));

function capacity(name) {
  return name === 'K' ? 2 : CAPACITY[Number(name[1]) - 1];
}

function subshells({ z, shells }) {
  const row = bindings.rows.find((values) => values[0] === z);
  const rows = shells.map(({ name, electrons }) => {
    const column = bindings.labels.findIndex((label) => label.split('(')[0] === name);
    const count = z === 100 ? (FERMIUM_ELECTRONS[name] ?? capacity(name)) : (electrons ?? 0);
    return { z, shell: name, electrons: count, binding: row[column] };
  });
  const occupied = rows.filter(({ electrons }) => electrons > 0);
  const sum = occupied.reduce((total, { electrons }) => total + electrons, 0);
  if (Math.abs(sum / z - 1) > 1e-4) throw new Error(`Z=${z}: ${sum} electrons`);
  for (const shell of occupied) {
    if (!(shell.binding > 0)) throw new Error(`Z=${z}: no binding energy of ${shell.shell}`);
    shell.electrons *= z / sum;
  }
  return occupied;
}

function radiativeRows() {
  const byMaterial = new Map();
  for (const [material, energy, radiative] of csvRows('estar-radiative.csv')) {
    if (!byMaterial.has(material)) byMaterial.set(material, []);
    byMaterial.get(material).push({ energy: Number(energy), radiative: Number(radiative) });
  }
  const oxygen = byMaterial.get('oxygen');
  const hydrogen = byMaterial.get('water.liquid').map(({ energy, radiative }, i) => {
    if (oxygen[i].energy !== energy) throw new Error(`water and oxygen differ in energy at ${energy} MeV`);
    return {
      energy,
      radiative: (radiative - (1 - HYDROGEN_IN_WATER) * oxygen[i].radiative) / HYDROGEN_IN_WATER,
    };
  });
  const tables = [
    [1, hydrogen],
    ...Object.entries(ESTAR_ELEMENTS).map(([name, z]) => [z, byMaterial.get(name)]),
  ];
  return tables.flatMap(([z, rows]) =>
    rows.map(({ energy, radiative }) => ({ z, energy: 1000 * energy, radiative })),
  );
}

const column = (rows, name, type, unit, description, pick) => ({
  name,
  type,
  unit,
  description,
  values: rows.map(pick),
});

writeArrowFile(
  new URL('../electron-elements.arrow', import.meta.url),
  [
    column(elements, 'z', new Uint8(), '1', 'atomic number', (r) => r.z),
    column(
      elements,
      'mean_excitation_eV',
      new Float64(),
      'eV',
      'mean excitation energy of the element in its usual state',
      (r) => r.excitation,
    ),
  ],
  { source: 'ICRU Report 37 (1984), table 4.3' },
);

const shells = dump.elements.flatMap(subshells);
writeArrowFile(
  new URL('../electron-shells.arrow', import.meta.url),
  [
    column(shells, 'z', new Uint8(), '1', 'atomic number', (r) => r.z),
    column(shells, 'shell', new Utf8(), '', 'subshell, K to Q', (r) => r.shell),
    column(shells, 'electrons', new Float64(), '1', 'electrons in the subshell', (r) => r.electrons),
    column(shells, 'binding_keV', new Float64(), 'keV', 'binding energy in the free atom', (r) => r.binding),
  ],
  {
    source:
      'binding energies EADL97: D. E. Cullen et al., UCRL-50400 vol. 30 (1991), as tabulated in the fisx data ' +
      'package; occupations as tabulated in the xraylib data package',
  },
);

const radiative = radiativeRows();
writeArrowFile(
  new URL('../electron-radiative.arrow', import.meta.url),
  [
    column(radiative, 'z', new Uint8(), '1', 'atomic number', (r) => r.z),
    column(radiative, 'energy_keV', new Float64(), 'keV', 'kinetic energy of the electron', (r) => r.energy),
    column(
      radiative,
      'radiative',
      new Float64(),
      'MeV cm2/g',
      'radiative mass stopping power, in the fields of nucleus and electrons together',
      (r) => r.radiative,
    ),
  ],
  {
    source:
      'NIST ESTAR (ICRU Report 37, 1984; S. M. Seltzer and M. J. Berger, Nucl. Instrum. Methods B 12 (1985) 95); ' +
      'hydrogen from liquid water less oxygen',
  },
);
console.log(`${elements.length} elements, ${shells.length} subshells, ${radiative.length} radiative rows`);
