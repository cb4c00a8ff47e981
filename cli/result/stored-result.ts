/** Writing a run's result to a folder and reading it back. */
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import type { DepthRow, QuantityRow, RunResult, Spectrum } from '../../engine/result.js';
import type { CurveRow } from '../efficiency/curve-rows.js';
import { decodeCurve, decodeFits } from '../efficiency/curve-tables.js';
import type { CurveFit } from '../efficiency/fit-curve.js';
import { errors, ThicksetError } from '../errors.js';
import {
  makeManifest,
  MANIFEST_NAME,
  parseManifest,
  sha256,
  type Manifest,
  type RunRecord,
} from './manifest.js';
import { replaceResult, type FileSystem } from './result-folder.js';
import {
  decodeDepth,
  decodeSpectra,
  decodeTotals,
  encodeDepth,
  encodeSpectra,
  encodeTotals,
} from './result-tables.js';

export const TOTALS_NAME = 'totals.arrow';
export const SPECTRA_NAME = 'spectra.arrow';
/** Only of runs with a depth profile. */
export const DEPTH_NAME = 'depth.arrow';
/** Only of efficiency curves, which have no spectra. */
export const EFFICIENCY_NAME = 'efficiency.arrow';
export const FITS_NAME = 'efficiency_fit.arrow';

/** A result as its folder holds it. */
export interface StoredResult {
  readonly manifest: Manifest;
  readonly totals: readonly QuantityRow[];
  /** Unknown bins are NaN. */
  readonly spectra: readonly Spectrum[];
  /** Absent without a depth profile. */
  readonly depth?: readonly DepthRow[];
  /** Of efficiency curves only. */
  readonly efficiency?: { readonly rows: readonly CurveRow[]; readonly fits: readonly CurveFit[] };
}

/** A result with the files it is written as. */
export interface PackedResult extends StoredResult {
  readonly files: ReadonlyMap<string, Uint8Array>;
}

/** Turns a run into the files of its folder, without touching the disk. */
export function packResult(result: RunResult, record: RunRecord): PackedResult {
  const files = new Map<string, Uint8Array>([
    [TOTALS_NAME, encodeTotals(result.totals)],
    [SPECTRA_NAME, encodeSpectra(result.spectra)],
  ]);
  const depth = result.depth ?? [];
  if (depth.length > 0) files.set(DEPTH_NAME, encodeDepth(depth));
  const hashes = Object.fromEntries([...files].map(([name, content]) => [name, sha256(content)]));
  const manifest = makeManifest(result, record, hashes);
  files.set(MANIFEST_NAME, Buffer.from(`${JSON.stringify(manifest, null, 2)}\n`));
  return { manifest, totals: result.totals, spectra: result.spectra, depth, files };
}

/**
 * Writes a run to `folder`: totals.arrow, spectra.arrow and manifest.json, all or nothing. What is in the folder
 * from an earlier run is replaced (`checkResultFolder` tells beforehand whether that may be).
 * @throws ThicksetError disk_full, output_not_writable
 */
export function writeResult(
  folder: string,
  result: RunResult,
  record: Partial<RunRecord> = {},
  system?: FileSystem,
): Manifest {
  const packed = packResult(result, { setupText: null, threads: null, finished: new Date(), ...record });
  replaceResult(folder, packed.files, system);
  return packed.manifest;
}

function readFile(path: string): Buffer {
  try {
    return readFileSync(path);
  } catch (cause) {
    const code = (cause as NodeJS.ErrnoException).code;
    if (code === 'ENOENT' || code === 'ENOTDIR') {
      throw errors.resultMissing(path);
    }
    throw errors.resultDamaged(path, `it cannot be read (${code ?? 'unknown error'})`, cause);
  }
}

/** The manifest of a result folder. @throws ThicksetError result_missing, result_damaged */
export function readManifest(folder: string): Manifest {
  const path = join(folder, MANIFEST_NAME);
  const text = readFile(path).toString('utf8');
  try {
    return parseManifest(text);
  } catch (cause) {
    throw errors.resultDamaged(path, `it is no manifest of a result (${(cause as Error).message})`, cause);
  }
}

function readTable<T>(folder: string, name: string, manifest: Manifest, decode: (bytes: Uint8Array) => T): T {
  const path = join(folder, name);
  const bytes = readFile(path);
  if (sha256(bytes) !== manifest.files[name]) {
    throw errors.resultDamaged(path, `it is not the file that ${MANIFEST_NAME} lists`);
  }
  try {
    return decode(bytes);
  } catch (cause) {
    if (cause instanceof ThicksetError) {
      throw cause;
    }
    throw errors.resultDamaged(path, (cause as Error).message, cause);
  }
}

/**
 * Reads back what `thickset run` wrote; every file is checked against the hash in the manifest.
 * @throws ThicksetError result_missing, result_damaged
 */
export function readResult(folder: string): StoredResult {
  const manifest = readManifest(folder);
  const hasDepth = manifest.files[DEPTH_NAME] !== undefined;
  const isCurve = manifest.energies !== undefined;
  return {
    manifest,
    totals: withReliability(readTable(folder, TOTALS_NAME, manifest, decodeTotals), manifest),
    spectra: isCurve ? [] : readTable(folder, SPECTRA_NAME, manifest, decodeSpectra),
    ...(hasDepth ? { depth: readTable(folder, DEPTH_NAME, manifest, decodeDepth) } : {}),
    ...(isCurve ? { efficiency: readCurve(folder, manifest) } : {}),
  };
}

function withReliability(rows: readonly QuantityRow[], { reliability = [] }: Manifest): QuantityRow[] {
  return rows.map((row) => {
    const found = reliability.find(
      ({ quantity, layer }) => quantity === row.quantity && layer === row.layer && row.lineKeV === null,
    );
    return found ? { ...row, reliability: { contributing: found.contributing, vov: found.vov } } : row;
  });
}

function readCurve(folder: string, manifest: Manifest): StoredResult['efficiency'] {
  return {
    rows: readTable(folder, EFFICIENCY_NAME, manifest, decodeCurve),
    fits: readTable(folder, FITS_NAME, manifest, decodeFits),
  };
}
