/** `thickset run`: setup file in, result folder and summary out. */
import { availableParallelism } from 'node:os';
import { Option, type Command } from 'commander';
import { EngineError, playRun, type Run, type Setup, type Shard, type Warning } from '../engine/index.js';
import { finishedRun, finishedShard } from './checkpoint/finished.js';
import { runIdentity, type RunIdentity } from './checkpoint/identity.js';
import { RunFolder } from './checkpoint/run-folder.js';
import { writeShard } from './checkpoint/shard-file.js';
import { parseHistories, parseSeed, parseShard, parseThreads, parseTime } from './command-options.js';
import { fromEngine } from './engine-errors.js';
import { errors, EXIT_CODES } from './errors.js';
import { onInterrupt } from './interrupt.js';
import { replaceResult } from './result/result-folder.js';
import { packResult, type PackedResult } from './result/stored-result.js';
import { readSetupFile, type SetupFile } from './setup-reader.js';
import { printResult } from './summary-command.js';
import { formatCount } from './text/figure-format.js';
import { showProgress } from './text/progress-line.js';

/** A power cut costs no more work than this, at next to no cost in time. */
const CHECKPOINT_S = 30;

interface RunCommandOptions {
  readonly out: string;
  readonly overwrite?: boolean;
  readonly resume?: boolean;
  readonly shard?: Shard;
  readonly checkpoint: number;
  readonly json?: boolean;
  readonly quiet?: boolean;
  readonly threads?: number;
  readonly seed?: string;
  readonly histories?: number;
}

export function registerRunCommand(program: Command): void {
  program
    .command('run')
    .description('run a setup and write its result')
    .argument('<setup>', 'setup file (YAML)')
    .requiredOption('--out <folder>', 'folder for the result')
    .option('--overwrite', 'replace the result that is in the folder')
    .option('--resume', 'go on from the state saved in the folder, if there is one')
    .addOption(
      new Option('--checkpoint <time>', 'how often the state is saved')
        .argParser(parseTime)
        .default(CHECKPOINT_S, `${CHECKPOINT_S} s`),
    )
    .option('--shard <i/n>', 'run part i of n only; thickset merge puts the parts together', parseShard)
    .option('--threads <number>', 'worker threads; default: one for each core', parseThreads)
    .option('--seed <text>', 'seed to use instead of that of the setup', parseSeed)
    .option('--histories <number>', 'histories to run instead of those of the setup', parseHistories)
    .option('--quiet', 'no progress and no warnings on stderr')
    .option('--json', 'print one JSON object instead of the summary')
    .action(runCommand);
}

/** Read and check, run, write, summarise. */
async function runCommand(path: string, options: RunCommandOptions): Promise<void> {
  const file = readSetupFile(path);
  const setup = withOptions(file.setup, options);
  const shard = options.shard ?? null;
  const identity = runIdentity(setup, file.text, shard);
  if (setup.energyGridKeV) {
    const { runEfficiency } = await import('./efficiency/run-efficiency.js');
    const warn = (code: string, message: string, count = 1) =>
      printWarnings([{ code, message, count }], options);
    return runEfficiency({ path, file, setup, identity, options, warn });
  }
  if (options.resume && (await endIfFinished(path, identity, options))) return;

  const { overwrite = false, resume = false } = options;
  const folder = new RunFolder(options.out, { overwrite, resume }, identity, (message) =>
    printWarnings([{ code: 'checkpoint', message, count: 1 }], options),
  );
  try {
    printWarnings(file.warnings, options);
    const interrupt = onInterrupt(() =>
      say('\nFinishing the batches in hand; press Ctrl-C again to stop at once.'),
    );
    const played = await play(setup, folder, interrupt.signal, options);
    if (shard === null) await endRun(played, file, options);
    else endShard(played, identity, options);
    interrupt.dispose();
    if (played.isComplete) folder.finish();
  } finally {
    folder.release();
  }
}

function withOptions(setup: Setup, { seed, histories }: RunCommandOptions): Setup {
  return {
    ...setup,
    seed: seed ?? setup.seed,
    run: { ...setup.run, histories: histories ?? setup.run.histories },
  };
}

