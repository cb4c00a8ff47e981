/** The commands of Slurm that are used here. They find their cluster by the environment they are called in. */
import { execFile } from 'node:child_process';
import { errors, reason } from '../errors.js';

/** A scheduler that takes some time to answer is not asked again before it has. */
const PATIENCE_MS = 60_000;

export interface SlurmClient {
  /** Submits a job script; gives back the number of the job. */
  readonly submit: (script: string, options?: readonly string[]) => Promise<string>;
  /** How many tasks of the jobs are waiting or running. */
  readonly activeTasks: (jobs: readonly string[]) => Promise<ActiveTasks>;
}

export interface ActiveTasks {
  readonly waiting: number;
  readonly running: number;
}

export const slurm: SlurmClient = {
  submit: async (script, options = []) => {
    const [job] = (await call('sbatch', ['--parsable', ...options, script])).trim().split(';');
    if (!/^\d+$/.test(job)) throw errors.scheduler(`sbatch gave no job number but ${JSON.stringify(job)}`);
    return job;
  },
  activeTasks: async (jobs) => {
    // One line for each task; a job that is over is not known any more, which is no error among several.
    const states = await call('squeue', [
      '--noheader',
      '--array',
      `--jobs=${jobs.join(',')}`,
      '--format=%T',
    ]).catch((cause: unknown) => {
      if (/Invalid job id/i.test(reason(cause))) return '';
      throw cause;
    });
    const lines = states.split('\n').filter((line) => line.trim() !== '');
    const waiting = lines.filter((state) => /^(PENDING|CONFIGURING|REQUEUE)/.test(state)).length;
    return { waiting, running: lines.length - waiting };
  },
};

/** @throws ThicksetError scheduler, with what the command said */
function call(command: string, args: readonly string[]): Promise<string> {
  return new Promise((resolve, reject) => {
    execFile(command, args, { timeout: PATIENCE_MS }, (error, stdout, stderr) => {
      if (error === null) return resolve(stdout);
      if ((error as NodeJS.ErrnoException).code === 'ENOENT') {
        return reject(
          errors.scheduler(`${command} is not there`, 'run this where the commands of Slurm are', error),
        );
      }
      reject(errors.scheduler(`${command}: ${reason(stderr.trim() || error.message)}`, null, error));
    });
  });
}
