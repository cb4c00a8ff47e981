/** Kills the program at random moments and lets it go on, until it ends by itself. */
import { spawn, type ChildProcess } from 'node:child_process';
import { existsSync, readdirSync, readFileSync, statSync } from 'node:fs';
import { join } from 'node:path';
import seedrandom from 'seedrandom';
import { CLI } from './run-cli.js';

export interface KillPlan {
  readonly cwd: string;
  readonly kills: number;
  /** Seed of the moments. */
  readonly seed: string;
  /** Shortest and longest life of a process, in ms. */
  readonly lifeMs: readonly [number, number];
}

export interface Survived {
  /** Processes that were killed before they had ended. */
  readonly killed: number;
  readonly code: number | null;
  readonly stderr: string;
}

/** Runs `thickset ARGS`, killed `kills` times at random moments. The arguments must make it go on where it was. */
export async function runKilled(args: readonly string[], plan: KillPlan): Promise<Survived> {
  const random = seedrandom(plan.seed);
  const [shortest, longest] = plan.lifeMs;
  let killed = 0;
  let last = { code: null as number | null, signal: null as string | null, stderr: '' };
  while (killed < plan.kills) {
    last = await live(args, plan.cwd, shortest + random() * (longest - shortest));
    if (last.signal !== 'SIGKILL') break;
    killed++;
  }
  if (last.signal === 'SIGKILL' || killed === 0) last = await live(args, plan.cwd, null);
  return { killed, code: last.code, stderr: last.stderr };
}

function live(args: readonly string[], cwd: string, lifeMs: number | null) {
  const child = spawn(process.execPath, [CLI, ...args], { cwd, stdio: ['ignore', 'ignore', 'pipe'] });
  const timer = lifeMs === null ? null : setTimeout(() => child.kill('SIGKILL'), lifeMs);
  let stderr = '';
  child.stderr.on('data', (chunk: Buffer) => (stderr += chunk.toString()));
  return new Promise<{ code: number | null; signal: string | null; stderr: string }>((resolve, reject) => {
    child.on('error', reject);
    child.on('close', (code, signal) => {
      if (timer !== null) clearTimeout(timer);
      resolve({ code, signal, stderr });
    });
  });
}

/** The program while it runs. */
export interface Started {
  readonly child: ChildProcess;
  /** Its exit code. */
  readonly ended: Promise<number | null>;
  /** Resolves when something is seen; rejects when the program ends before. */
  readonly until: (seen: () => boolean) => Promise<void>;
}

/** `thickset ARGS`, to be stopped by the caller. */
export function startCli(
  args: readonly string[],
  cwd: string,
  env: Readonly<Record<string, string>> = {},
): Started {
  const child = spawn(process.execPath, [CLI, ...args], {
    cwd,
    env: { ...process.env, ...env },
    stdio: 'ignore',
  });
  const ended = new Promise<number | null>((resolve) => child.on('close', (code) => resolve(code)));
  const until = async (seen: () => boolean) => {
    while (!seen()) {
      if (child.exitCode !== null) throw new Error(`thickset ${args.join(' ')} ended with ${child.exitCode}`);
      await new Promise((resolve) => setTimeout(resolve, 5));
    }
  };
  return { child, ended, until };
}

/** Size of a file, 0 where there is none. */
export function sizeOf(path: string): number {
  return existsSync(path) ? statSync(path).size : 0;
}

/** The Arrow files in a folder and below it, with their bytes; the rest may differ from run to run. */
export function arrowFiles(folder: string): Record<string, string> {
  const names = (readdirSync(folder, { recursive: true }) as string[]).filter((name) =>
    name.endsWith('.arrow'),
  );
  return Object.fromEntries(
    names
      .sort()
      .filter((name) => statSync(join(folder, name)).isFile())
      .map((name) => [name, readFileSync(join(folder, name)).toString('base64')]),
  );
}
