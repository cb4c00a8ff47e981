/** Kills the program at random moments and lets it go on, until it ends by itself. */
import { spawn } from 'node:child_process';
import { readdirSync, readFileSync, statSync } from 'node:fs';
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
