// Builds ../nuclides.arrow and ../nuclide-lines.arrow from nuclide-list.csv and nuclide-lines.csv beside it.
// Usage: node materials/data/build/nuclides.mjs
import { Float64, Utf8 } from 'apache-arrow';
import { writeArrowFile } from './arrow-file.mjs';
import { readCsv } from './csv.mjs';

const SOURCE =
  'Decay Data Evaluation Project (DDEP), tables of recommended data; the evaluation of each nuclide in its row';
const KIND = { gamma: 'gamma', annihilation: 'annihilation', 'K x-ray': 'x_ray', 'L x-ray': 'x_ray' };

const list = readCsv(new URL('nuclide-list.csv', import.meta.url));
const lines = readCsv(new URL('nuclide-lines.csv', import.meta.url));
// Twelve digits are more than any evaluation gives; they take off the rounding of the division.
const perDecay = (per100) => Number((Number(per100) / 100).toPrecision(12));
const numberOrNull = (text) => (text === '' ? null : Number(text));

for (const line of lines) {
  const entry = list.find(({ nuclide }) => nuclide === line.nuclide);
  if (!entry || Number(entry.half_life_s) !== Number(line.half_life_s))
    throw new Error(`no entry of ${line.nuclide}`);
  if (!KIND[line.kind]) throw new Error(`unknown kind ${line.kind}`);
  for (const key of ['energy_keV', 'photons_per_100_decays']) {
    if (!(Number(line[key]) > 0)) throw new Error(`${line.nuclide}: ${key} ${line[key]}`);
  }
}

const texts = (name, description, values, nullable = false) => ({
  name,
  type: new Utf8(),
  unit: '',
  description,
  values,
  nullable,
});
const numbers = (name, unit, description, values, nullable = false) => ({
  name,
  type: new Float64(),
  unit,
  description,
  values,
  nullable,
});

writeArrowFile(
  new URL('../nuclides.arrow', import.meta.url),
  [
    texts(
      'nuclide',
      'name',
      list.map((r) => r.nuclide),
    ),
    numbers(
      'half_life_s',
      's',
      'half-life',
      list.map((r) => Number(r.half_life_s)),
    ),
    texts(
      'evaluation',
      'evaluator and year',
      list.map((r) => r.ddep_evaluation),
    ),
  ],
  { source: SOURCE },
);
writeArrowFile(
  new URL('../nuclide-lines.arrow', import.meta.url),
  [
    texts(
      'nuclide',
      'decaying nuclide',
      lines.map((r) => r.nuclide),
    ),
    numbers(
      'energy_keV',
      'keV',
      'photon energy',
      lines.map((r) => Number(r.energy_keV)),
    ),
    numbers(
      'energy_uncertainty_keV',
      'keV',
      'standard uncertainty; null where none is given',
      lines.map((r) => numberOrNull(r.energy_unc_keV)),
      true,
    ),
    numbers(
      'per_decay',
      '1',
      'photons per decay',
      lines.map((r) => perDecay(r.photons_per_100_decays)),
    ),
    numbers(
      'per_decay_uncertainty',
      '1',
      'standard uncertainty; null where none is given',
      lines.map((r) => (r.unc_photons_per_100_decays === '' ? null : perDecay(r.unc_photons_per_100_decays))),
      true,
    ),
    texts(
      'kind',
      'gamma, x_ray or annihilation',
      lines.map((r) => KIND[r.kind]),
    ),
    texts(
      'transition',
      'code in the evaluation: g, g511, XKa1, XL and so on',
      lines.map((r) => r.ddep_type),
    ),
    texts(
      'origin',
      'nuclide or atom the photon comes from',
      lines.map((r) => r.origin),
    ),
    texts(
      'source',
      'evaluation',
      lines.map((r) => r.source),
    ),
  ],
  { source: SOURCE },
);
console.log(`nuclides.arrow: ${list.length} nuclides, nuclide-lines.arrow: ${lines.length} lines`);
