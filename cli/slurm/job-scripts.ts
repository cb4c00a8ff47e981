/** The scripts of the two jobs: an array of shards, and the merge that waits for it. */
import { join, resolve } from 'node:path';
import { SLURM_FOLDER } from '../checkpoint/names.js';

export interface SlurmOptions {
  readonly shards: number;
  readonly cpus: number;
  readonly partition?: string;
  /** As sbatch takes them: `2:00:00`, `4G`. */
  readonly time?: string;
  readonly mem?: string;
}

export interface SlurmPlaces {
  /** The program and its interpreter. */
  readonly program: readonly string[];
  readonly sweep: string;
  /** Folder of the whole sweep; shards and logs lie below it. */
  readonly out: string;
}

/** Folder below that of the sweep for shards, scripts and logs. */
export function slurmFolder(out: string): string {
  return resolve(out, SLURM_FOLDER);
}

export function shardFolder(out: string, shard: number | string): string {
  return join(slurmFolder(out), `shard-${shard}`);
}

/** Seconds before the end of its time that a job is told to finish what it has in hand. */
const WARNING_S = 60;

function head(name: string, log: string, options: readonly string[]): string[] {
  return [
    '#!/bin/sh',
    `#SBATCH --job-name=${name}`,
    `#SBATCH --output=${logPattern(log)}`,
    ...options.map((option) => `#SBATCH ${option}`),
    '',
  ];
}

function resources({ partition, time, mem }: SlurmOptions): string[] {
  return [
    ...(partition === undefined ? [] : [`--partition=${partition}`]),
    ...(time === undefined ? [] : [`--time=${time}`]),
    ...(mem === undefined ? [] : [`--mem=${mem}`]),
  ];
}

/** Every task plays the shard of its number; one that is run again goes on where it was. */
export function arrayScript({ program, sweep, out }: SlurmPlaces, options: SlurmOptions): string {
  const log = `${escaped(slurmFolder(out))}/shard-%a.log`;
  const lines = [
    ...head('thickset-sweep', log, [
      `--array=1-${options.shards}`,
      `--cpus-per-task=${options.cpus}`,
      ...resources(options),
      `--signal=B:TERM@${WARNING_S}`,
      '--requeue',
    ]),
    '# The shell makes way for the program, so that signals reach it.',
    `exec ${program.map(quote).join(' ')} sweep ${quote(resolve(sweep))} \\`,
    `  --out ${quote(join(slurmFolder(out), 'shard-'))}"$SLURM_ARRAY_TASK_ID" \\`,
    `  --shard "$SLURM_ARRAY_TASK_ID/${options.shards}" \\`,
    `  --resume --quiet --threads ${options.cpus}`,
  ];
  return `${lines.join('\n')}\n`;
}

/** The merge says itself which shards are missing, if any are. */
export function mergeScript({ program, out }: SlurmPlaces, options: SlurmOptions): string {
  const log = `${escaped(slurmFolder(out))}/merge.log`;
  const lines = [
    ...head('thickset-merge', log, ['--cpus-per-task=1', ...resources(options)]),
    `exec ${program.map(quote).join(' ')} merge ${quote(join(slurmFolder(out), 'shard-'))}*/ \\`,
    `  --out ${quote(resolve(out))} --overwrite`,
  ];
  return `${lines.join('\n')}\n`;
}

/** A percent sign in a path would be taken for a pattern. */
function escaped(path: string): string {
  return path.replaceAll('%', '%%');
}

function logPattern(log: string): string {
  return /\s/.test(log) ? `"${log}"` : log;
}

/** Text as one word of the shell. */
export function quote(text: string): string {
  return /^[\w./:@%+=-]+$/.test(text) ? text : `'${text.replaceAll("'", `'\\''`)}'`;
}
