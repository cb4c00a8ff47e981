/** Whether the parts given to a merge are each there once. */
import type { Shard } from '../../engine/index.js';
import { errors } from '../errors.js';

/** One folder of a merge with what it holds. */
export interface Part<T> {
  readonly folder: string;
  readonly content: T;
}

/** The parts in order. @throws ThicksetError shards_do_not_fit, with all that is missing or there twice */
export function inOrder<T>(parts: readonly Part<T>[], shardOf: (content: T) => Shard): Part<T>[] {
  const counts = [...new Set(parts.map(({ content }) => shardOf(content).count))];
  if (counts.length > 1) {
    const told = parts.map(({ folder, content }) => `${folder} is of ${shardOf(content).count}`);
    throw errors.shardsDoNotFit(`shards of different divisions: ${told.slice(0, 5).join(', ')}`);
  }
  const ordered = [...parts].sort((a, b) => shardOf(a.content).index - shardOf(b.content).index);
  const indices = ordered.map(({ content }) => shardOf(content).index);
  const twice = ordered.flatMap(({ folder }, at) =>
    indices[at] === indices[at - 1] ? [`${indices[at]} in ${ordered[at - 1].folder} and ${folder}`] : [],
  );
  if (twice.length > 0) {
    throw errors.shardsDoNotFit(`shard given twice: ${twice.join(', ')}`, 'name each shard once');
  }
  const missing = Array.from({ length: counts[0] }, (_, i) => i + 1).filter((i) => !indices.includes(i));
  if (missing.length > 0) {
    throw errors.shardsDoNotFit(
      `missing of ${counts[0]} shards: ${ranges(missing)}`,
      'run what is missing, then merge all of them',
    );
  }
  return ordered;
}

/** Ascending numbers the short way: `1, 3-5`. */
export function ranges(numbers: readonly number[]): string {
  const runs: [number, number][] = [];
  for (const n of numbers) {
    const last = runs.at(-1);
    if (last && last[1] === n - 1) last[1] = n;
    else runs.push([n, n]);
  }
  return runs.map(([from, to]) => (from === to ? `${from}` : `${from}-${to}`)).join(',');
}
