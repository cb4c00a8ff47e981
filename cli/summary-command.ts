/**
 * `thickset summary`: reads a result folder and shows it. It loads neither the engine nor the setup-file reader, so
 * that looking at a finished run takes little more than starting Node.
 */
import { Option, type Command } from 'commander';
import { parseColumns } from './command-options.js';
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
    .description('show the figures and spectra of a finished run')
    .argument('<folder>', 'folder written by thickset run')
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
    .action(async (folder: string, options: SummaryOptions) => {
      const result = readResult(folder);
      await printResult(result, folder, options);
    });
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
