/** Submits the jobs of a sweep, follows them, and submits again what did not come to its end. */
import { ranges } from '../checkpoint/merge-parts.js';
import { errors } from '../errors.js';
import { isMerged, missingShards, recordedBytes, stuck } from './shard-states.js';
import type { ActiveTasks, SlurmClient } from './slurm-client.js';

export interface SlurmJobs {
  /** Numbers of the jobs submitted last. */
  readonly array: string;
  readonly merge: string;
}

export interface FollowPlan {
  readonly out: string;
  readonly shards: number;
  readonly scripts: { readonly array: string; readonly merge: string };
  readonly client: SlurmClient;
  readonly signal: AbortSignal;
  /** Called with the numbers of new jobs, to be remembered. */
  readonly onSubmit: (jobs: SlurmJobs, shards: string) => void;
  readonly onPoll?: (finished: number, active: ActiveTasks) => void;
  /** Shortest and longest time between two looks, in ms. */
  readonly pollMs?: readonly [number, number];
}

const POLL_MS = [1000, 15_000] as const;
/** A shared disk may show a file some time after it was written. */
const LOOKS_BEFORE_MISSING = 2;
/** A scheduler that does not answer is waited for; the jobs go on meanwhile. */
const MOST_SILENCE = 40;

/** Submits an array job of the missing shards, and a merge that waits for it. */
export async function submitMissing(plan: FollowPlan): Promise<SlurmJobs> {
  const { out, shards, scripts, client } = plan;
  const missing = missingShards(out, shards);
  const list = ranges(missing);
  // With nothing missing, only the merge is left.
  const array = missing.length === 0 ? null : await client.submit(scripts.array, [`--array=${list}`]);
  // Whatever ends the shards: the merge looks at what they have written.
  const merge = await client.submit(scripts.merge, array === null ? [] : [`--dependency=afterany:${array}`]);
  const jobs = { array: array ?? merge, merge };
  plan.onSubmit(jobs, list);
  return jobs;
}

/**
 * Follows jobs until the whole sweep is merged; false when the signal ends the following, which the jobs outlive.
 *
 * @throws ThicksetError scheduler when shards end without getting on, or the merge fails
 */
export async function followJobs(plan: FollowPlan, jobs: SlurmJobs): Promise<boolean> {
  const { out, shards } = plan;
  const pause = makePause(plan);
  let current = jobs;
  let recorded = -1;
  let mergedInVain = false;
  for (;;) {
    if (!(await waitForJobs(plan, current, pause))) return false;
    if (isMerged(out)) return true;
    const missing = missingShards(out, shards);
    const bytes = recordedBytes(out, missing);
    if (missing.length === 0 && mergedInVain)
      throw errors.scheduler('the merge failed', `see ${out}/slurm/merge.log`);
    // Shards that were stopped by the end of their time get on each time; what stands still will not end.
    if (missing.length > 0 && bytes === recorded) throw stuck(out, missing, ranges(missing));
    mergedInVain = missing.length === 0;
    recorded = bytes;
    current = await submitMissing(plan);
  }
}

/** Waits until no task is waiting or running, or all is merged; false when the signal came. */
async function waitForJobs(plan: FollowPlan, jobs: SlurmJobs, pause: () => Promise<void>): Promise<boolean> {
  const ids = [...new Set([jobs.array, jobs.merge])];
  let [idle, silent] = [0, 0];
  while (idle < LOOKS_BEFORE_MISSING && !isMerged(plan.out)) {
    if (plan.signal.aborted) return false;
    try {
      const active = await plan.client.activeTasks(ids);
      silent = 0;
      idle = active.waiting + active.running === 0 ? idle + 1 : 0;
      plan.onPoll?.(plan.shards - missingShards(plan.out, plan.shards).length, active);
    } catch (cause) {
      if (++silent > MOST_SILENCE) throw cause;
    }
    await pause();
  }
  return true;
}

/** Looks often at first and seldom later; a signal cuts the pause short. */
function makePause({ signal, pollMs = POLL_MS }: FollowPlan): () => Promise<void> {
  let [next] = pollMs;
  return () =>
    new Promise((resolve) => {
      if (signal.aborted) return resolve();
      const end = () => {
        clearTimeout(timer);
        signal.removeEventListener('abort', end);
        resolve();
      };
      const timer = setTimeout(end, next);
      next = Math.min(pollMs[1], next * 1.5);
      signal.addEventListener('abort', end);
    });
}
