/**
 * Paths into a setup, as in `stack.shield.thickness`, `source.lines[0].energy` or `stack["Pb 0.5"].thickness`. Items
 * of a list are found by their number in brackets or by their name.
 */
import { nearestWord } from '../../materials/index.js';
import { complaints, Complaint, formatPath, type Path } from '../errors.js';

type Mapping = Readonly<Record<string, unknown>>;

const STEP = /\.?([^.[\]"]+)|\[(\d+)\]|\["((?:[^"\\]|\\.)*)"\]/y;

/** The steps of a path; null where the text is none. */
export function parsePath(text: string): Path | null {
  const steps: (string | number)[] = [];
  STEP.lastIndex = 0;
  while (STEP.lastIndex < text.length) {
    const match = STEP.exec(text);
    if (match === null || (steps.length === 0 && text.startsWith('.'))) return null;
    const [, word, number, quoted] = match;
    steps.push(number !== undefined ? Number(number) : (word ?? quoted.replace(/\\(.)/g, '$1')));
  }
  return steps.length === 0 ? null : steps;
}

/**
 * The place a path leads to, in keys and list positions; keys that are missing may be given by the path. Whether they
 * are known is for the check of the setup to say.
 */
export function resolvePath(raw: unknown, steps: Path): Path | Complaint {
  const path: (string | number)[] = [];
  let value = raw;
  for (const step of steps) {
    if (Array.isArray(value)) {
      const index = positionIn(value, step);
      if (index < 0) return noSuchItem(value, step, path);
      path.push(index);
      value = value[index];
    } else if (value === undefined || value === null || isMapping(value)) {
      if (typeof step === 'number') return complaints.noWay(`${formatPath(path)} is no list`);
      path.push(step);
      value = isMapping(value) && Object.hasOwn(value, step) ? value[step] : undefined;
    } else {
      return complaints.noWay(`${formatPath(path)} is a single value`);
    }
  }
  return path;
}

function positionIn(list: readonly unknown[], step: string | number): number {
  if (typeof step === 'number') return step < list.length ? step : -1;
  return list.findIndex((item) => isMapping(item) && item.name === step);
}

function noSuchItem(list: readonly unknown[], step: string | number, path: Path): Complaint {
  if (typeof step === 'number') {
    return complaints.noWay(`${formatPath(path)} has ${list.length} entries, numbered from 0`);
  }
  const names = list.flatMap((item) => (isMapping(item) && typeof item.name === 'string' ? item.name : []));
  const known = names.length === 0 ? 'give the entries names' : `names here: ${names.join(', ')}`;
  return complaints.unknownName(`entry of ${formatPath(path)}`, step, nearestWord(step, names), known);
}

/** A copy of `raw` with the value at a place; what is not on the way there is shared with it. */
export function withValue(raw: unknown, path: Path, value: unknown): unknown {
  if (path.length === 0) return value;
  const [step, ...rest] = path;
  if (Array.isArray(raw)) {
    return raw.map((item: unknown, at) => (at === step ? withValue(item, rest, value) : item));
  }
  const mapping = isMapping(raw) ? raw : {};
  return { ...mapping, [step]: withValue(mapping[step], rest, value) };
}

function isMapping(value: unknown): value is Mapping {
  return typeof value === 'object' && value !== null && !Array.isArray(value);
}
