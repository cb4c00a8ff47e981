/**
 * A Slurm of one node, started for a test and stopped after it: munged, slurmctld and slurmd from the packages
 * slurm-wlm and munge, with sockets, ports, logs and states of their own in a temporary folder.
 */
import { execFile, spawn, type ChildProcess } from 'node:child_process';
import { randomBytes } from 'node:crypto';
import * as fs from 'node:fs';
import { createServer } from 'node:net';
import { hostname, tmpdir, userInfo } from 'node:os';
import { join } from 'node:path';

const DAEMONS = ['munged', 'slurmctld', 'slurmd'] as const;
const COMMANDS = ['sbatch', 'squeue', 'scancel', 'sinfo'] as const;
const FOLDERS = [...(process.env.PATH ?? '').split(':'), '/usr/sbin', '/sbin'];

function find(name: string): string | null {
  const folder = FOLDERS.find((candidate) => candidate !== '' && fs.existsSync(join(candidate, name)));
  return folder === undefined ? null : join(folder, name);
}

/** Programs that are not installed; with none missing, a cluster can be started. */
export const missingPrograms: readonly string[] = [...DAEMONS, ...COMMANDS].filter(
  (name) => find(name) === null,
);

export interface Cluster {
  /** For programs that are to find this cluster. */
  readonly env: Readonly<Record<string, string>>;
  /** Calls one of Slurm's commands and gives back what it says. */
  readonly call: (command: (typeof COMMANDS)[number], ...args: string[]) => Promise<string>;
  readonly stop: () => Promise<void>;
}

function freePort(): Promise<number> {
  return new Promise((resolve, reject) => {
    const server = createServer().on('error', reject);
    server.listen(0, '127.0.0.1', () => {
      const { port } = server.address() as { port: number };
      server.close(() => resolve(port));
    });
  });
}

function configuration(folder: string, [controller, daemon]: readonly number[]): string {
  const host = hostname().split('.')[0];
  const user = userInfo().username;
  return `ClusterName=test
SlurmctldHost=${host}(127.0.0.1)
SlurmUser=${user}
SlurmdUser=${user}
AuthType=auth/munge
AuthInfo=socket=${folder}/munge/socket
StateSaveLocation=${folder}/state
SlurmdSpoolDir=${folder}/spool
SlurmctldPidFile=${folder}/slurmctld.pid
SlurmdPidFile=${folder}/slurmd.pid
SlurmctldLogFile=${folder}/slurmctld.log
SlurmdLogFile=${folder}/slurmd.log
SlurmctldPort=${controller}
SlurmdPort=${daemon}
ProctrackType=proctrack/linuxproc
TaskPlugin=task/none
SelectType=select/cons_tres
SelectTypeParameters=CR_Core
SchedulerParameters=batch_sched_delay=1,sched_interval=2,bf_interval=1
JobAcctGatherType=jobacct_gather/none
AccountingStorageType=accounting_storage/none
MpiDefault=none
ReturnToService=2
NodeName=${host} NodeAddr=127.0.0.1 CPUs=2 State=UNKNOWN
PartitionName=day Nodes=ALL Default=YES MaxTime=INFINITE State=UP
`;
}

/** Starts a cluster. Rejects with the daemons' logs when its node does not get ready. */
export async function startCluster(): Promise<Cluster> {
  const folder = fs.mkdtempSync(join(tmpdir(), 'slurm-'));
  for (const name of ['munge', 'state', 'spool']) fs.mkdirSync(join(folder, name), { mode: 0o755 });
  const key = join(folder, 'munge', 'key');
  fs.writeFileSync(key, randomBytes(128), { mode: 0o600 });
  const config = join(folder, 'slurm.conf');
  fs.writeFileSync(config, configuration(folder, [await freePort(), await freePort()]));
  const env = { SLURM_CONF: config };
  const started: ChildProcess[] = [];
  const start = (name: (typeof DAEMONS)[number], args: readonly string[]) => {
    started.push(spawn(find(name)!, args, { env: { ...process.env, ...env }, stdio: 'ignore' }));
  };
  const call: Cluster['call'] = (command, ...args) =>
    new Promise((resolve, reject) => {
      execFile(find(command)!, args, { env: { ...process.env, ...env } }, (error, stdout, stderr) =>
        error === null ? resolve(stdout) : reject(new Error(`${command}: ${stderr}`)),
      );
    });
  const stop = async () => {
    await call('scancel', `--user=${userInfo().username}`).catch(() => undefined);
    await waitFor(async () => (await call('squeue', '--noheader')) === '', 20).catch(() => undefined);
    for (const child of started.reverse()) await end(child);
    fs.rmSync(folder, { recursive: true, force: true });
  };
  const munge = (name: string) => join(folder, 'munge', name);
  const files = ['socket', 'pid-file', 'log-file', 'seed-file'].map((name) =>
    name === 'socket' ? `--socket=${munge('socket')}` : `--${name}=${munge(name)}`,
  );
  try {
    start('munged', ['--foreground', '--force', `--key-file=${key}`, ...files]);
    await waitFor(() => Promise.resolve(fs.existsSync(munge('socket'))), 20);
    start('slurmctld', ['-D', '-f', config]);
    start('slurmd', ['-D', '-f', config]);
    await waitFor(async () => (await call('sinfo', '--noheader', '--format=%T')).trim() === 'idle', 60);
  } catch (cause) {
    const logs = ['munge/log-file', 'slurmctld.log', 'slurmd.log'].map((name) => join(folder, name));
    const told = logs
      .filter((path) => fs.existsSync(path))
      .map((path) => fs.readFileSync(path, 'utf8').slice(-2000));
    await stop();
    throw new Error(`Slurm does not get ready: ${(cause as Error).message}\n${told.join('\n')}`, { cause });
  }
  return { env, call, stop };
}

async function waitFor(seen: () => Promise<boolean>, seconds: number): Promise<void> {
  for (let left = seconds * 10; left > 0; left--) {
    if (await seen().catch(() => false)) return;
    await new Promise((resolve) => setTimeout(resolve, 100));
  }
  throw new Error(`nothing after ${seconds} s`);
}

/** Ends a process that was started here, by force if it does not listen. */
function end(child: ChildProcess): Promise<void> {
  if (child.exitCode !== null || child.signalCode !== null) return Promise.resolve();
  return new Promise((resolve) => {
    const force = setTimeout(() => child.kill('SIGKILL'), 10_000);
    child.on('close', () => {
      clearTimeout(force);
      resolve();
    });
    child.kill('SIGTERM');
  });
}
