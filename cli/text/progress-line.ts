/** The one line on stderr that tells a person how far a run is; rewritten in place, a few times per second at most. */
import type { Progress } from '../../engine/result.js';
import type { Setup } from '../../engine/setup.js';
import { clip } from '../show.js';
import { prepareWidths, truncate } from './display-width.js';
import {
  formatCount,
  formatDuration,
  formatFigure,
  formatNumber,
  formatPercent,
  relativeError,
} from './figure-format.js';
import { makeStyle } from './style.js';
import { describeTerminal } from './terminal.js';

const SHORTEST_INTERVAL_MS = 200;
/** To the line's start, and erase to its end (ECMA-48). */
const REWRITE = '\r\x1b[K';

export interface ProgressLine {
  readonly update: (progress: Progress) => void;
  /** Removes the line, so that what follows starts on a clean one. */
  readonly clear: () => void;
}

/** What the line says. */
export function progressText(progress: Progress, plusMinus: string): string {
  const { histories, historiesPlanned, figure, remainingS } = progress;
  const parts = [
    `${formatCount(histories)} of ${formatCount(historiesPlanned)} histories ` +
      `(${Math.floor((100 * histories) / historiesPlanned)} %)`,
  ];
  if (figure !== null && figure.mean !== null) {
    const { value, error } = formatFigure(figure.mean, figure.stdError);
    const relative = relativeError(figure.mean, figure.stdError);
    const where = figure.layer === null ? '' : ` ${clip(figure.layer, 20)}`;
    const line = figure.lineKeV === null ? '' : ` ${formatNumber(figure.lineKeV, 6)} keV`;
    parts.push(
      `${figure.quantity}${where}${line} ${value}` +
        (error === '' ? '' : ` ${plusMinus} ${error}`) +
        (relative === null ? '' : ` (${formatPercent(relative)})`),
    );
  }
  if (remainingS !== null) {
    parts.push(`${formatDuration(Math.ceil(remainingS))} left`);
  }
  return parts.join(', ');
}

/** A line that is rewritten in place; `text` is asked for only when it is time to show it. */
export interface RewrittenLine {
  readonly show: (text: () => string) => void;
  /** Removes the line, so that what follows starts on a clean one. */
  readonly clear: () => void;
}

/** A line written through `write` and kept to `width` cells. */
export function makeRewrittenLine(
  write: (text: string) => void,
  width: number,
  now: () => number = () => performance.now(),
): RewrittenLine {
  let shownAt = -Infinity;
  let shown = false;
  return {
    show: (text) => {
      if (now() - shownAt < SHORTEST_INTERVAL_MS) {
        return;
      }
      shownAt = now();
      shown = true;
      // One cell is left free: a full line would wrap and could not be rewritten.
      write(REWRITE + truncate(text(), width - 1));
    },
    clear: () => {
      if (shown) {
        write(REWRITE);
        shown = false;
      }
    },
  };
}

/** The progress of a run on such a line. */
export function makeProgressLine(
  write: (text: string) => void,
  width: number,
  plusMinus: string,
  now?: () => number,
): ProgressLine {
  const line = makeRewrittenLine(write, width, now);
  return {
    update: (progress) => line.show(() => progressText(progress, plusMinus)),
    clear: line.clear,
  };
}

/** The progress line of a run on stderr; null where nobody watches or `quiet` is asked. */
export async function showProgress({ stack }: Setup, quiet: boolean): Promise<ProgressLine | null> {
  const terminal = describeTerminal(process.stderr);
  if (quiet || !terminal.interactive) {
    return null;
  }
  await prepareWidths(stack.map(({ name }) => name));
  return makeProgressLine(
    (text) => process.stderr.write(text),
    terminal.width,
    makeStyle(terminal).plusMinus,
  );
}
