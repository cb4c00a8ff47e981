/** `thickset merge`: the shards of a run or of a sweep in, the files of the undivided one out. */
import { existsSync } from 'node:fs';
import { join } from 'node:path';
import type { Command } from 'commander';
import { mergeRun } from './checkpoint/merge-run.js';
import { JOURNAL_NAME } from './checkpoint/names.js';
import { readShard } from './checkpoint/shard-file.js';
import { errors, EXIT_CODES } from './errors.js';
import { checkResultFolder, replaceResult } from './result/result-folder.js';
import { printResult } from './summary-command.js';
import { mergeSweep } from './sweep/merge-sweep.js';
import { readSweepLog } from './sweep/sweep-log.js';
import { countStatus } from './sweep/sweep-manifest.js';
import { printSweep } from './sweep/sweep-summary.js';

interface MergeOptions {
  readonly out: string;
  readonly overwrite?: boolean;
  readonly json?: boolean;
}

export function registerMergeCommand(program: Command): void {
  program
    .command('merge')
    .description('put the shards of a run or sweep together')
    .argument('<folders...>', 'folders written with --shard, one for each shard, in any order')
    .requiredOption('--out <folder>', 'folder for the result')
    .option('--overwrite', 'replace the result that is in the folder')
    .option('--json', 'print one JSON object instead of the summary')
    .action(mergeCommand);
}

async function mergeCommand(folders: readonly string[], options: MergeOptions): Promise<void> {
  if (existsSync(join(folders[0], JOURNAL_NAME))) await mergeSweeps(folders, options);
  else await mergeRuns(folders, options);
}

async function mergeRuns(folders: readonly string[], { out, overwrite, json }: MergeOptions): Promise<void> {
  const parts = folders.map((folder) => ({ folder, content: present(readShard(folder), folder) }));
  checkResultFolder(out, overwrite ?? false);
  const packed = mergeRun(parts);
  replaceResult(out, packed.files);
  await printResult(packed, out, { json, spectra: 'none' });
}

async function mergeSweeps(
  folders: readonly string[],
  { out, overwrite, json }: MergeOptions,
): Promise<void> {
  const parts = folders.map((folder) => ({ folder, content: present(readSweepLog(folder), folder) }));
  const view = mergeSweep(parts, out, overwrite ?? false);
  await printSweep(view, out, { json });
  const { failed, not_begun: notBegun } = countStatus(view.begin, view.points);
  if (failed + notBegun > 0) process.exitCode = EXIT_CODES.incomplete;
}

function present<T>(content: T | null, folder: string): T {
  if (content === null) throw errors.shardsDoNotFit(`${folder}: holds no shard`);
  return content;
}