async function endIfFinished(
  path: string,
  identity: RunIdentity,
  options: RunCommandOptions,
): Promise<boolean> {
  const { out, json } = options;
  if (identity.shard !== null) {
    const shard = finishedShard(out, identity);
    if (shard !== null) printShard(identity.shard, shard.state.histories, options);
    return shard !== null;
  }
  const result = finishedRun(out, path, identity);
  if (result !== null) await printResult(result, out, { json, spectra: 'none' });
  return result !== null;
}

async function play(
  setup: Setup,
  folder: RunFolder,
  signal: AbortSignal,
  { quiet, threads, shard, checkpoint }: RunCommandOptions,
): Promise<Run> {
  const from = folder.load();
  const progress = await showProgress(setup, quiet ?? false);
  try {
    return await playRun(setup, {
      threads,
      shard,
      from,
      signal,
      checkpoint: folder.checkpointing(checkpoint),
      onProgress: progress?.update,
    });
  } catch (cause) {
    throw cause instanceof EngineError ? fromEngine(cause) : cause;
  } finally {
    progress?.clear();
  }
}

/** Writes and shows the result of a whole run, or of as much of it as there is. */
async function endRun(run: Run, file: SetupFile, options: RunCommandOptions): Promise<void> {
  const result = resultOf(run);
  printWarnings(result.warnings, options);
  if (result.histories === 0) return endWithNothing(run);
  const warnings = [...file.warnings, ...result.warnings];
  const threads = options.threads ?? availableParallelism();
  const packed = packResult({ ...result, warnings }, { setupText: file.text, threads, finished: new Date() });
  await writeAndPrint(packed, options);
  if (result.stopped !== 'interrupted') return;
  say(
    `Interrupted after ${formatCount(result.histories)} histories; their result is in ${options.out}. ` +
      'Go on with --resume.',
  );
  process.exitCode = EXIT_CODES.interrupted;
}

function resultOf(run: Run) {
  try {
    return run.result();
  } catch (cause) {
    throw cause instanceof EngineError ? fromEngine(cause) : cause;
  }
}

async function writeAndPrint(packed: PackedResult, { out, json }: RunCommandOptions): Promise<void> {
  try {
    replaceResult(out, packed.files);
  } catch (cause) {
    // What cannot be kept is at least shown.
    await printResult(packed, null, { json, spectra: 'none' });
    throw cause;
  }
  await printResult(packed, out, { json, spectra: 'none' });
}

function endWithNothing({ stopped }: Run): void {
  if (stopped !== 'interrupted') {
    throw errors.notSupported(
      'no batch of histories was finished; nothing is written',
      'allow the run more time',
    );
  }
  say('Interrupted before any batch of histories was finished; nothing is written.');
  process.exitCode = EXIT_CODES.killed;
}

/** A shard has no figures of its own: it is written for `thickset merge`. */
function endShard(run: Run, identity: RunIdentity, options: RunCommandOptions): void {
  if (!run.isComplete) {
    say(`Interrupted after ${formatCount(run.histories)} histories of this shard. Go on with --resume.`);
    process.exitCode = EXIT_CODES.interrupted;
    return;
  }
  writeShard(options.out, { identity, timings: run.timings(), state: run.state() });
  printShard(identity.shard!, run.histories, options);
}

function printShard({ index, count }: Shard, histories: number, { out, json }: RunCommandOptions): void {
  const facts = { out, shard: index, shards: count, histories };
  const text = `Shard ${index} of ${count}: ${formatCount(histories)} histories in ${out}. Merge all with thickset merge.`;
  process.stdout.write(json ? `${JSON.stringify(facts, null, 2)}\n` : `${text}\n`);
}

function printWarnings(warnings: readonly Warning[], { quiet }: RunCommandOptions): void {
  for (const { message, count } of quiet ? [] : warnings) {
    say(`warning: ${message}${count > 1 ? ` (${formatCount(count)} times)` : ''}`);
  }
}

function say(text: string): void {
  process.stderr.write(`${text}\n`);
}
