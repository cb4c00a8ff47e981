/** The one line on stderr that tells a person how far a sweep is. */
import { formatCount, formatDuration, formatPercent } from '../text/figure-format.js';
import { makeRewrittenLine } from '../text/progress-line.js';
import { prepareWidths } from '../text/display-width.js';
import { describeTerminal } from '../text/terminal.js';
import { relativeErrorOf } from './point-entry.js';
import type { Sweep } from './sweep.js';
import type { SweepRunner } from './sweep-runner.js';
import { valueText, worstPoint } from './sweep-text.js';
import { measureOf } from './values.js';

export interface SweepProgress {
  readonly update: (runner: SweepRunner, playing: readonly number[]) => void;
  readonly clear: () => void;
}

/** Null where nobody watches or `quiet` is asked. */
export async function showSweepProgress(sweep: Sweep, quiet: boolean): Promise<SweepProgress | null> {
  const terminal = describeTerminal(process.stderr);
  if (quiet || !terminal.interactive) return null;
  await prepareWidths(sweep.parameters.map(({ name }) => name));
  const line = makeRewrittenLine((text) => process.stderr.write(text), terminal.width);
  const clock = new Clock(sweep);
  return {
    update: (runner, playing) => line.show(() => progressText(runner, playing, clock)),
    clear: line.clear,
  };
}

/** What the line says. */
export function progressText(runner: SweepRunner, playing: readonly number[], clock: Clock): string {
  const { entries, points, sweep } = runner;
  const all = [...entries.values()];
  const done = all.filter(({ status }) => status === 'done').length;
  const failed = all.filter(({ status }) => status === 'failed').length;
  const parts = [`${formatCount(done)} of ${formatCount(points.length)} points`];
  if (failed > 0) parts.push(`${formatCount(failed)} failed`);
  if (playing.length > 0) parts.push(`now ${pointText(sweep, playing[0])}`);
  const worst = worstPoint(entries.values());
  if (worst !== null)
    parts.push(`largest error ${formatPercent(relativeErrorOf(worst))} at point ${worst.point + 1}`);
  const left = clock.left(runner.elapsedS, done + failed, points.length);
  if (left !== null) parts.push(`${formatDuration(Math.ceil(left))} left`);
  return parts.join(', ');
}

function pointText(sweep: Sweep, point: number): string {
  const values = sweep.valuesOf(point).map((raw) => {
    const measure = measureOf(raw);
    return measure === null ? String(raw) : valueText(measure.value, measure.unit);
  });
  return `${point + 1} (${values.join(', ')})`;
}

/** Time left: to the limit, or by the points done in this session. */
export class Clock {
  private startS: number | null = null;
  private startDone = 0;

  constructor(private readonly sweep: Pick<Sweep, 'timeLimitS'>) {}

  /** Seconds; null while nothing can be said. */
  left(elapsedS: number, done: number, points: number): number | null {
    if (this.startS === null) [this.startS, this.startDone] = [elapsedS, done];
    const { timeLimitS } = this.sweep;
    const toLimit = timeLimitS === null ? Infinity : Math.max(0, timeLimitS - elapsedS);
    const played = done - this.startDone;
    const byPoints = played > 0 ? ((elapsedS - this.startS) * (points - done)) / played : Infinity;
    // With a limit the points are all begun before any is done: their pace says nothing.
    const left = timeLimitS === null ? byPoints : toLimit;
    return Number.isFinite(left) ? left : null;
  }
}
