import * as fs from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { followJobs, submitMissing, type FollowPlan } from '../../cli/slurm/follow.js';
import { arrayScript, mergeScript, quote, shardFolder } from '../../cli/slurm/job-scripts.js';
import { encodeRecord } from '../../cli/sweep/journal.js';
import { arrowFiles, sizeOf, startCli } from './kills.js';
import { missingPrograms, startCluster, type Cluster } from './one-node-slurm.js';
import { runCli } from './run-cli.js';

const BASE = `title: Shielded crystal
source: {kind: beam, energy: 661.7 keV}
stack:
  - {name: shield, material: lead, thickness: 1 cm}
  - {name: crystal, material: NaI, thickness: 5 cm, detector: {}}
tally: {energy_bins: {width: 10 keV}}
run: {histories: 1e5}
`;

const SWEEP = `base: base.yaml
vary:
  stack.shield.thickness: {from: 0.5 cm, to: 2 cm, count: 4}
  source.energy: [300 keV, 661.7 keV, 1.3 MeV]
`;

let folder: string;
const inside = (...names: string[]) => join(folder, ...names);

beforeAll(() => {
  folder = fs.mkdtempSync(join(tmpdir(), 'thickset-slurm-'));
  fs.writeFileSync(inside('base.yaml'), BASE);
  fs.writeFileSync(inside('sweep.yaml'), SWEEP);
});
afterAll(() => fs.rmSync(folder, { recursive: true }));

const places = {
  program: ['/usr/bin/node', "/opt/it's/main.js"],
  sweep: '/data/my sweep.yaml',
  out: '/data/out 50%',
};

describe('the job scripts', () => {
  test('play the shard of the task that runs them, with what was asked for', () => {
    const options = { shards: 20, cpus: 4, partition: 'day', time: '2:00:00', mem: '4G' };
    expect(arrayScript(places, options)).toMatchInlineSnapshot(`
      "#!/bin/sh
      #SBATCH --job-name=thickset-sweep
      #SBATCH --output="/data/out 50%%/slurm/shard-%a.log"
      #SBATCH --array=1-20
      #SBATCH --cpus-per-task=4
      #SBATCH --partition=day
      #SBATCH --time=2:00:00
      #SBATCH --mem=4G
      #SBATCH --signal=B:TERM@60
      #SBATCH --requeue

      # The shell makes way for the program, so that signals reach it.
      exec /usr/bin/node '/opt/it'\\''s/main.js' sweep '/data/my sweep.yaml' \\
        --out '/data/out 50%/slurm/shard-'"$SLURM_ARRAY_TASK_ID" \\
        --shard "$SLURM_ARRAY_TASK_ID/20" \\
        --resume --quiet --threads 4
      "
    `);
    expect(mergeScript(places, options)).toMatchInlineSnapshot(`
      "#!/bin/sh
      #SBATCH --job-name=thickset-merge
      #SBATCH --output="/data/out 50%%/slurm/merge.log"
      #SBATCH --cpus-per-task=1
      #SBATCH --partition=day
      #SBATCH --time=2:00:00
      #SBATCH --mem=4G

      exec /usr/bin/node '/opt/it'\\''s/main.js' merge '/data/out 50%/slurm/shard-'*/ \\
        --out '/data/out 50%' --overwrite
      "
    `);
  });

  test.each(['plain/path.yaml', 'with space', "it's", '$HOME `x`', 'a"b'])(
    'quote %s for the shell',
    async (text) => {
      const { execFileSync } = await import('node:child_process');
      expect(execFileSync('sh', ['-c', `printf %s ${quote(text)}`], { encoding: 'utf8' })).toBe(text);
    },
  );

  test('are printed with --print, and nothing is submitted or written', async () => {
    const args = ['sweep', 'sweep.yaml', '--out', 'printed', '--slurm', '--print', '--shards', '3'];
    const { code, stdout } = await runCli([...args, '--mem', '2G'], {
      cwd: folder,
      env: { PATH: '/nowhere' },
    });
    expect(code).toBe(0);
    expect(stdout).toContain('#SBATCH --array=1-3\n');
    expect(stdout).toContain('#SBATCH --mem=2G\n');
    expect(stdout).toContain('--shard "$SLURM_ARRAY_TASK_ID/3"');
    expect(fs.existsSync(inside('printed'))).toBe(false);
  });
});

test.each([
  ['--partition', 'day; rm', 'must be as in day or day,night'],
  ['--time', 'soon', 'must be as in 30 (minutes), 2:00:00'],
  ['--mem', 'much', 'must be as in 500M or 4G'],
])('%s %s is refused', async (option, value, message) => {
  const args = ['sweep', 'sweep.yaml', '--out', 'refused', '--slurm', option, value];
  const { code, stderr } = await runCli(args, { cwd: folder });
  expect(code).toBe(2);
  expect(stderr).toContain(message);
});

test('without the commands of Slurm the way out is told', async () => {
  const args = ['sweep', 'sweep.yaml', '--out', 'nowhere', '--slurm'];
  const { code, stderr } = await runCli(args, { cwd: folder, env: { PATH: '/nowhere' } });
  expect({ code, stderr }).toEqual({
    code: 5,
    stderr: 'sbatch is not there; run this where the commands of Slurm are\n',
  });
});

