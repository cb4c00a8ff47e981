/** An efficiency curve as the files of its folder, and its points read back from there. */
import type { CurvePoint, EfficiencyCurve, RunResult, StopReason, Warning } from '../../engine/index.js';
import { replaceResult } from '../result/result-folder.js';
import {
  makeManifest,
  MANIFEST_NAME,
  sha256,
  type Manifest,
  type ManifestEnergy,
  type RunRecord,
} from '../result/manifest.js';
import { encodeTotals } from '../result/result-tables.js';
import {
  EFFICIENCY_NAME,
  FITS_NAME,
  TOTALS_NAME,
  type PackedResult,
  type StoredResult,
} from '../result/stored-result.js';
import { curveRows } from './curve-rows.js';
import { encodeCurve, encodeFits } from './curve-tables.js';
import { fitCurves } from './fit-curve.js';

/** The rows of a curve and the polynomials fitted to them. */
export function efficiencyOf({ setup, points }: EfficiencyCurve): NonNullable<StoredResult['efficiency']> {
  const totals = points.flatMap((point) => point.totals);
  const detectors = setup.stack.flatMap(({ name, detector }) => (detector === null ? [] : [name]));
  const rows = curveRows(points, totals, detectors);
  return { rows, fits: fitCurves(setup, rows) };
}

/**
 * Writes a curve to `folder` as `thickset run` does: totals.arrow, efficiency.arrow, efficiency_fit.arrow and
 * manifest.json, all or nothing. What is in the folder from an earlier run is replaced.
 * @throws ThicksetError disk_full, output_not_writable
 */
export function writeCurve(
  folder: string,
  curve: EfficiencyCurve,
  record: Partial<RunRecord> = {},
): Manifest {
  const whole = { setupText: null, threads: null, finished: new Date(), ...record };
  const { files, manifest } = packCurve(curve, [], whole);
  replaceResult(folder, files);
  return manifest;
}

/** Turns a curve into files, without touching the disk. */
export function packCurve(
  curve: EfficiencyCurve,
  warnings: readonly Warning[],
  record: RunRecord,
): PackedResult {
  const { points } = curve;
  const totals = points.flatMap((point) => point.totals);
  const efficiency = efficiencyOf(curve);
  const files = new Map<string, Uint8Array>([
    [TOTALS_NAME, encodeTotals(totals)],
    [EFFICIENCY_NAME, encodeCurve(efficiency.rows)],
    [FITS_NAME, encodeFits(efficiency.fits)],
  ]);
  const hashes = Object.fromEntries([...files].map(([name, content]) => [name, sha256(content)]));
  const whole = { ...asOneRun(curve), warnings: [...warnings, ...mergeWarnings(points)] };
  const manifest = { ...makeManifest(whole, record, hashes), energies: points.map(describeEnergy) };
  files.set(MANIFEST_NAME, Buffer.from(`${JSON.stringify(manifest, null, 2)}\n`));
  return { manifest, totals, spectra: [], efficiency, files };
}

/** All runs of a curve as if they were one that emits its energies one after the other. */
function asOneRun({ setup, points, timings, stopped }: EfficiencyCurve): RunResult {
  const sum = (value: (point: CurvePoint) => number) => points.reduce((all, point) => all + value(point), 0);
  const lines = (setup.energyGridKeV ?? []).map((energyKeV) => ({ energyKeV, perDecay: 1 }));
  return {
    setup: { ...setup, source: { ...setup.source, emission: { ...setup.source.emission, lines } } },
    histories: sum(({ histories }) => histories),
    batches: sum(({ batches }) => batches),
    totals: [],
    spectra: [],
    balance: {
      energyInKeV: sum(({ balance }) => balance.energyInKeV),
      energyDepositedKeV: sum(({ balance }) => balance.energyDepositedKeV),
      energyOutKeV: sum(({ balance }) => balance.energyOutKeV),
      relativeError: Math.max(0, ...points.map(({ balance }) => balance.relativeError)),
    },
    warnings: [],
    timings,
    stopped: stopped === 'interrupted' ? stopped : stopOf(points),
  };
}

/** A curve is held up by its least complete energy. */
function stopOf(points: readonly CurvePoint[]): StopReason {
  const reasons = points.map(({ stopped }) => stopped);
  if (reasons.includes('time_limit')) return 'time_limit';
  return reasons.length > 0 && reasons.every((reason) => reason === 'until') ? 'until' : 'histories';
}

/** Warnings of one code are told once, with how often they came up. */
export function mergeWarnings(points: readonly CurvePoint[]): Warning[] {
  const merged = new Map<string, Warning>();
  for (const warning of points.flatMap(({ warnings }) => warnings)) {
    const count = (merged.get(warning.code)?.count ?? 0) + warning.count;
    merged.set(warning.code, { ...(merged.get(warning.code) ?? warning), count });
  }
  return [...merged.values()];
}

function describeEnergy({
  energyKeV,
  seed,
  histories,
  batches,
  stopped,
  balance,
  warnings,
}: CurvePoint): ManifestEnergy {
  return {
    energy_keV: energyKeV,
    seed,
    histories,
    batches,
    stopped,
    balance: {
      energy_in_keV: balance.energyInKeV,
      energy_deposited_keV: balance.energyDepositedKeV,
      energy_out_keV: balance.energyOutKeV,
      relative_error: balance.relativeError,
    },
    warnings,
  };
}

/** The points of a stored curve. */
export function storedPoints({ manifest, totals }: StoredResult): CurvePoint[] {
  return (manifest.energies ?? []).map(
    ({ energy_keV: energyKeV, seed, histories, batches, stopped, balance, warnings }) => ({
      energyKeV,
      seed,
      histories,
      batches,
      stopped,
      warnings,
      totals: totals.filter(({ lineKeV }) => lineKeV === energyKeV),
      balance: {
        energyInKeV: balance.energy_in_keV,
        energyDepositedKeV: balance.energy_deposited_keV,
        energyOutKeV: balance.energy_out_keV,
        relativeError: balance.relative_error,
      },
    }),
  );
}
