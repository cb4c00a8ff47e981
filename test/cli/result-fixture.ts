/** A result made by hand, with every kind of row that files and screens must cope with. The numbers mean nothing. */
import type { QuantityRow, RunResult, Spectrum } from '../../engine/result.js';
import type { Setup } from '../../engine/setup.js';

export const fixtureSetup: Setup = {
  title: 'Crystal behind an aluminium window',
  seed: 'window-1',
  source: {
    shape: { kind: 'point', distanceCm: 25, offsetCm: 0 },
    emission: {
      lines: [
        { energyKeV: 661.657, perDecay: 0.8499 },
        { energyKeV: 32.194, perDecay: 0.0355 },
      ],
      continuum: [],
      photonsPerDecay: 0.8854,
      nuclide: 'Cs-137',
    },
    activityBq: 37000,
    liveTimeS: 600,
  },
  stack: [
    {
      name: 'window',
      material: { name: 'aluminium', densityGPerCm3: 2.699, constituents: [{ z: 13, massFraction: 1 }] },
      thicknessCm: 0.05,
      radiusCm: null,
      detector: null,
    },
    { name: 'gap', material: null, thicknessCm: 0.2, radiusCm: null, detector: null },
    {
      name: 'crystal',
      material: {
        name: 'NaI',
        densityGPerCm3: 3.667,
        constituents: [
          { z: 11, massFraction: 0.1534 },
          { z: 53, massFraction: 0.8466 },
        ],
      },
      thicknessCm: 7.62,
      radiusCm: 3.81,
      detector: { resolution: null, thresholdKeV: null, windows: [] },
    },
  ],
  extent: { kind: 'radius', radiusCm: 3.81 },
  tally: {
    energyEdgesKeV: Float64Array.from({ length: 141 }, (_, i) => 5 * i),
    dose: [],
    dosePoints: [],
    depthProfile: null,
  },
  physics: {
    coherent: true,
    boundIncoherent: true,
    doppler: false,
    fluorescence: true,
    pair: true,
    bremsstrahlung: true,
    cutoffKeV: 1,
  },
  run: {
    histories: 1_000_000,
    until: { quantity: 'full_energy', layer: null, relativeError: 0.005 },
    timeLimitS: 600,
    transport: 'auto',
  },
};

function row(
  quantity: string,
  layer: string | null,
  lineKeV: number | null,
  mean: number | null,
  stdError: number | null,
  unit = '1',
): QuantityRow {
  return { quantity, layer, lineKeV, mean, stdError, unit };
}

const totals: readonly QuantityRow[] = [
  row('incident', null, null, 0.0057734, 0),
  row('transmitted', null, null, 0.00123412, 0.0000352),
  row('transmitted_energy', null, null, 0.56123, 0.0171, 'keV'),
  row('uncollided', null, null, 4.12e-7, 1.93e-8),
  row('reflected', null, null, 0.000412, 0.0000201),
  row('reflected_energy', null, null, 0.0712, 0.0038, 'keV'),
  row('side_escape', null, null, 0, 0),
  row('side_escape_energy', null, null, 0, 0, 'keV'),
  row('deposited_energy', 'window', null, 0.0083, 0.00071, 'keV'),
  row('deposited_energy', 'crystal', null, 1.4567, 0.0062, 'keV'),
  row('interacting', 'window', null, 0.0001234, 0.000011),
  row('interacting', 'crystal', null, 0.0034567, 0.0000187),
  row('full_energy', 'crystal', 661.657, 0.0012098, 0.0000112),
  row('full_energy', 'crystal', 32.194, 0.000201, 0.000014),
  row('peak_to_total', 'crystal', 661.657, 0.41, 0.0042),
  row('peak_to_total', 'crystal', 32.194, null, null),
];

function spectrum(
  tally: Spectrum['tally'],
  layer: string | null,
  height: (energyKeV: number) => number,
): Spectrum {
  const edges = fixtureSetup.tally.energyEdgesKeV;
  const mean = Float64Array.from({ length: 140 }, (_, bin) => height(edges[bin] + 2.5));
  return {
    tally,
    layer,
    energyLowKeV: edges.slice(0, -1),
    energyHighKeV: edges.slice(1),
    mean,
    stdError: mean.map((value) => value / 10),
  };
}

const pulses = (energy: number): number => {
  if (energy > 660 && energy < 665) {
    return 1.2e-3;
  }
  return energy < 477 ? 1e-5 * (1 + (energy / 477) ** 4) : energy < 640 ? 5e-7 : 0;
};

export const fixtureSpectra: readonly Spectrum[] = [
  spectrum('transmitted', null, (energy) => (energy < 660 ? 1e-5 * (1 - energy / 800) : 0)),
  spectrum('reflected', null, (energy) => (energy > 180 && energy < 260 ? 2e-5 : 0)),
  spectrum('side_escape', null, () => 0),
  spectrum('deposited', 'window', (energy) => energy * 1e-8),
  spectrum('pulse_height', 'crystal', pulses),
];

/** The whole result; parts of it can be replaced. */
export function fixtureResult(changes: Partial<RunResult> = {}): RunResult {
  return {
    setup: fixtureSetup,
    histories: 800_000,
    batches: 80,
    totals,
    spectra: fixtureSpectra,
    balance: {
      energyInKeV: 5.1e8,
      energyDepositedKeV: 4e8,
      energyOutKeV: 1.1e8,
      relativeError: 2.3e-15,
    },
    warnings: [
      { code: 'electron_range', message: 'electrons of window fly further than it is thick', count: 1 },
    ],
    timings: { wallS: 600.4, workerS: 1195.2, historiesPerSecond: 1338.7 },
    stopped: 'time_limit',
    ...changes,
  };
}
