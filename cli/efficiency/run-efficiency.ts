/** `thickset run` for a setup with a grid of energies: many runs, one table of efficiencies. */
import { existsSync } from 'node:fs';
import { availableParallelism } from 'node:os';
import { join } from 'node:path';
import {
  EngineError,
  simulateEfficiency,
  type CurvePoint,
  type EfficiencyCurve,
  type Setup,
} from '../../engine/index.js';
import { finishedRun } from '../checkpoint/finished.js';
import type { RunIdentity } from '../checkpoint/identity.js';
import { RunFolder } from '../checkpoint/run-folder.js';
import { fromEngine } from '../engine-errors.js';
import { errors, EXIT_CODES } from '../errors.js';
import { onInterrupt } from '../interrupt.js';
import { MANIFEST_NAME } from '../result/manifest.js';
import { asFolderError, replaceResult } from '../result/result-folder.js';
import { readResult, type PackedResult } from '../result/stored-result.js';
import type { SetupFile } from '../setup-reader.js';
import { printResult } from '../summary-command.js';
import { showProgress } from '../text/progress-line.js';
import { mergeWarnings, packCurve, storedPoints } from './pack-curve.js';

/** What the command line says of the run. */
export interface CurveRunOptions {
  readonly out: string;
  readonly overwrite?: boolean;
  readonly resume?: boolean;
  readonly checkpoint: number;
  readonly json?: boolean;
  readonly quiet?: boolean;
  readonly threads?: number;
}

export interface CurveRun {
  readonly path: string;
  readonly file: SetupFile;
  readonly setup: Setup;
  readonly identity: RunIdentity;
  readonly options: CurveRunOptions;
  readonly warn: (code: string, message: string, count?: number) => void;
}

/** Read what there is, run what is left, write, summarise. */
export async function runEfficiency(run: CurveRun): Promise<void> {
  const { path, file, setup, identity, options, warn } = run;
  const { out, overwrite = false, resume = false, json } = options;
  if (identity.shard !== null) {
    throw errors.notSupported('an efficiency curve cannot be split into shards', 'leave out --shard');
  }
  requireDetector(setup);
  const show = { json, spectra: 'none' } as const;
  if (resume) {
    const finished = finishedRun(out, path, identity);
    if (finished !== null) return printResult(finished, out, show);
  }
  const folder = new RunFolder(out, { overwrite, resume }, identity, (message) =>
    warn('checkpoint', message),
  );
  try {
    for (const warning of file.warnings) warn(warning.code, warning.message, warning.count);
    const interrupt = onInterrupt(() =>
      process.stderr.write('\nFinishing the batches in hand; press Ctrl-C again to stop at once.\n'),
    );
    const from = resume && existsSync(join(out, MANIFEST_NAME)) ? storedPoints(readResult(out)) : [];
    const curve = await play(run, from, interrupt.signal);
    for (const { code, message, count } of mergeWarnings(curve.points)) warn(code, message, count);
    await endCurve(curve, run);
    interrupt.dispose();
    folder.finish();
  } finally {
    folder.release();
  }
}

function requireDetector({ stack }: Setup): void {
  if (stack.some(({ detector }) => detector !== null)) return;
  throw errors.notSupported('an efficiency curve needs a detector', 'add detector: {} to a layer');
}

async function play(
  run: CurveRun,
  from: readonly CurvePoint[],
  signal: AbortSignal,
): Promise<EfficiencyCurve> {
  const { setup, options } = run;
  const progress = await showProgress(setup, options.quiet ?? false);
  try {
    return await simulateEfficiency(setup, {
      threads: options.threads,
      signal,
      from,
      onProgress: progress?.update,
      onPoint: safekeeper(run),
    });
  } catch (cause) {
    throw cause instanceof EngineError ? fromEngine(cause) : cause;
  } finally {
    progress?.clear();
  }
}

/** Writes the points there are from time to time, so that a kill or power cut costs no more than the time between. */
function safekeeper(run: CurveRun): (points: readonly CurvePoint[]) => void {
  const { options, setup, warn } = run;
  let writtenMs = performance.now();
  let warned = false;
  return (points) => {
    if (performance.now() - writtenMs < 1000 * options.checkpoint) return;
    writtenMs = performance.now();
    const timings = { wallS: 0, workerS: 0, historiesPerSecond: 0 };
    try {
      replaceResult(options.out, pack(run, { setup, points, timings, stopped: 'interrupted' }).files);
    } catch (cause) {
      const { message } = asFolderError(options.out, cause);
      if (!warned) warn('checkpoint', `the points so far are not saved: ${message}; the run goes on`);
      warned = true;
    }
  };
}

function pack({ file, options }: CurveRun, curve: EfficiencyCurve): PackedResult {
  const threads = options.threads ?? availableParallelism();
  return packCurve(curve, file.warnings, { setupText: file.text, threads, finished: new Date() });
}

async function endCurve(curve: EfficiencyCurve, run: CurveRun): Promise<void> {
  const { out, json } = run.options;
  const show = { json, spectra: 'none' } as const;
  if (curve.points.length === 0) {
    if (curve.stopped !== 'interrupted')
      throw errors.notSupported('no energy was finished', 'allow the run more time');
    process.stderr.write('Interrupted before any energy was finished; nothing is written.\n');
    process.exitCode = EXIT_CODES.killed;
    return;
  }
  const packed = pack(run, curve);
  try {
    replaceResult(out, packed.files);
  } catch (cause) {
    // What cannot be kept is at least shown.
    await printResult(packed, null, show);
    throw cause;
  }
  await printResult(packed, out, show);
  if (curve.stopped !== 'interrupted') return;
  const planned = curve.setup.energyGridKeV?.length ?? 0;
  process.stderr.write(
    `Interrupted after ${curve.points.length} of ${planned} energies; they are in ${out}. Go on with --resume.\n`,
  );
  process.exitCode = EXIT_CODES.interrupted;
}