describe('following jobs', () => {
  /** A journal that is at its end, or is not. */
  function record(out: string, shard: number | null, facts: readonly unknown[]): void {
    const place = shard === null ? out : shardFolder(out, shard);
    fs.mkdirSync(place, { recursive: true });
    const begin = { kind: 'begin', format: 'thickset sweep 1', points: 3, parameters: [], seeds: [] };
    const records = [begin, ...facts].map((fact) =>
      encodeRecord({ facts: fact, numbers: new Float64Array(0) }),
    );
    fs.writeFileSync(join(place, 'journal.bin'), Buffer.concat(records));
  }
  const END = { kind: 'end', reason: 'complete', elapsedS: 1 };

  /** A scheduler whose jobs do what `play` says, at once. */
  function makePlan(
    name: string,
    play: (job: number, args: string) => void,
  ): FollowPlan & { told: string[] } {
    const told: string[] = [];
    let jobs = 0;
    return {
      out: inside(name),
      shards: 3,
      scripts: { array: 'array.sh', merge: 'merge.sh' },
      client: {
        submit: (script, options = []) => {
          jobs++;
          told.push(`${script} ${options.join(' ')}`.trim());
          play(jobs, `${script} ${options.join(' ')}`);
          return Promise.resolve(String(jobs));
        },
        activeTasks: () => Promise.resolve({ waiting: 0, running: 0 }),
      },
      signal: new AbortController().signal,
      onSubmit: () => undefined,
      pollMs: [1, 1],
      told,
    };
  }

  test('submits again only the shards that did not come to their end', async () => {
    const plan = makePlan('again', (job, args) => {
      if (job === 1) {
        record(plan.out, 1, [END]);
        record(plan.out, 2, []);
      }
      if (job === 3) [2, 3].forEach((shard) => record(plan.out, shard, [END]));
      if (job === 4 && args.startsWith('merge')) record(plan.out, null, [END]);
    });
    expect(await followJobs(plan, await submitMissing(plan))).toBe(true);
    expect(plan.told).toEqual([
      'array.sh --array=1-3',
      'merge.sh --dependency=afterany:1',
      'array.sh --array=2-3',
      'merge.sh --dependency=afterany:3',
    ]);
  });

  test('goes on as long as shards that are cut off get on, and gives up on those that do not', async () => {
    let length = 0;
    const plan = makePlan('stuck', (job, args) => {
      if (!args.startsWith('array')) return;
      if (job === 1) [1, 3].forEach((shard) => record(plan.out, shard, [END]));
      if (length < 4)
        record(
          plan.out,
          2,
          Array.from({ length: ++length }, () => ({ kind: 'rows', id: '', rows: [] })),
        );
    });
    await expect(submitMissing(plan).then((jobs) => followJobs(plan, jobs))).rejects.toThrow(
      'shards that do not come to an end: 2',
    );
    expect(plan.told.filter((call) => call.startsWith('array'))).toHaveLength(5);
  });

  test('merges again once when only the merge failed', async () => {
    const plan = makePlan('unmerged', (job) => {
      if (job === 1) [1, 2, 3].forEach((shard) => record(plan.out, shard, [END]));
    });
    await expect(submitMissing(plan).then((jobs) => followJobs(plan, jobs))).rejects.toThrow(
      'the merge failed',
    );
    expect(plan.told).toEqual(['array.sh --array=1-3', 'merge.sh --dependency=afterany:1', 'merge.sh']);
  });
});

const why =
  missingPrograms.length === 0 ? '' : ` (not run here: ${missingPrograms.join(', ')} not installed)`;

describe.skipIf(missingPrograms.length > 0)(`a sweep on a Slurm of one node${why}`, () => {
  let cluster: Cluster;
  const onCluster = (...args: string[]) =>
    runCli(['sweep', 'sweep.yaml', ...args, '--slurm', '--shards', '3'], { cwd: folder, env: cluster.env });

  beforeAll(async () => {
    cluster = await startCluster();
    const { code } = await runCli(['sweep', 'sweep.yaml', '--out', 'whole', '--quiet'], { cwd: folder });
    expect(code).toBe(0);
  });
  afterAll(() => cluster?.stop());

  test('is submitted, followed and merged to the table of the undivided sweep', async () => {
    const { code, stdout, stderr } = await onCluster(
      '--out',
      'clustered',
      '--time',
      '10',
      '--partition',
      'day',
    );
    expect(stderr).toMatch(/^Submitted job \d+ for shards 1-3, and job \d+ for the merge\.\n$/);
    expect(stdout).toMatch(/^Shielded crystal\n12 points: 12 done; /);
    expect(code).toBe(0);
    const own = (name: string) => ({ 'points.arrow': arrowFiles(inside(name))['points.arrow'] });
    expect(own('clustered')).toEqual(own('whole'));
    expect((await onCluster('--out', 'clustered', '--resume', '--quiet')).code).toBe(0);
  });

  test('outlives who follows it; a task that was cancelled is submitted again, and no other', async () => {
    const args = ['sweep', 'sweep.yaml', '--out', 'outlived', '--slurm', '--shards', '3', '--quiet'];
    const { child, ended, until } = startCli(args, folder, cluster.env);
    const journal = inside('outlived', 'slurm', 'shard-1', 'journal.bin');
    await until(() => sizeOf(journal) > 0);
    child.kill('SIGKILL');
    await ended;
    const live = await runCli(['summary', 'outlived'], { cwd: folder });
    expect(live.stdout).toMatch(
      /^Shielded crystal\n12 points: .*\n(running now|stopped: go on with --resume), /,
    );
    const { jobs } = JSON.parse(fs.readFileSync(inside('outlived', 'slurm', 'plan.json'), 'utf8')) as {
      jobs: { array: string };
    };
    await cluster.call('scancel', `${jobs.array}_3`);
    const { code, stderr } = await onCluster('--out', 'outlived', '--resume');
    expect(code).toBe(0);
    expect(stderr).toMatch(/^Submitted job \d+ for shards 3, and job \d+ for the merge\.\n$/);
    expect(arrowFiles(inside('outlived'))['points.arrow']).toBe(arrowFiles(inside('whole'))['points.arrow']);
  });
});
