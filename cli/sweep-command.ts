/** `thickset sweep`: many points of one setup in, one table out. */
import { availableParallelism } from 'node:os';
import { Option, type Command } from 'commander';
import { EngineError, Simulator, type Shard, type Warning } from '../engine/index.js';
import {
  parseJobTime,
  parseMemory,
  parsePartition,
  parseShard,
  parseShards,
  parseThreads,
  parseTime,
} from './command-options.js';
import { fromEngine } from './engine-errors.js';
import { errors, EXIT_CODES } from './errors.js';
import { onInterrupt } from './interrupt.js';
import { calibrate, printDryRun } from './sweep/dry-run.js';
import { pointsOf } from './sweep/points-table.js';
import { runSweep, type SweepOutcome } from './sweep/run-sweep.js';
import type { SweepFolderChoice } from './sweep/sweep-folder.js';
import { beginRecord } from './sweep/sweep-identity.js';
import { countStatus } from './sweep/sweep-manifest.js';
import { showSweepProgress } from './sweep/sweep-progress.js';
import { readSweepFile, type SweepFile } from './sweep/sweep-reader.js';
import type { SweepEnd } from './sweep/sweep-runner.js';
import { printSweep } from './sweep/sweep-summary.js';
import type { SweepView } from './sweep/sweep-text.js';
import { formatCount } from './text/figure-format.js';

const DEFAULT_SHARDS = 10;

export interface SweepOptions {
  readonly out?: string;
  readonly overwrite?: boolean;
  readonly resume?: boolean;
  readonly dryRun?: boolean;
  readonly shard?: Shard;
  readonly checkpoint: number;
  readonly slurm?: boolean;
  readonly shards: number;
  readonly cpus: number;
  readonly partition?: string;
  readonly time?: string;
  readonly mem?: string;
  readonly print?: boolean;
  readonly threads?: number;
  readonly quiet?: boolean;
  readonly json?: boolean;
}

/** A power cut costs no more work on the points under way than this. */
const CHECKPOINT_S = 30;

export function registerSweepCommand(program: Command): void {
  program
    .command('sweep')
    .description('run a setup at many points and write one table of them')
    .argument('<sweep>', 'sweep file (YAML)')
    .option('--out <folder>', 'folder for the table')
    .option('--dry-run', 'list and check the points and tell the expected time; nothing is written')
    .option('--overwrite', 'replace the sweep that is in the folder')
    .option('--resume', 'go on with the sweep in the folder, if there is one')
    .addOption(
      new Option('--checkpoint <time>', 'how often the points under way are saved')
        .argParser(parseTime)
        .default(CHECKPOINT_S, `${CHECKPOINT_S} s`),
    )
    .option('--shard <i/n>', 'run part i of n only; thickset merge puts the parts together', parseShard)
    .option('--slurm', 'submit the sweep as jobs to Slurm, and follow them')
    .option('--shards <number>', 'with --slurm: tasks of the array job', parseShards, DEFAULT_SHARDS)
    .option('--cpus <number>', 'with --slurm: processors for each task', parseThreads, 1)
    .option('--partition <name>', 'with --slurm: partition of the jobs', parsePartition)
    .option(
      '--time <limit>',
      'with --slurm: time limit of each job; what is cut off is gone on with',
      parseJobTime,
    )
    .option('--mem <size>', 'with --slurm: memory of each job', parseMemory)
    .option('--print', 'with --slurm: print the job scripts and submit nothing')
    .option('--threads <number>', 'worker threads; default: one for each core', parseThreads)
    .option('--quiet', 'no progress and no warnings on stderr')
    .option('--json', 'print one JSON object instead of the summary')
    .action(sweepCommand);
}

/** Read and check, run, write, summarise. */
async function sweepCommand(path: string, options: SweepOptions): Promise<void> {
  const file = readSweepFile(path);
  printWarnings(file.warnings, options);
  if (options.dryRun) return dryRun(file, options);
  if (options.out === undefined) throw errors.usage('option --out <folder> is missing');
  if (options.slurm)
    return (await import('./slurm/slurm-sweep.js')).slurmSweep(path, file, options.out, options);
  if (options.print) throw errors.usage('option --print goes with --slurm');
  const { out, json, overwrite = false, resume = false } = options;
  const threads = options.threads ?? availableParallelism();
  const interrupt = onInterrupt(() =>
    say('\nFinishing the batches in hand; press Ctrl-C again to stop at once.'),
  );
  const { view, end } = await play(file, out, { overwrite, resume }, threads, interrupt.signal, options);
  interrupt.dispose();
  await printSweep(view, out, { json, threads });
  conclude(end, view);
}

async function dryRun(file: SweepFile, options: SweepOptions): Promise<void> {
  const { sweep } = file;
  const begin = beginRecord(file, options.shard ?? null);
  const points = pointsOf(begin.points, begin.shard);
  const simulator = new Simulator(options.threads ?? availableParallelism());
  try {
    const result = await calibrate(sweep, points, simulator);
    await printDryRun(begin, points, result, simulator.threads, options.json ?? false);
  } finally {
    await simulator.close();
  }
}

async function play(
  file: SweepFile,
  out: string,
  choice: SweepFolderChoice,
  threads: number,
  signal: AbortSignal,
  options: SweepOptions,
): Promise<SweepOutcome> {
  const progress = await showSweepProgress(file.sweep, options.quiet ?? false);
  const simulator = new Simulator(threads);
  try {
    return await runSweep(file, out, choice, simulator, {
      shard: options.shard ?? null,
      checkpointS: options.checkpoint,
      signal,
      onProgress: progress?.update,
      warn: (message) => printWarnings([{ code: 'journal', message, count: 1 }], options),
    });
  } catch (cause) {
    throw cause instanceof EngineError ? fromEngine(cause) : cause;
  } finally {
    progress?.clear();
    await simulator.close();
  }
}

function conclude(end: SweepEnd, { begin, points }: SweepView): void {
  if (end === 'interrupted') {
    say('Interrupted. Go on with --resume.');
    process.exitCode = EXIT_CODES.interrupted;
    return;
  }
  const { failed, not_begun: notBegun } = countStatus(begin, points);
  if (failed > 0) say(`${formatCount(failed)} points failed.`);
  if (notBegun > 0) say(`There was no time for ${formatCount(notBegun)} points.`);
  if (failed + notBegun > 0) process.exitCode = EXIT_CODES.incomplete;
}

function printWarnings(warnings: readonly Warning[], { quiet }: SweepOptions): void {
  for (const { message, count } of quiet ? [] : warnings) {
    say(`warning: ${message}${count > 1 ? ` (${formatCount(count)} times)` : ''}`);
  }
}

function say(text: string): void {
  process.stderr.write(`${text}\n`);
}
