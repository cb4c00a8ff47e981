/** What the place that text goes to can show. */

export interface Terminal {
  /** A person watches: lines may be rewritten. */
  readonly interactive: boolean;
  readonly colour: boolean;
  /** Box and block characters may be used. */
  readonly unicode: boolean;
  readonly width: number;
}

/** The part of a stream that matters here. */
export interface OutputStream {
  readonly isTTY?: boolean;
  readonly columns?: number;
}

type Environment = Readonly<Record<string, string | undefined>>;

/** Width of text that goes to a file or another program. */
export const PLAIN_WIDTH = 80;
const NARROWEST = 40;

function takesUnicode(env: Environment): boolean {
  const locale = env.LC_ALL || env.LC_CTYPE || env.LANG || '';
  return /utf-?8/i.test(locale) || process.platform === 'darwin' || env.WT_SESSION !== undefined;
}

/**
 * Plain ASCII without colour unless the stream is a terminal; NO_COLOR (https://no-color.org, any non-empty value)
 * and TERM=dumb are respected.
 */
export function describeTerminal(stream: OutputStream, env: Environment = process.env): Terminal {
  const terminal = stream.isTTY === true;
  const smart = terminal && env.TERM !== 'dumb';
  return {
    interactive: smart,
    colour: smart && !env.NO_COLOR,
    unicode: terminal && takesUnicode(env),
    width: Math.max(NARROWEST, (terminal && stream.columns) || PLAIN_WIDTH),
  };
}
