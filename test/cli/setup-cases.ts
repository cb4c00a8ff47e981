/** Setups for tests of the reader, made from the part that matters in each. */
import { SetupError } from '../../cli/errors.js';
import { parseSetup, type SetupOrigin } from '../../cli/setup-reader.js';

export const WALL = 'stack: [{name: wall, material: lead, thickness: 1 cm}]';
export const BEAM = 'source: {kind: beam, energy: 1 MeV}';

/** A wall in front of a source with these keys; the source is on line 1. */
export function source(keys: string): string {
  return `source: {${keys}}\n${WALL}\n`;
}

/** A beam onto layers with these keys; the first layer is on line 3. */
export function stack(...layers: string[]): string {
  return `${BEAM}\nstack:\n${layers.map((keys) => `  - {${keys}}\n`).join('')}`;
}

export function layer(keys: string): string {
  return stack(`name: wall, ${keys}`);
}

export function detector(keys: string): string {
  return layer(`material: NaI, thickness: 1 cm, detector: ${keys}`);
}

/** A beam onto a wall with another section on line 1. */
export function material(keys: string): string {
  return `materials: {X: {${keys}}}\n${BEAM}\n${WALL}\n`;
}

/** A beam onto a wall with other sections from line 3 on. */
export function more(text: string): string {
  return `${BEAM}\n${WALL}\n${text}\n`;
}

/** The problems of a setup, one on each line, without the name of the file; empty if it is accepted. */
export function problemsOf(text: string, origin: SetupOrigin = {}): string {
  try {
    parseSetup(text, { fileName: 'bad.yaml', ...origin });
    return '';
  } catch (error) {
    if (!(error instanceof SetupError)) throw error;
    return error.format().replace(/^bad\.yaml: /gm, '');
  }
}
