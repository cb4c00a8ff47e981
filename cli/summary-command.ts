/**
 * `thickset summary`: reads a result folder and shows it. It loads neither the engine nor the setup-file reader, so
 * that looking at a finished run takes little more than starting Node.
 */
import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { Option, type Command } from 'commander';
import { replaceFile } from './checkpoint/durable-file.js';
import { JOURNAL_NAME, SHARD_NAME, SLURM_FOLDER } from './checkpoint/names.js';
import { parseColumns } from './command-options.js';
import { errors } from './errors.js';
import type { Analysis } from './response/analysis.js';
import { asFolderError } from './result/result-folder.js';
import { resultObject } from './result/result-json.js';
import { encodeSpectra } from './result/result-tables.js';
import { readResult, type StoredResult } from './result/stored-result.js';
import { prepareWidths } from './text/display-width.js';
import { makeStyle } from './text/style.js';
import { summaryLines, type SpectraChoice } from './text/summary-text.js';
import { describeTerminal } from './text/terminal.js';

interface SummaryOptions {
  readonly fwhm?: readonly string[];
  readonly registered?: string;
  readonly json?: boolean;
  readonly spectra: SpectraChoice;
  readonly width?: number;
}

export function registerSummaryCommand(program: Command): void {
  program
    .command('summary')
    .description(
      'show the figures and spectra of a finished run, or the points of a sweep, also while it runs',
    )
    .argument('<folder>', 'folder written by thickset run or thickset sweep')
    .addOption(
      new Option(
        '--spectra <which>',
        'spectra to draw: those that leave and pulse heights, every one, or none',
      )
        .choices(['main', 'all', 'none'])
        .default('main'),
    )
    .option(
      '--fwhm <[layer=]width>',
      'width of the peaks instead of that of the setup, as in "7 % at 661.7 keV"; none: as tallied; may be repeated',
      (text: string, before: readonly string[] = []) => [...before, text],
    )
    .option('--registered <file>', 'write the spectra that the detectors register to this file (Arrow)')
    .option('--width <columns>', 'width of the text; default: that of the terminal', parseColumns)
    .option('--json', 'print one JSON object instead')
    .action(summaryCommand);
}

async function summaryCommand(folder: string, options: SummaryOptions): Promise<void> {
  if ([JOURNAL_NAME, SLURM_FOLDER].some((name) => existsSync(join(folder, name)))) {
    const { printSweep, viewSweep } = await import('./sweep/sweep-summary.js');
    return printSweep(viewSweep(folder), folder, options);
  }
  if (existsSync(join(folder, SHARD_NAME))) throw errors.isShard(folder);
  const result = readResult(folder);
  const analysis = await analysisOf(result, options.fwhm);
  if (options.registered !== undefined) writeRegistered(options.registered, analysis);
  await print(result, folder, options, analysis);
}

/** Only runs with detectors have anything to analyse, and only then is it loaded what does it. */
async function analysisOf(result: StoredResult, widths?: readonly string[]): Promise<Analysis | null> {
  const { stack, energies } = result.manifest;
  const detectors = energies === undefined && stack.some(({ detector }) => detector);
  if (!detectors && widths === undefined) return null;
  const choice = widths && (await import('./response/width-option.js')).readWidths(widths, stack);
  return (await import('./response/analysis.js')).analyse(result, choice);
}

function writeRegistered(path: string, analysis: Analysis | null): void {
  if (analysis === null) throw errors.usage('--registered: the run has no detector');
  if (existsSync(path)) throw errors.usage(`--registered: ${path} exists already`, 'name another file');
  try {
    replaceFile(path, encodeSpectra(analysis.responses.map(({ spectrum }) => spectrum)));
  } catch (cause) {
    throw asFolderError(path, cause);
  }
}

/** Prints a result to stdout, as text or as one JSON object. */
export async function printResult(
  result: StoredResult,
  out: string | null,
  options: SummaryOptions,
): Promise<void> {
  await print(result, out, options, await analysisOf(result));
}

async function print(
  result: StoredResult,
  out: string | null,
  options: SummaryOptions,
  analysis: Analysis | null,
): Promise<void> {
  if (options.json) {
    process.stdout.write(`${JSON.stringify(resultObject(result, out, analysis), null, 2)}\n`);
    return;
  }
  const style = makeStyle(describeTerminal(process.stdout), options.width);
  const { title, stack } = result.manifest;
  await prepareWidths([title, ...stack.map(({ name }) => name)]);
  process.stdout.write(`${summaryLines(result, style, options.spectra, analysis).join('\n')}\n`);
}
