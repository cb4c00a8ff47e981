/** The part of `thickset sweep` that runs on a cluster. */
import { resolve } from 'node:path';
import { errors, EXIT_CODES } from '../errors.js';
import { onInterrupt } from '../interrupt.js';
import type { SweepOptions } from '../sweep-command.js';
import { beginRecord } from '../sweep/sweep-identity.js';
import { countStatus } from '../sweep/sweep-manifest.js';
import type { SweepFile } from '../sweep/sweep-reader.js';
import { printSweep, viewSweep } from '../sweep/sweep-summary.js';
import { makeRewrittenLine, type RewrittenLine } from '../text/progress-line.js';
import { describeTerminal } from '../text/terminal.js';
import { arrayScript, mergeScript, type SlurmPlaces } from './job-scripts.js';
import { slurm, type ActiveTasks } from './slurm-client.js';
import { runOnSlurm } from './sweep-on-slurm.js';

/** Submits and follows, or prints the scripts. */
export async function slurmSweep(
  path: string,
  file: SweepFile,
  out: string,
  options: SweepOptions,
): Promise<void> {
  if (options.shard !== undefined) throw errors.usage('options --slurm and --shard do not go together');
  if (options.overwrite)
    throw errors.usage('options --slurm and --overwrite do not go together', 'choose another folder');
  const places: SlurmPlaces = { program: [process.execPath, resolve(process.argv[1])], sweep: path, out };
  const shards = Math.min(options.shards, file.sweep.points);
  if (options.print) {
    const scripts = [
      arrayScript(places, { ...options, shards }),
      mergeScript(places, { ...options, shards }),
    ];
    process.stdout.write(scripts.join('\n'));
    return;
  }
  const interrupt = onInterrupt(() => say('\nThe jobs go on.'));
  const line = options.quiet ? null : progressLine();
  try {
    const merged = await runOnSlurm({
      places,
      options: { ...options, shards },
      begin: beginRecord(file, null),
      resume: options.resume ?? false,
      client: slurm,
      signal: interrupt.signal,
      onSubmit: ({ array, merge }, list) => {
        line?.clear();
        if (!options.quiet) say(submitted(array, merge, list));
      },
      onPoll: (finished, active) => line?.show(() => progressText(finished, shards, active)),
    });
    line?.clear();
    if (!merged) return endUnfollowed();
  } finally {
    interrupt.dispose();
  }
  const view = viewSweep(out);
  await printSweep(view, out, { json: options.json });
  const { failed, not_begun: notBegun } = countStatus(view.begin, view.points);
  if (failed + notBegun > 0) process.exitCode = EXIT_CODES.incomplete;
}

function endUnfollowed(): void {
  say('Follow them again with --slurm --resume.');
  process.exitCode = EXIT_CODES.interrupted;
}

function submitted(array: string, merge: string, list: string): string {
  return list === ''
    ? `Submitted job ${merge} for the merge.`
    : `Submitted job ${array} for shards ${list}, and job ${merge} for the merge.`;
}

function progressText(finished: number, shards: number, { waiting, running }: ActiveTasks): string {
  return `${finished} of ${shards} shards finished, ${running} jobs running, ${waiting} waiting`;
}

function progressLine(): RewrittenLine | null {
  const terminal = describeTerminal(process.stderr);
  return terminal.interactive
    ? makeRewrittenLine((text) => process.stderr.write(text), terminal.width)
    : null;
}

function say(text: string): void {
  process.stderr.write(`${text}\n`);
}
