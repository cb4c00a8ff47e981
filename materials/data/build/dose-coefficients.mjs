// Builds ../dose-coefficients.arrow from dose-tables.csv beside it: energy absorption of dry air with the share of
// the transferred energy that electrons radiate away again, H*(10) and effective dose per fluence.
// Usage: node materials/data/build/dose-coefficients.mjs   (after photon-cross-sections.mjs)
import { readFileSync } from 'node:fs';
import { Float64, Utf8, tableFromIPC } from 'apache-arrow';
import { writeArrowFile } from './arrow-file.mjs';
import { readCsv } from './csv.mjs';

const ELECTRON_MASS_MEV = 0.51099895; // CODATA 2018
// Dry air by mass: NISTIR 5632, Table 2 (C, N, O, Ar).
const AIR = { 6: 0.000124, 7: 0.755268, 8: 0.231781, 18: 0.012827 };

const here = (name) => new URL(name, import.meta.url);
const table = readCsv(here('dose-tables.csv')).map((row) => ({
  ...row,
  energy: Number(row.energy_MeV) * 1000,
  value: Number(row.value),
}));

/** Straight line in ln-ln through the points around x; the first line goes on below. */
function logLog(points, x) {
  const above = points.findIndex(([at]) => at > x);
  const i = Math.max(1, above < 0 ? points.length - 1 : above);
  const [[x1, y1], [x2, y2]] = [points[i - 1], points[i]];
  return y1 * (y2 / y1) ** (Math.log(x / x1) / Math.log(x2 / x1));
}

const yields = readCsv(here('air-radiation-yield.csv')).map((row) => [
  Number(row.energy_MeV),
  Number(row.radiation_yield),
]);
/** Share of its energy an electron that stops in air radiates (ESTAR); positrons are taken alike. */
const radiationYield = (energyMeV) => (energyMeV > 0 ? logLog(yields, energyMeV) : 0);

const xcom = [...tableFromIPC(readFileSync(here('../photon-cross-sections.arrow')))];
function airCoefficient(process, energyMeV) {
  return Object.entries(AIR).reduce((sum, [z, share]) => {
    const points = xcom
      .filter((row) => row.z === Number(z) && row[process] > 0)
      .map((row) => [row.energy_keV / 1000, row[process]]);
    return energyMeV < points[0][0] ? sum : sum + share * logLog(points, energyMeV);
  }, 0);
}

/** Means over the recoil electrons of free-electron scattering: energy, and energy they radiate (MeV). */
function recoil(energyMeV) {
  const [steps, k] = [4000, energyMeV / ELECTRON_MASS_MEV];
  let [weights, transferred, radiated] = [0, 0, 0];
  for (let i = 0; i < steps; i++) {
    const cosine = 1 - (2 * (i + 0.5)) / steps;
    const ratio = 1 / (1 + k * (1 - cosine));
    // Klein and Nishina 1929, the factors that do not depend on the angle left out.
    const weight = ratio ** 2 * (ratio + 1 / ratio - 1 + cosine ** 2);
    const electron = energyMeV * (1 - ratio);
    weights += weight;
    transferred += weight * electron;
    radiated += weight * electron * radiationYield(electron);
  }
  return { transferred: transferred / weights, radiated: radiated / weights };
}

/** Energy a pair radiates: either partner may take any share of the energy above the threshold alike. */
function pairRadiated(available) {
  const steps = 400;
  let sum = 0;
  for (let i = 0; i < steps; i++) {
    const electron = (available * (i + 0.5)) / steps;
    sum += (2 * electron * radiationYield(electron)) / steps;
  }
  return sum;
}

/** g: share of the energy transferred to electrons in air that they radiate away as bremsstrahlung. */
function radiatedShare(energyMeV) {
  const compton = recoil(energyMeV);
  const available = Math.max(0, energyMeV - 2 * ELECTRON_MASS_MEV);
  const [incoherent, pair, photoelectric] = ['incoherent', 'pair', 'photoelectric'].map((process) =>
    airCoefficient(process, energyMeV),
  );
  const transferred = incoherent * compton.transferred + pair * available + photoelectric * energyMeV;
  const radiated =
    incoherent * compton.radiated +
    pair * pairRadiated(available) +
    photoelectric * energyMeV * radiationYield(energyMeV);
  return radiated / transferred;
}

const shares = table
  .filter(({ quantity }) => quantity === 'air_energy_absorption')
  .map((row) => ({
    ...row,
    quantity: 'air_radiated_share',
    value: radiatedShare(row.energy / 1000),
    unit: '1',
    source: 'derived from NIST ESTAR radiation yields of dry air, XCOM and Klein-Nishina',
  }));
const rows = [...table, ...shares];

const texts = (name, description, pick) => ({
  name,
  type: new Utf8(),
  unit: '',
  description,
  values: rows.map(pick),
});
const numbers = (name, unit, description, pick) => ({
  name,
  type: new Float64(),
  unit,
  description,
  values: rows.map(pick),
});
writeArrowFile(
  here('../dose-coefficients.arrow'),
  [
    texts('quantity', 'what the value is', (r) => r.quantity),
    numbers(
      'energy_keV',
      'keV',
      'photon energy; an absorption edge is two rows of one energy',
      (r) => r.energy,
    ),
    numbers('value', '', 'value in the unit of the row', (r) => r.value),
    texts('unit', 'unit of the value', (r) => r.unit),
    texts('source', 'where the value is printed', (r) => r.source),
  ],
  { source: 'NISTIR 5632 (1995), ICRP 74 (1996) / ICRU 57 (1998), ICRP 116 (2010); see each row' },
);
console.log(`dose-coefficients.arrow: ${rows.length} rows`);
for (const { energy, value } of shares.filter(({ energy: e }) => e >= 500))
  console.log(energy, value.toFixed(5));
