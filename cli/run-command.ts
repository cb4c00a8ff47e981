/** `thickset run`: setup file in, result folder and summary out. */
import { availableParallelism } from 'node:os';
import type { Command } from 'commander';
import { EngineError, simulate, type RunResult, type Setup, type Warning } from '../engine/index.js';
import { parseHistories, parseSeed, parseThreads } from './command-options.js';
import { fromEngine } from './engine-errors.js';
import { errors, EXIT_CODES } from './errors.js';
import { onInterrupt } from './interrupt.js';
import { checkResultFolder, replaceResult } from './result/result-folder.js';
import { packResult, type PackedResult } from './result/stored-result.js';
import { readSetupFile } from './setup-reader.js';
import { printResult } from './summary-command.js';
import { formatCount } from './text/figure-format.js';
import { showProgress } from './text/progress-line.js';

interface RunCommandOptions {
  readonly out: string;
  readonly overwrite?: boolean;
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
  checkResultFolder(options.out, options.overwrite ?? false);
  printWarnings(file.warnings, options);

  const threads = options.threads ?? availableParallelism();
  const interrupt = onInterrupt(() =>
    say('\nFinishing the batches in hand; press Ctrl-C again to stop at once.'),
  );
  const result = await run(withOptions(file.setup, options), threads, interrupt.signal, options);
  printWarnings(result.warnings, options);
  if (result.histories === 0) {
    return endWithNothing(result);
  }

  const warnings = [...file.warnings, ...result.warnings];
  const packed = packResult({ ...result, warnings }, { setupText: file.text, threads, finished: new Date() });
  await writeAndPrint(packed, options);
  interrupt.dispose();
  if (result.stopped === 'interrupted') {
    say(`Interrupted after ${formatCount(result.histories)} histories; their result is in ${options.out}.`);
    process.exitCode = EXIT_CODES.interrupted;
  }
}

function withOptions(setup: Setup, { seed, histories }: RunCommandOptions): Setup {
  return {
    ...setup,
    seed: seed ?? setup.seed,
    run: { ...setup.run, histories: histories ?? setup.run.histories },
  };
}

async function run(
  setup: Setup,
  threads: number,
  signal: AbortSignal,
  { quiet }: RunCommandOptions,
): Promise<RunResult> {
  const progress = await showProgress(setup, quiet ?? false);
  try {
    return await simulate(setup, { threads, signal, onProgress: progress?.update });
  } catch (cause) {
    throw cause instanceof EngineError ? fromEngine(cause) : cause;
  } finally {
    progress?.clear();
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

function endWithNothing({ stopped }: RunResult): void {
  if (stopped !== 'interrupted') {
    throw errors.notSupported(
      'no batch of histories was finished; nothing is written',
      'allow the run more time',
    );
  }
  say('Interrupted before any batch of histories was finished; nothing is written.');
  process.exitCode = EXIT_CODES.killed;
}

function printWarnings(warnings: readonly Warning[], { quiet }: RunCommandOptions): void {
  for (const { message, count } of quiet ? [] : warnings) {
    say(`warning: ${message}${count > 1 ? ` (${formatCount(count)} times)` : ''}`);
  }
}

function say(text: string): void {
  process.stderr.write(`${text}\n`);
}
