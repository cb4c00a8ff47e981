/** The cases of the bench: four stacks that the yardstick plays too, with the arguments it takes. */

const PLAIN =
  '{coherent: false, bound_incoherent: false, doppler: false, fluorescence: false, pair: false, bremsstrahlung: false}';

export const CASES = [
  { name: 'NaI 7.62 cm, 661.7 keV', energyKeV: 661.7, layers: [['NaI', 7.62]], detector: 0 },
  { name: 'lead 3 cm, 1 MeV', energyKeV: 1000, layers: [['lead', 3]], detector: 0 },
  { name: 'concrete 30 cm, 1.25 MeV', energyKeV: 1250, layers: [['concrete', 30]], detector: 0 },
  {
    name: 'Al 0.05 + NaI 7.62 + lead 2 cm, 661.7 keV',
    energyKeV: 661.7,
    layers: [
      ['aluminium', 0.05],
      ['NaI', 7.62],
      ['lead', 2],
    ],
    detector: 1,
  },
];

const PHYSICS = { plain: PLAIN, all: '{}' };
/** The switches of `physics`. */
export const PROCESSES = [
  'coherent',
  'bound_incoherent',
  'doppler',
  'fluorescence',
  'pair',
  'bremsstrahlung',
];

/** Setup text of a case; `physics` is `plain` (what the yardstick plays), `all`, or the process to leave out. */
export function setupText({ name, energyKeV, layers, detector }, physics, histories) {
  const stack = layers.map(
    ([material, thickness], i) =>
      `  - {name: layer${i}, material: ${material}, thickness: ${thickness} cm${i === detector ? ', detector: {}' : ''}}`,
  );
  return [
    `title: ${JSON.stringify(name)}`,
    'seed: bench',
    `source: {kind: beam, energy: ${energyKeV} keV}`,
    'stack:',
    ...stack,
    'tally: {energy_bins: {width: 1 keV}}',
    `physics: ${PHYSICS[physics] ?? `{${physics}: false}`}`,
    `run: {histories: ${histories}, transport: analog}`,
  ].join('\n');
}

/** Arguments of the yardstick for a case. */
export function yardstickArguments({ energyKeV, layers, detector }, histories) {
  const stack = layers.flatMap(([material, thickness]) => [`${material}.csv`, String(thickness)]);
  return [String(histories), String(energyKeV), String(detector), ...stack];
}
