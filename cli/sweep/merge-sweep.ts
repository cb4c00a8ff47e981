/** Shards of a sweep, put together to what the undivided sweep would have written. */
import { existsSync, readFileSync } from 'node:fs';
import { changesBetween } from '../checkpoint/changes.js';
import { inOrder, type Part } from '../checkpoint/merge-parts.js';
import { errors } from '../errors.js';
import type { BeginRecord, EndRecord, PointEntry } from './records.js';
import { SweepFolder, spectraPath } from './sweep-folder.js';
import type { SweepLog } from './sweep-log.js';
import { writeTable } from './sweep-table.js';
import type { SweepView } from './sweep-text.js';

/**
 * Merges shards into the folder `out`.
 *
 * @throws ThicksetError shards_do_not_fit, not_the_same, and those of the folder
 */
export function mergeSweep(parts: readonly Part<SweepLog>[], out: string, overwrite: boolean): SweepView {
  const ordered = fitting(parts);
  const begin: BeginRecord = { ...ordered[0].content.begin, shard: null };
  const points = new Map<number, PointEntry>();
  for (const { content } of ordered) for (const [point, entry] of content.points) points.set(point, entry);
  const elapsedS = Math.max(...ordered.map(({ content }) => content.elapsedS));
  const folder = new SweepFolder(out, { overwrite, resume: false }, begin);
  try {
    for (const point of [...points.keys()].sort((a, b) => a - b)) {
      const { folder: shard } = ordered[point % ordered.length];
      const spectra = spectraPath(shard, point);
      if (begin.spectra && existsSync(spectra)) folder.writeSpectraFile(point, readFileSync(spectra));
      folder.record(points.get(point)!);
    }
    folder.recordEnd({ kind: 'end', reason: endOf(ordered), elapsedS });
    writeTable(folder, begin, points, { elapsedS, threads: null });
    folder.close();
  } finally {
    folder.release();
  }
  return { begin, points, elapsedS, state: 'ended' };
}

/** The parts in order, all of one sweep and each at its end. */
function fitting(parts: readonly Part<SweepLog>[]): Part<SweepLog>[] {
  for (const { folder, content } of parts) {
    if (content.begin.shard === null)
      throw errors.shardsDoNotFit(`${folder}: holds a whole sweep, not a shard`);
    if (content.end === null) {
      throw errors.shardsDoNotFit(`${folder}: its shard is not finished`, 'go on with it by --resume');
    }
  }
  const ordered = inOrder(parts, ({ begin }) => begin.shard!);
  const [first] = ordered;
  for (const { folder, content } of ordered) {
    const changes = changesBetween(first.content.begin.identity, content.begin.identity);
    if (changes.length > 0) throw errors.notTheSame(folder, `sweep than ${first.folder}`, changes);
  }
  return ordered;
}

function endOf(parts: readonly Part<SweepLog>[]): EndRecord['reason'] {
  return parts.every(({ content }) => content.end!.reason === 'complete') ? 'complete' : 'time_limit';
}
