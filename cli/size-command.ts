/** `thickset size`: the thickness of one layer that brings doses under their limits. */
import { InvalidArgumentError, Option, type Command } from 'commander';
import {
  EngineError,
  Run,
  Simulator,
  sizeLayer,
  tradeOff,
  type RunResult,
  type Setup,
} from '../engine/index.js';
import { parseColumns, parseSeed, parseThreads } from './command-options.js';
import { fromEngine } from './engine-errors.js';
import { Complaint, errors, EXIT_CODES } from './errors.js';
import { readSetupFile } from './setup-reader.js';
import { parseLimit, parseTransmission, type RateLimit } from './size/limit-words.js';
import { makeTask, type SizeTask } from './size/size-goals.js';
import { sizeObject, verdictOf, type SizeReport } from './size/size-json.js';
import { sizeLines } from './size/size-text.js';
import { prepareWidths } from './text/display-width.js';
import { makeRewrittenLine } from './text/progress-line.js';
import { makeStyle } from './text/style.js';
import { describeTerminal } from './text/terminal.js';
import { parseQuantity } from './units.js';

interface SizeOptions {
  readonly layer: string;
  readonly limit?: readonly RateLimit[];
  readonly transmission?: readonly number[];
  readonly step: number;
  readonly tradeOff?: string;
  readonly threads?: number;
  readonly seed?: string;
  readonly quiet?: boolean;
  readonly width?: number;
  readonly json?: boolean;
}

const DEFAULT_STEP_CM = 0.1;
/** Thicknesses of the other layer in a trade-off, in units of that of the setup. */
const TRADE_OFF_SHARES = [0, 0.5, 1, 1.5, 2];

export function registerSizeCommand(program: Command): void {
  program
    .command('size')
    .description('find the thickness of a layer that brings doses under their limits')
    .argument('<setup>', 'setup file (YAML)')
    .requiredOption('--layer <name>', 'layer whose thickness is asked for')
    .option(
      '--limit <bound>',
      'as in "ambient_dose <= 2.5 uSv/h", or "ambient_dose at desk <= …"; may be given more than once',
      (text, before: readonly RateLimit[] = []) => [...before, parseLimit(text)],
    )
    .option(
      '--transmission <share>',
      'dose with the stack over dose without it, as in 1e-3; may be given more than once',
      (text, before: readonly number[] = []) => [...before, parseTransmission(text)],
    )
    .addOption(
      new Option('--step <length>', 'round the thickness up to a multiple of it')
        .argParser(parseStep)
        .default(DEFAULT_STEP_CM, '1 mm'),
    )
    .option('--trade-off <layer>', 'also list thicknesses of this layer with what the sized one then needs')
    .option('--threads <number>', 'worker threads; default: one for each core', parseThreads)
    .option('--seed <text>', 'seed to use instead of that of the setup', parseSeed)
    .option('--quiet', 'no progress and no warnings on stderr')
    .option('--width <columns>', 'width of the text; default: that of the terminal', parseColumns)
    .option('--json', 'print one JSON object instead')
    .action(sizeCommand);
}

function parseStep(text: string): number {
  const step = parseQuantity(text, ['length']);
  if (step instanceof Complaint || !(step.value > 0)) {
    throw new InvalidArgumentError('must be a length with its unit, as in "1 mm".');
  }
  return step.value;
}

async function sizeCommand(path: string, options: SizeOptions): Promise<void> {
  const { limit = [], transmission = [] } = options;
  if (limit.length + transmission.length === 0) {
    throw errors.usage('nothing to meet', 'give --limit "ambient_dose <= 2.5 uSv/h" or --transmission 1e-3');
  }
  const file = readSetupFile(path);
  const given = { ...file.setup, seed: options.seed ?? file.setup.seed };
  requireLayers(given, options);
  const report = await answer(makeTask(given, limit, transmission), options);
  await print(report, options);
  if (['impossible', 'unconfirmed'].includes(verdictOf(report.answer)))
    process.exitCode = EXIT_CODES.incomplete;
}

function requireLayers({ stack }: Setup, { layer, tradeOff: other }: SizeOptions): void {
  const names = stack.map(({ name }) => name);
  for (const name of other === undefined ? [layer] : [layer, other]) {
    if (!names.includes(name))
      throw errors.usage(`no layer is called ${name}`, `layers: ${names.join(', ')}`);
  }
  if (layer === other) throw errors.usage('--trade-off needs another layer than --layer');
}

async function answer(task: SizeTask, options: SizeOptions): Promise<SizeReport> {
  const startMs = performance.now();
  const { layer, step: stepCm, tradeOff: other, threads } = options;
  const simulator = new Simulator(threads);
  const player = makePlayer(simulator, options.quiet ?? false);
  const request = { layer, stepCm, goals: task.goals.map(({ goal }) => goal) };
  try {
    const found = await sizeLayer(task.setup, request, player.play);
    const otherCm = task.setup.stack.find(({ name }) => name === other)?.thicknessCm ?? 0;
    const thicknesses = TRADE_OFF_SHARES.map((share) => share * otherCm);
    const pairs = other && (await tradeOff(task.setup, request, other, thicknesses, player.play));
    const wallS = (performance.now() - startMs) / 1000;
    return {
      task,
      layer,
      stepCm,
      answer: found,
      tradeOff: other && pairs ? { layer: other, pairs } : null,
      wallS,
    };
  } catch (cause) {
    throw cause instanceof EngineError ? fromEngine(cause) : cause;
  } finally {
    player.clear();
    await simulator.close();
  }
}

/** Plays runs one after the other in the same threads, and tells which is under way. */
function makePlayer(simulator: Simulator, quiet: boolean) {
  const screen = describeTerminal(process.stderr);
  const line =
    quiet || !process.stderr.isTTY
      ? null
      : makeRewrittenLine((text) => process.stderr.write(text), makeStyle(screen).width);
  let runs = 0;
  return {
    play: async (setup: Setup): Promise<RunResult> => {
      runs++;
      line?.show(
        () =>
          `run ${runs}: ${setup.stack.map(({ name, thicknessCm }) => `${name} ${thicknessCm.toPrecision(4)} cm`).join(', ')}`,
      );
      const run = new Run(setup, { spectra: false });
      let next: Run | null = run;
      await simulator.play({
        next: () => {
          const first = next;
          next = null;
          return first;
        },
      });
      return run.result();
    },
    clear: () => line?.clear(),
  };
}

async function print(report: SizeReport, { json, width }: SizeOptions): Promise<void> {
  if (json) {
    process.stdout.write(`${JSON.stringify(sizeObject(report), null, 2)}\n`);
    return;
  }
  const style = makeStyle(describeTerminal(process.stdout), width);
  const { stack, tally } = report.task.setup;
  await prepareWidths([...stack.map(({ name }) => name), ...tally.dosePoints.map(({ name }) => name)]);
  process.stdout.write(`${sizeLines(report, style).join('\n')}\n`);
}
