/** `thickset sweep --slurm`: scripts written, jobs submitted and followed to the merged table. */
import { existsSync, readFileSync } from 'node:fs';
import { join, resolve } from 'node:path';
import { changesBetween } from '../checkpoint/changes.js';
import { makeFolders, replaceFile } from '../checkpoint/durable-file.js';
import { errors } from '../errors.js';
import { asFolderError } from '../result/result-folder.js';
import { checkSweepFolder } from '../sweep/sweep-folder.js';
import type { BeginRecord } from '../sweep/records.js';
import { followJobs, submitMissing, type FollowPlan, type SlurmJobs } from './follow.js';
import { arrayScript, mergeScript, slurmFolder, type SlurmOptions, type SlurmPlaces } from './job-scripts.js';
import { isMerged } from './shard-states.js';
import type { ActiveTasks, SlurmClient } from './slurm-client.js';

const PLAN_NAME = 'plan.json';

/** What is remembered of a sweep on a cluster. */
interface SlurmPlan {
  readonly identity: BeginRecord['identity'];
  readonly shards: number;
  readonly jobs: SlurmJobs | null;
}

export interface SlurmSweep {
  readonly places: SlurmPlaces;
  readonly options: SlurmOptions;
  readonly begin: BeginRecord;
  readonly resume: boolean;
  readonly client: SlurmClient;
  readonly signal: AbortSignal;
  readonly onSubmit: (jobs: SlurmJobs, shards: string) => void;
  readonly onPoll?: (finished: number, active: ActiveTasks) => void;
  readonly pollMs?: readonly [number, number];
}

/**
 * Submits what is missing and follows it; false when the signal ended the following.
 *
 * @throws ThicksetError scheduler, and those of the folder
 */
export async function runOnSlurm(sweep: SlurmSweep): Promise<boolean> {
  const { places, begin, resume } = sweep;
  const earlier = readPlan(places.out);
  checkSweepFolder(places.out, { overwrite: false, resume });
  if (earlier !== null) {
    if (!resume) throw errors.sweepExists(places.out);
    const changes = changesBetween(earlier.identity, begin.identity);
    if (changes.length > 0) throw errors.notTheSame(places.out, 'sweep', changes);
    if (isMerged(places.out)) return true;
  }
  // A sweep that was split once stays split in that way.
  const options = { ...sweep.options, shards: earlier?.shards ?? sweep.options.shards };
  const plan = makePlan(sweep, options);
  const jobs =
    (earlier?.jobs && (await stillActive(sweep.client, earlier.jobs))) ?? (await submitMissing(plan));
  return followJobs(plan, jobs);
}

function makePlan(sweep: SlurmSweep, options: SlurmOptions): FollowPlan {
  const { places, begin, client, signal, onPoll, pollMs } = sweep;
  const folder = slurmFolder(places.out);
  const scripts = { array: join(folder, 'array.sh'), merge: join(folder, 'merge.sh') };
  const remember = (jobs: SlurmJobs | null) => {
    const plan: SlurmPlan = { identity: begin.identity, shards: options.shards, jobs };
    replaceFile(join(folder, PLAN_NAME), Buffer.from(`${JSON.stringify(plan, null, 2)}\n`));
  };
  try {
    makeFolders(folder);
    replaceFile(scripts.array, Buffer.from(arrayScript(places, options)));
    replaceFile(scripts.merge, Buffer.from(mergeScript(places, options)));
    remember(null);
  } catch (cause) {
    throw asFolderError(places.out, cause);
  }
  const onSubmit = (jobs: SlurmJobs, shards: string) => {
    remember(jobs);
    sweep.onSubmit(jobs, shards);
  };
  return {
    out: resolve(places.out),
    shards: options.shards,
    scripts,
    client,
    signal,
    onSubmit,
    onPoll,
    pollMs,
  };
}

/** The jobs, if they are still under way; null otherwise. */
async function stillActive(client: SlurmClient, jobs: SlurmJobs): Promise<SlurmJobs | null> {
  const { waiting, running } = await client.activeTasks([jobs.array, jobs.merge]);
  return waiting + running > 0 ? jobs : null;
}

function readPlan(out: string): SlurmPlan | null {
  const path = join(slurmFolder(out), PLAN_NAME);
  if (!existsSync(path)) return null;
  try {
    return JSON.parse(readFileSync(path, 'utf8')) as SlurmPlan;
  } catch (cause) {
    throw errors.resultDamaged(path, 'it is no plan of a sweep', cause);
  }
}
