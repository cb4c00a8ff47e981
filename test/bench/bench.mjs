/**
 * The speed bench: engine and yardstick in turn on the same cases, so that a ratio holds on a busy machine; then what a
 * user waits for and how much memory it takes. Run by `npm run bench`; `npm run bench -- --quick` shortens it.
 *
 * Without a C compiler or the yardstick's source beside the checkout, histories per second are printed alone.
 */
import { execFileSync, spawnSync } from 'node:child_process';
import { cpSync, existsSync, mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { cpus, tmpdir } from 'node:os';
import { join } from 'node:path';
import { parseSetup } from '../../dist/cli/setup-reader.js';
import { Run, Simulator } from '../../dist/engine/index.js';
import { CASES, PROCESSES, setupText, yardstickArguments } from './cases.mjs';

const quick = process.argv.includes('--quick');
const ROUNDS = quick ? 3 : 9;
const HISTORIES = quick ? 1e6 : 3e6;
/** Agreement asked for between engine and yardstick, in combined standard errors. */
const MAX_SIGMA = 4;
const folder = mkdtempSync(join(tmpdir(), 'thickset-bench-'));
let failures = 0;

try {
  const yardstick = buildYardstick();
  console.log(`${cpus()[0].model}, ${cpus().length} cores, Node ${process.version}`);
  await speed(yardstick, 'plain');
  await speed(yardstick, 'all');
  await processes();
  await threads();
  await memory();
  waits();
  await steadyState();
} finally {
  rmSync(folder, { recursive: true, force: true });
}
process.exitCode = failures > 0 ? 1 : 0;

/** Compiles the yardstick; null when it is not to be had. */
function buildYardstick() {
  const source = new URL('../../../shared/yardstick/', import.meta.url).pathname;
  if (!existsSync(source)) return null;
  cpSync(source, join(folder, 'yardstick-source'), { recursive: true });
  const where = join(folder, 'yardstick-source');
  const built = spawnSync('cc', ['-O3', '-march=native', '-o', 'yardstick', 'yardstick.c', '-lm'], {
    cwd: where,
  });
  return built.status === 0 ? where : null;
}

function playYardstick(where, benchCase, histories) {
  const out = execFileSync('./yardstick', yardstickArguments(benchCase, histories), {
    cwd: where,
    encoding: 'utf8',
  });
  return JSON.parse(out);
}

async function play(simulator, text) {
  const { setup } = parseSetup(text, { fileName: 'bench', directory: folder });
  const run = new Run(setup);
  let given = false;
  await simulator.play({ next: () => (given ? null : ((given = true), run)) });
  return run.result();
}

/** Ratios of engine to yardstick, round by round; the median is the figure. */
async function speed(yardstick, physics) {
  console.log(
    `\n${physics === 'plain' ? 'physics of the yardstick' : 'all physics'}, one worker thread, histories/s`,
  );
  const simulator = new Simulator(1);
  for (const benchCase of CASES) {
    const text = setupText(benchCase, physics, HISTORIES);
    await play(simulator, text);
    const rates = [];
    let result;
    for (let round = 0; round < ROUNDS; round++) {
      const theirs = yardstick ? playYardstick(yardstick, benchCase, HISTORIES).histories_per_second : null;
      result = await play(simulator, text);
      rates.push({ ours: result.timings.historiesPerSecond, theirs });
    }
    const ours = median(rates.map((rate) => rate.ours));
    if (!yardstick) {
      console.log(`  ${benchCase.name.padEnd(44)} ${millions(ours)}`);
      continue;
    }
    const ratios = rates.map((rate) => rate.ours / rate.theirs);
    console.log(
      `  ${benchCase.name.padEnd(44)} ${millions(ours)}  yardstick ${millions(median(rates.map((r) => r.theirs)))}` +
        `  ratio ${median(ratios).toFixed(2)} (${Math.min(...ratios).toFixed(2)} to ${Math.max(...ratios).toFixed(2)})`,
    );
    if (physics === 'plain') agree(benchCase, result, playYardstick(yardstick, benchCase, HISTORIES));
  }
  await simulator.close();
}

/** Each figure of the yardstick within 4 combined standard errors; its own error is taken to be the engine's. */
function agree(benchCase, result, theirs) {
  const layer = `layer${benchCase.detector}`;
  const worst = { sigma: 0, quantity: '' };
  for (const row of result.totals) {
    if (!(row.quantity in theirs) || row.stdError === null) continue;
    if (row.layer !== null && row.layer !== layer) continue;
    const sigma = Math.abs(row.mean - theirs[row.quantity]) / (Math.SQRT2 * row.stdError);
    if (sigma > worst.sigma) Object.assign(worst, { sigma, quantity: row.quantity });
  }
  const ok = worst.sigma <= MAX_SIGMA;
  if (!ok) failures++;
  console.log(
    `    figures agree: ${ok ? 'yes' : 'NO'} (largest difference ${worst.sigma.toFixed(1)} sigma, ${worst.quantity})`,
  );
}

/** What each process costs: time of a history with all physics over time without the process, in turn. */
async function processes() {
  console.log('\ntime with all physics over time without one process');
  const simulator = new Simulator(1);
  for (const benchCase of CASES) {
    const rate = async (physics) =>
      (await play(simulator, setupText(benchCase, physics, Math.round(HISTORIES / 3)))).timings
        .historiesPerSecond;
    const costs = [];
    for (const process of PROCESSES) {
      await rate(process);
      const ratios = [];
      for (let round = 0; round < ROUNDS; round++) ratios.push((await rate(process)) / (await rate('all')));
      costs.push(`${process} ${median(ratios).toFixed(2)}`);
    }
    console.log(`  ${benchCase.name.padEnd(44)} ${costs.join('  ')}`);
  }
  await simulator.close();
}

/** Two worker threads against one. */
async function threads() {
  const ratios = [];
  const [one, two] = [new Simulator(1), new Simulator(2)];
  const text = setupText(CASES[0], 'all', 2 * HISTORIES);
  for (const simulator of [one, two]) await play(simulator, text);
  for (let round = 0; round < ROUNDS; round++) {
    const single = (await play(one, text)).timings.historiesPerSecond;
    ratios.push((await play(two, text)).timings.historiesPerSecond / single);
  }
  await one.close();
  await two.close();
  console.log(
    `\ntwo workers over one: ${median(ratios).toFixed(2)} (${Math.max(...ratios).toFixed(2)} at best)`,
  );
}

/** Peak resident memory of whole runs with two workers. */
async function memory() {
  console.log('\npeak resident memory, two workers');
  for (const histories of quick ? [1e6] : [1e6, 1e7]) {
    const peak = timed([
      'run',
      file('memory', setupText(CASES[0], 'all', histories)),
      '--threads',
      '2',
    ]).memoryMB;
    console.log(
      `  ${histories.toExponential(0)} histories: ${peak === null ? 'not measured' : `${peak.toFixed(0)} MB`}`,
    );
  }
}

/** What a user waits for. */
function waits() {
  const setup = file('short', setupText(CASES[0], 'all', 1000));
  const runs = Array.from({ length: ROUNDS }, () => timed(['run', setup]).seconds);
  const summaries = Array.from(
    { length: ROUNDS },
    () => timed(['summary', join(folder, 'out')], false).seconds,
  );
  console.log(
    `\nrun of 1000 histories: ${median(runs).toFixed(2)} s; summary: ${median(summaries).toFixed(2)} s`,
  );
}

function file(name, text) {
  const path = join(folder, `${name}.yaml`);
  writeFileSync(path, text);
  return path;
}

/** Wall time and peak memory of the program itself. */
function timed(args, out = true) {
  mkdirSync(folder, { recursive: true });
  const program = new URL('../../dist/cli/main.js', import.meta.url).pathname;
  const all = [program, ...args, ...(out ? ['--out', join(folder, 'out'), '--overwrite', '--quiet'] : [])];
  const report = join(folder, 'resources.cjs');
  writeFileSync(
    report,
    "process.on('exit', () => require('fs').writeFileSync(process.env.REPORT, String(process.resourceUsage().maxRSS)));",
  );
  const peak = join(folder, 'peak');
  const started = performance.now();
  const done = spawnSync(process.execPath, ['--require', report, ...all], {
    env: { ...process.env, REPORT: peak },
  });
  const seconds = (performance.now() - started) / 1000;
  if (done.status !== 0) {
    failures++;
    console.log(`  failed: ${done.stderr}`);
  }
  return { seconds, memoryMB: existsSync(peak) ? Number(readFileSync(peak, 'utf8')) / 1024 : null };
}

/** Growth of the heap over many histories: nothing is kept from one to the next. */
async function steadyState() {
  const simulator = new Simulator(1);
  const text = setupText(CASES[1], 'all', quick ? 1e6 : 1e7);
  await play(simulator, text);
  const before = process.memoryUsage();
  await play(simulator, text);
  const after = process.memoryUsage();
  const grown = (after.heapUsed + after.external - before.heapUsed - before.external) / 1e6;
  console.log(`\nheap growth over ${quick ? '1e6' : '1e7'} histories: ${grown.toFixed(1)} MB`);
  await simulator.close();
}

function median(values) {
  const sorted = [...values].sort((a, b) => a - b);
  return sorted[Math.floor(sorted.length / 2)];
}

function millions(rate) {
  return `${(rate / 1e6).toFixed(2)} M`;
}
