/** `thickset merge`: the shards of a run or of a sweep in, the files of the undivided one out. */
import type { Command } from 'commander';
import { mergeRun } from './checkpoint/merge-run.js';
import { readShard, type ShardResult } from './checkpoint/shard-file.js';
import type { Part } from './checkpoint/merge-parts.js';
import { errors } from './errors.js';
import { checkResultFolder, replaceResult } from './result/result-folder.js';
import { printResult } from './summary-command.js';

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
  const runs = folders.map((folder) => ({ folder, content: readShard(folder) }));
  if (!runs.every(isShard)) throw errors.resultMissing(runs.find((part) => !isShard(part))!.folder);
  checkResultFolder(options.out, options.overwrite ?? false);
  const packed = mergeRun(runs);
  replaceResult(options.out, packed.files);
  await printResult(packed, options.out, { json: options.json, spectra: 'none' });
}

function isShard(part: Part<ShardResult | null>): part is Part<ShardResult> {
  return part.content !== null;
}
