/**
 * manifest.json: what a run was and how it went. Everything that may differ between two runs of one setup (times,
 * threads) stands here and not in the Arrow files. Keys are those users see, with units; lengths and energies are
 * in the fixed units of a checked setup. It is written last and names the other files with their hashes, so that a
 * folder is either whole or known not to be.
 */
import { createHash } from 'node:crypto';
import type { DetectorXRays, RunResult, StopReason, Warning } from '../../engine/result.js';
import type { Detector, Physics, Resolution, Setup, SourceShape } from '../../engine/setup.js';
import { packageVersion } from '../version.js';

export const MANIFEST_NAME = 'manifest.json';
const FORMAT = 'thickset result 1';

export interface ManifestSource {
  readonly kind: SourceShape['kind'];
  /** The other properties of the source's shape, with units in their names. */
  readonly shape: Readonly<Record<string, number | string>>;
  readonly nuclide: string | null;
  readonly lines: readonly { readonly energy_keV: number; readonly per_decay: number }[];
  /** Range of a continuous spectrum; null where the source emits lines. */
  readonly continuum: { readonly energy_low_keV: number; readonly energy_high_keV: number } | null;
  readonly photons_per_decay: number | null;
  readonly activity_Bq: number | null;
  readonly live_time_s: number | null;
}

/** The width of peaks; see `detector.fwhm` of setup files. */
export type ManifestWidth =
  | { readonly kind: 'at_energy'; readonly fwhm_keV: number; readonly at_keV: number }
  | { readonly kind: 'formula'; readonly a: number; readonly b: number; readonly c: number }
  | { readonly kind: 'table'; readonly energy_keV: readonly number[]; readonly fwhm_keV: readonly number[] };

/** What is made of the pulse heights of a detector without a new run. */
export interface ManifestResponse {
  readonly fwhm: ManifestWidth | null;
  readonly threshold_keV: number | null;
  readonly windows: readonly {
    readonly name: string;
    readonly energy_low_keV: number;
    readonly energy_high_keV: number;
  }[];
}

/** K X rays whose escape a detector's spectrum may show. */
export interface ManifestXRays {
  readonly element: string;
  readonly series: 'Ka' | 'Kb';
  readonly edge_keV: number;
  readonly lines: readonly { readonly energy_keV: number; readonly share: number }[];
}

export interface ManifestLayer {
  readonly name: string;
  /** null: vacuum */
  readonly material: string | null;
  readonly density_g_per_cm3: number | null;
  readonly thickness_cm: number;
  readonly radius_cm: number | null;
  readonly detector: boolean;
  /** Of detectors only. */
  readonly response?: ManifestResponse;
  readonly x_rays?: readonly ManifestXRays[];
}

export interface ManifestUntil {
  readonly quantity: string;
  readonly layer: string | null;
  readonly relative_error: number;
}

/** Histories that contributed to a figure, and the relative variance of its variance. */
export interface ManifestReliability {
  readonly quantity: string;
  readonly layer: string | null;
  readonly contributing: number;
  readonly vov: number | null;
}

export interface Manifest {
  readonly format: typeof FORMAT;
  readonly version: string;
  readonly title: string;
  readonly seed: string;
  readonly histories: number;
  readonly batches: number;
  readonly stopped: StopReason;
  readonly run: {
    readonly histories: number;
    readonly until: ManifestUntil | null;
    readonly time_limit_s: number | null;
    readonly transport: string;
  };
  readonly source: ManifestSource;
  readonly stack: readonly ManifestLayer[];
  readonly extent: Readonly<Record<string, number | string>> | null;
  readonly physics: Readonly<Record<string, boolean | number>>;
  readonly balance: {
    readonly energy_in_keV: number;
    readonly energy_deposited_keV: number;
    readonly energy_out_keV: number;
    readonly relative_error: number;
    /** Standard error of that, in transport with weights. */
    readonly relative_std_error?: number;
  };
  /** How far the errors of weighted figures can be relied on; empty for others. */
  readonly reliability?: readonly ManifestReliability[];
  readonly warnings: readonly Warning[];
  readonly timings: {
    readonly wall_s: number;
    readonly worker_s: number;
    readonly histories_per_second: number;
    readonly threads: number | null;
    /** When the run ended, ISO 8601, UTC. */
    readonly finished: string;
  };
  /** Of efficiency curves only: the energies that are finished; histories and the like are of all together. */
  readonly energies?: readonly ManifestEnergy[];
  /** The setup file as it was read; null for a setup made by a program. */
  readonly setup: { readonly text: string; readonly sha256: string } | null;
  /** SHA-256 of the other files of the folder, by name. */
  readonly files: Readonly<Record<string, string>>;
}

/** One energy of an efficiency curve: its run can be done by itself with this seed. */
export interface ManifestEnergy {
  readonly energy_keV: number;
  readonly seed: string;
  readonly histories: number;
  readonly batches: number;
  readonly stopped: StopReason;
  readonly balance: Manifest['balance'];
  readonly warnings: readonly Warning[];
}

/** What a run does not know about itself. */
export interface RunRecord {
  readonly setupText: string | null;
  readonly threads: number | null;
  readonly finished: Date;
}

export function sha256(content: string | Uint8Array): string {
  return createHash('sha256').update(content).digest('hex');
}

/** `distanceCm` → `distance_cm`: the names used in files. */
function snakeCase(name: string): string {
  return name.replace(/[A-Z]/g, (letter) => `_${letter.toLowerCase()}`).replace(/_ke_v$/, '_keV');
}

