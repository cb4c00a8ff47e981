/** Runs the built program as a user would, in a process of its own. */
import { spawn, type ChildProcessWithoutNullStreams } from 'node:child_process';
import { existsSync } from 'node:fs';
import { fileURLToPath } from 'node:url';

export const CLI = fileURLToPath(new URL('../../dist/cli/main.js', import.meta.url));

export interface Outcome {
  readonly code: number | null;
  readonly stdout: string;
  readonly stderr: string;
}

export interface CliOptions {
  readonly cwd?: string;
  readonly env?: Readonly<Record<string, string>>;
}

function environment(extra: Readonly<Record<string, string>> = {}): NodeJS.ProcessEnv {
  const outer = Object.entries(process.env).filter(([name]) => !/^(NO|FORCE)_COLOR$/.test(name));
  return { ...Object.fromEntries(outer), TERM: 'xterm-256color', LC_ALL: 'C.UTF-8', ...extra };
}

function collect(child: ChildProcessWithoutNullStreams): Promise<Outcome> {
  let [stdout, stderr] = ['', ''];
  child.stdout.on('data', (chunk: Buffer) => (stdout += chunk.toString()));
  child.stderr.on('data', (chunk: Buffer) => (stderr += chunk.toString()));
  return new Promise((resolve, reject) => {
    child.on('error', reject);
    child.on('close', (code) => resolve({ code, stdout, stderr }));
  });
}

/** `thickset ARGS` without a terminal. */
export function runCli(args: readonly string[], { cwd, env }: CliOptions = {}): Promise<Outcome> {
  return collect(spawn(process.execPath, [CLI, ...args], { cwd, env: environment(env) }));
}

/** A shell command line in which `$THICKSET` is the program. */
export function runShell(command: string, { cwd, env }: CliOptions = {}): Promise<Outcome> {
  const program = `"${process.execPath}" "${CLI}"`;
  return collect(
    spawn('sh', ['-c', command.replaceAll('$THICKSET', program)], { cwd, env: environment(env) }),
  );
}

/** The util-linux program that gives another one a terminal. */
export const hasTerminal = existsSync('/usr/bin/script');

export interface TerminalSession {
  /** What is on the screen; stdout and stderr are one. */
  readonly outcome: Promise<Outcome>;
  /** Resolves when the screen shows the text. */
  readonly seen: (text: string) => Promise<void>;
  readonly type: (keys: string) => void;
}

/** `thickset ARGS` in a terminal, 100 columns wide. Arguments must need no quotes. */
export function runInTerminal(args: readonly string[], { cwd, env }: CliOptions = {}): TerminalSession {
  const command = `stty cols 100; exec "${process.execPath}" "${CLI}" ${args.join(' ')}`;
  const child = spawn('/usr/bin/script', ['-qefc', command, '/dev/null'], { cwd, env: environment(env) });
  let screen = '';
  const waiting: { text: string; resolve: () => void; reject: (error: Error) => void }[] = [];
  child.stdout.on('data', (chunk: Buffer) => {
    screen += chunk.toString();
    waiting.filter(({ text }) => screen.includes(text)).forEach(({ resolve }) => resolve());
  });
  child.on('close', () =>
    waiting.forEach(({ text, reject }) => reject(new Error(`no "${text}" in: ${screen}`))),
  );
  return {
    outcome: collect(child),
    seen: (text) =>
      screen.includes(text)
        ? Promise.resolve()
        : new Promise((resolve, reject) => waiting.push({ text, resolve, reject })),
    type: (keys) => child.stdin.write(keys),
  };
}
