/** The files of a sweep that are made from its journal. */
import { MANIFEST_NAME } from '../result/manifest.js';
import { encodePoints } from './points-table.js';
import type { BeginRecord, PointEntry } from './records.js';
import { POINTS_NAME, type SweepFolder } from './sweep-folder.js';
import { encodeManifest, type SweepTimes } from './sweep-manifest.js';

/** Writes points.arrow, and manifest.json last. */
export function writeTable(
  folder: SweepFolder,
  begin: BeginRecord,
  entries: ReadonlyMap<number, PointEntry>,
  times: SweepTimes,
): void {
  const files = { [POINTS_NAME]: encodePoints(begin, entries) };
  const manifest = encodeManifest(begin, entries, times, files);
  for (const [name, bytes] of Object.entries(files)) folder.writeFile(name, bytes);
  folder.writeFile(MANIFEST_NAME, manifest);
}