function withSnakeCase<T>(object: Readonly<Record<string, T>>): Record<string, T> {
  return Object.fromEntries(Object.entries(object).map(([name, value]) => [snakeCase(name), value]));
}

function describeSource({ shape, emission, activityBq, liveTimeS }: Setup['source']): ManifestSource {
  const { kind, ...rest } = shape;
  const bins = emission.continuum;
  return {
    kind,
    shape: withSnakeCase<number | string>(rest),
    nuclide: emission.nuclide,
    lines: emission.lines.map((line) => ({ energy_keV: line.energyKeV, per_decay: line.perDecay })),
    continuum:
      bins.length === 0
        ? null
        : { energy_low_keV: bins[0].energyLowKeV, energy_high_keV: bins[bins.length - 1].energyHighKeV },
    photons_per_decay: emission.photonsPerDecay,
    activity_Bq: activityBq,
    live_time_s: liveTimeS,
  };
}

/** The width of peaks as the manifest has it. */
export function describeWidth(resolution: Resolution): ManifestWidth {
  switch (resolution.kind) {
    case 'at_energy':
      return { kind: 'at_energy', fwhm_keV: resolution.fwhmKeV, at_keV: resolution.atKeV };
    case 'formula':
      return resolution;
    case 'table':
      return { kind: 'table', energy_keV: resolution.energyKeV, fwhm_keV: resolution.fwhmKeV };
  }
}

/** The other way round. */
export function widthFromManifest(width: ManifestWidth): Resolution {
  switch (width.kind) {
    case 'at_energy':
      return { kind: 'at_energy', fwhmKeV: width.fwhm_keV, atKeV: width.at_keV };
    case 'formula':
      return width;
    case 'table':
      return { kind: 'table', energyKeV: width.energy_keV, fwhmKeV: width.fwhm_keV };
  }
}

function describeDetector(detector: Detector, xRays: DetectorXRays | undefined): Partial<ManifestLayer> {
  return {
    response: {
      fwhm: detector.resolution && describeWidth(detector.resolution),
      threshold_keV: detector.thresholdKeV,
      windows: detector.windows.map(({ name, energyLowKeV, energyHighKeV }) => ({
        name,
        energy_low_keV: energyLowKeV,
        energy_high_keV: energyHighKeV,
      })),
    },
    x_rays: (xRays?.groups ?? []).map(({ element, series, edgeKeV, lines }) => ({
      element,
      series,
      edge_keV: edgeKeV,
      lines: lines.map(({ energyKeV, share }) => ({ energy_keV: energyKeV, share })),
    })),
  };
}

function describeStack({ setup: { stack }, xRays = [] }: RunResult): ManifestLayer[] {
  return stack.map((layer) => ({
    name: layer.name,
    material: layer.material?.name ?? null,
    density_g_per_cm3: layer.material?.densityGPerCm3 ?? null,
    thickness_cm: layer.thicknessCm,
    radius_cm: layer.radiusCm,
    detector: layer.detector !== null,
    ...(layer.detector &&
      describeDetector(
        layer.detector,
        xRays.find((found) => found.layer === layer.name),
      )),
  }));
}

function describeRun({ histories, until, timeLimitS, transport }: Setup['run']): Manifest['run'] {
  return {
    histories,
    until: until && { quantity: until.quantity, layer: until.layer, relative_error: until.relativeError },
    time_limit_s: timeLimitS,
    transport,
  };
}

/** The manifest of a run; `files` are the hashes of the files written beside it. */
export function makeManifest(
  result: RunResult,
  record: RunRecord,
  files: Readonly<Record<string, string>>,
): Manifest {
  const { setup, balance, timings } = result;
  return {
    format: FORMAT,
    version: packageVersion(),
    title: setup.title,
    seed: setup.seed,
    histories: result.histories,
    batches: result.batches,
    stopped: result.stopped,
    run: describeRun(setup.run),
    source: describeSource(setup.source),
    stack: describeStack(result),
    extent: setup.extent && withSnakeCase<number | string>({ ...setup.extent }),
    physics: withSnakeCase<boolean | number>({ ...(setup.physics satisfies Physics) }),
    balance: {
      energy_in_keV: balance.energyInKeV,
      energy_deposited_keV: balance.energyDepositedKeV,
      energy_out_keV: balance.energyOutKeV,
      relative_error: balance.relativeError,
      ...(balance.relativeStdError === undefined ? {} : { relative_std_error: balance.relativeStdError }),
    },
    reliability: result.totals.flatMap(({ quantity, layer, reliability }) =>
      reliability ? [{ quantity, layer, ...reliability }] : [],
    ),
    warnings: result.warnings,
    timings: {
      wall_s: timings.wallS,
      worker_s: timings.workerS,
      histories_per_second: timings.historiesPerSecond,
      threads: record.threads,
      finished: record.finished.toISOString(),
    },
    setup: record.setupText === null ? null : { text: record.setupText, sha256: sha256(record.setupText) },
    files,
  };
}

const REQUIRED = [
  'version',
  'seed',
  'histories',
  'stopped',
  'run',
  'source',
  'stack',
  'timings',
  'files',
] as const;

/** Reads a manifest back. @throws Error when the text is none */
export function parseManifest(text: string): Manifest {
  const value = JSON.parse(text) as Partial<Manifest> | null;
  if (typeof value !== 'object' || value === null || value.format !== FORMAT) {
    throw new Error(`the format is not "${FORMAT}"`);
  }
  const missing = REQUIRED.filter((key) => value[key] === undefined || value[key] === null);
  if (missing.length > 0) {
    throw new Error(`${missing.join(', ')} missing`);
  }
  return value as Manifest;
}
