/** `thickset sweep --dry-run`: the points of a sweep, and the time they will take by playing a few of them shortly. */
import { Run, type Simulator } from '../../engine/index.js';
import { formatCount, formatDuration } from '../text/figure-format.js';
import { renderTable } from '../text/text-table.js';
import { prepareWidths } from '../text/display-width.js';
import type { Sweep } from './sweep.js';
import { shortNames, valueText } from './sweep-text.js';
import type { BeginRecord } from './records.js';

/** Points that are played for a moment; the cost of the others lies between those of their neighbours. */
const MOST_SAMPLES = 24;
const SAMPLE_HISTORIES = 4000;
/** A run with an aim is not judged before its tenth batch. */
const LEAST_AIMED = 100_000;

export interface DryRun {
  /** Seconds, with all threads. */
  readonly expectedS: number;
  /** Some points may reach their precision sooner, or the time limit ends the sweep. */
  readonly isUpperBound: boolean;
  readonly sampledPoints: number;
}

/** What was seen of a point in its moment. */
interface Sample {
  readonly secondsPerHistory: number;
  /** Of the figure watched; Infinity where nothing was seen. */
  readonly relativeError: number;
}

/** Plays a few points for a moment. */
export async function calibrate(
  sweep: Sweep,
  points: readonly number[],
  simulator: Pick<Simulator, 'play' | 'threads'>,
): Promise<DryRun> {
  const chosen = sampleOf(points);
  // The first time around, the code is not yet compiled to the end and takes longer.
  await playShortly(sweep, chosen, simulator);
  const samples = await playShortly(sweep, chosen, simulator);
  const costS = chosen.map((point) => costOf(sweep, point, samples.get(point)!));
  const sumS = points.reduce((sum, point) => sum + interpolate(point, chosen, costS), 0);
  const { timeLimitS, precision } = sweep;
  const isBlind =
    precision !== null && [...samples.values()].some(({ relativeError }) => relativeError === Infinity);
  return {
    expectedS: Math.min(sumS / simulator.threads, timeLimitS ?? Infinity),
    isUpperBound: isBlind || timeLimitS !== null,
    sampledPoints: chosen.length,
  };
}

async function playShortly(
  sweep: Sweep,
  points: readonly number[],
  simulator: Pick<Simulator, 'play'>,
): Promise<Map<number, Sample>> {
  const waiting = [...points];
  const runs = new Map<Run, number>();
  const samples = new Map<number, Sample>();
  await simulator.play({
    next: () => {
      const point = waiting.shift();
      if (point === undefined) return null;
      const { setup } = sweep.setupOf(point);
      const histories = Math.min(SAMPLE_HISTORIES, setup.run.histories);
      const run = new Run({ ...setup, run: { ...setup.run, histories, until: null } }, { spectra: false });
      runs.set(run, point);
      return run;
    },
    onOver: (run) => {
      const { mean, stdError } = run.progress()?.figure ?? { mean: null, stdError: null };
      samples.set(runs.get(run)!, {
        secondsPerHistory: run.workerMs / 1000 / Math.max(1, run.histories),
        relativeError: mean && stdError ? stdError / mean : Infinity,
      });
    },
  });
  return samples;
}

/** Seconds of one thread that a point takes: errors fall as one over the root of the histories. */
function costOf(sweep: Sweep, point: number, { secondsPerHistory, relativeError }: Sample): number {
  const { histories, until } = sweep.setupOf(point).setup.run;
  const needed = until === null ? Infinity : SAMPLE_HISTORIES * (relativeError / until.relativeError) ** 2;
  return secondsPerHistory * Math.min(histories, Math.max(LEAST_AIMED, needed));
}

/** Points spread evenly, the ends among them. */
function sampleOf(points: readonly number[]): number[] {
  const count = Math.min(MOST_SAMPLES, points.length);
  return Array.from({ length: count }, (_, i) =>
    count === 1 ? points[0] : points[Math.round((i * (points.length - 1)) / (count - 1))],
  );
}

/** The value at a point, on the straight line between those of the points chosen before and after it. */
function interpolate(point: number, chosen: readonly number[], values: readonly number[]): number {
  const after = chosen.findIndex((other) => other >= point);
  const before = Math.max(0, after - 1);
  const width = chosen[after] - chosen[before];
  const part = width === 0 ? 1 : (point - chosen[before]) / width;
  return values[before] + (values[after] - values[before]) * part;
}

/** What `--dry-run` prints. */
export async function printDryRun(
  begin: BeginRecord,
  points: readonly number[],
  dryRun: DryRun,
  threads: number,
  json: boolean,
): Promise<void> {
  const { expectedS, isUpperBound, sampledPoints } = dryRun;
  if (json) {
    const table = points.map((point) => ({
      point: point + 1,
      values: Object.fromEntries(begin.parameters.map(({ name, values }) => [name, values[point]])),
      seed: begin.seeds[point],
    }));
    const expected = { expected_s: expectedS, expected_at_most: isUpperBound, sampled_points: sampledPoints };
    const parameters = begin.parameters.map(({ name, unit }) => ({ name, unit }));
    const object = { title: begin.title, points: begin.points, threads, ...expected, parameters, table };
    process.stdout.write(`${JSON.stringify(object, null, 2)}\n`);
    return;
  }
  await prepareWidths(begin.parameters.map(({ name }) => name));
  const rows = points.map((point) => [
    String(point + 1),
    ...begin.parameters.map(({ values, unit }) => valueText(values[point], unit)),
  ]);
  const names = shortNames(begin.parameters.map(({ name }) => name));
  const most = isUpperBound ? 'at most ' : '';
  const time = `${most}${formatDuration(expectedS)} with ${formatCount(threads)} ${threads === 1 ? 'thread' : 'threads'}`;
  const lines = [
    ...renderTable([['point', ...names], ...rows]),
    '',
    `${formatCount(points.length)} points, all of them fine; expected time: ${time}, by a trial of ${sampledPoints} points.`,
  ];
  process.stdout.write(`${lines.join('\n')}\n`);
}
