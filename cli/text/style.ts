/** Signs and colours for one output stream. */
import picocolors from 'picocolors';
import type { Terminal } from './terminal.js';

export interface Style {
  readonly width: number;
  readonly unicode: boolean;
  readonly plusMinus: string;
  readonly heading: (text: string) => string;
  readonly note: (text: string) => string;
  readonly alert: (text: string) => string;
  readonly drawing: (text: string) => string;
}

export function makeStyle(terminal: Terminal, width: number = terminal.width): Style {
  const colours = picocolors.createColors(terminal.colour);
  return {
    width,
    unicode: terminal.unicode,
    plusMinus: terminal.unicode ? '±' : '+/-',
    heading: colours.bold,
    note: colours.dim,
    alert: colours.yellow,
    drawing: colours.cyan,
  };
}
