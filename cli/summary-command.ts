/**
 * `thickset summary`: reads a result folder and shows it. It loads neither the engine nor the setup-file reader, so
 * that looking at a finished run takes little more than starting Node.
 */
import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { Option, type Command } from 'commander';
import { JOURNAL_NAME, SHARD_NAME } from './checkpoint/names.js';
import { parseColumns } from './command-options.js';
import { errors } from './errors.js';
import { resultObject } from './result/result-json.js';
import { readResult, type StoredResult } from './result/stored-result.js';
import { prepareWidths } from './text/display-width.js';
import { makeStyle } from './text/style.js';
import { summaryLines, type SpectraChoice } from './text/summary-text.js';
import { describeTerminal } from './text/terminal.js';

interface SummaryOptions {
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
    .option('--width <columns>', 'width of the text; default: that of the terminal', parseColumns)
    .option('--json', 'print one JSON object instead')
    .action(summaryCommand);
}

async function summaryCommand(folder: string, options: SummaryOptions): Promise<void> {
  if (existsSync(join(folder, JOURNAL_NAME))) {
    const { printSweep, viewSweep } = await import('./sweep/sweep-summary.js');
    return printSweep(viewSweep(folder), folder, options);
  }
  if (existsSync(join(folder, SHARD_NAME))) throw errors.isShard(folder);
  await printResult(readResult(folder), folder, options);
}

/** Prints a result to stdout, as text or as one JSON object. */
export async function printResult(
  result: StoredResult,
  out: string | null,
  options: SummaryOptions,
): Promise<void> {
  if (options.json) {
    process.stdout.write(`${JSON.stringify(resultObject(result, out), null, 2)}\n`);
    return;
  }
  const style = makeStyle(describeTerminal(process.stdout), options.width);
  const { title, stack } = result.manifest;
  await prepareWidths([title, ...stack.map(({ name }) => name)]);
  process.stdout.write(`${summaryLines(result, style, options.spectra).join('\n')}\n`);
}
