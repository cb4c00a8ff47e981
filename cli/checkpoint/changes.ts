/** What differs between two descriptions, in words: `stack.wall.thickness_cm was 3, is 4`. */
import { formatPath, type Path } from '../errors.js';
import { showFlow, clip } from '../show.js';

const MOST_TOLD = 5;

type Mapping = Readonly<Record<string, unknown>>;

/** The changes from `was` to `is`, both of plain values; empty where there are none. */
export function changesBetween(was: unknown, is: unknown): string[] {
  const changes = [...differences(was, is, [])];
  const told = changes.slice(0, MOST_TOLD);
  if (changes.length > MOST_TOLD) told.push(`and ${changes.length - MOST_TOLD} more changes`);
  return told;
}

function* differences(was: unknown, is: unknown, path: Path): Generator<string> {
  if (Object.is(was, is)) return;
  if (isMapping(was) && isMapping(is)) {
    for (const key of new Set([...Object.keys(was), ...Object.keys(is)])) {
      yield* differences(was[key], is[key], [...path, key]);
    }
  } else if (Array.isArray(was) && Array.isArray(is)) {
    yield* listDifferences(was, is, path);
  } else {
    yield `${formatPath(path)} was ${words(was)}, is ${words(is)}`;
  }
}

/** Items with names are told by them; a list of another length is one change. */
function* listDifferences(was: readonly unknown[], is: readonly unknown[], path: Path): Generator<string> {
  if (was.length !== is.length) {
    yield `${formatPath(path)} had ${was.length} entries, has ${is.length}`;
    return;
  }
  for (let i = 0; i < was.length; i++) {
    const name = isMapping(was[i]) ? (was[i] as Mapping).name : undefined;
    yield* differences(was[i], is[i], [...path, typeof name === 'string' ? name : i]);
  }
}

function isMapping(value: unknown): value is Mapping {
  return typeof value === 'object' && value !== null && !Array.isArray(value);
}

function words(value: unknown): string {
  return value === undefined || value === null ? 'not there' : clip(showFlow(value));
}
