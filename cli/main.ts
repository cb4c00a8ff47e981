#!/usr/bin/env node
/** The `thickset` program. A command's code is loaded only when that command is asked for: it starts faster. */
import { Command, CommanderError } from 'commander';
import { errors, EXIT_CODES, EXIT_MEANINGS, ThicksetError, type ExitName } from './errors.js';
import { packageVersion } from './version.js';

const COMMANDS: Readonly<Record<string, (program: Command) => Promise<void>>> = {
  run: async (program) => (await import('./run-command.js')).registerRunCommand(program),
  sweep: async (program) => (await import('./sweep-command.js')).registerSweepCommand(program),
  size: async (program) => (await import('./size-command.js')).registerSizeCommand(program),
  merge: async (program) => (await import('./merge-command.js')).registerMergeCommand(program),
  summary: async (program) => (await import('./summary-command.js')).registerSummaryCommand(program),
  material: async (program) => (await import('./material-command.js')).registerMaterialCommand(program),
  nuclide: async (program) => (await import('./nuclide-command.js')).registerNuclideCommand(program),
};

const EXIT_HELP = Object.entries(EXIT_CODES).map(
  ([name, code]) => `  ${String(code).padStart(3)}  ${EXIT_MEANINGS[name as ExitName]}`,
);

async function makeProgram(args: readonly string[]): Promise<Command> {
  const program = new Command('thickset')
    .description('Monte Carlo photon transport through stacks of layers, 1 keV to 20 MeV')
    .version(packageVersion())
    .addHelpText('afterAll', ['', 'Exit codes:', ...EXIT_HELP].join('\n'))
    .showHelpAfterError('(--help lists what there is)')
    .exitOverride();
  const known = Object.hasOwn(COMMANDS, args[0] ?? '');
  for (const load of known ? [COMMANDS[args[0]]] : Object.values(COMMANDS)) {
    await load(program);
  }
  return program;
}

/** The words for an error on stderr, and the exit code. Users see no stack traces. */
function fail(cause: unknown): void {
  if (cause instanceof CommanderError) {
    process.exitCode = cause.exitCode === 0 ? EXIT_CODES.ok : EXIT_CODES.usage;
    return;
  }
  const error = cause instanceof ThicksetError ? cause : errors.internal(cause);
  process.stderr.write(`${error.format()}\n`);
  process.exitCode = error.exitCode;
}

process.stdout.on('error', (error: NodeJS.ErrnoException) => {
  // The reader of a pipe has seen enough.
  if (error.code !== 'EPIPE') fail(error);
});
process.on('uncaughtException', (cause) => {
  fail(cause);
  process.exit();
});

const args = process.argv.slice(2);
try {
  await (await makeProgram(args)).parseAsync(args, { from: 'user' });
} catch (cause) {
  fail(cause);
}
