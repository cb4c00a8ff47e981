/** manifest.json of a sweep: what it was and how it went; everything that may differ between two runs of it. */
import type { Warning } from '../../engine/index.js';
import { sha256 } from '../result/manifest.js';
import { finalStatus, pointsOf, type FinalStatus } from './points-table.js';
import { SWEEP_FORMAT, type BeginRecord, type PointEntry } from './records.js';

export interface SweepTimes {
  readonly elapsedS: number;
  readonly threads: number | null;
}

/** How many points stand how. */
export function countStatus(
  begin: BeginRecord,
  entries: ReadonlyMap<number, PointEntry>,
): Record<FinalStatus, number> {
  const counts = { done: 0, unfinished: 0, failed: 0, not_begun: 0 };
  for (const point of pointsOf(begin.points, begin.shard)) counts[finalStatus(entries.get(point))]++;
  return counts;
}

/** Warnings of all points together, each once. */
export function warningsOf(entries: ReadonlyMap<number, PointEntry>): Warning[] {
  const warnings = new Map<string, Warning>();
  for (const { warnings: own } of entries.values()) {
    for (const warning of own) {
      const count = (warnings.get(warning.code)?.count ?? 0) + warning.count;
      warnings.set(warning.code, { ...warning, count });
    }
  }
  return [...warnings.values()];
}

const total = (entries: ReadonlyMap<number, PointEntry>, of: (entry: PointEntry) => number) =>
  [...entries.values()].reduce((sum, entry) => sum + of(entry), 0);

/** The facts of a sweep as `--json` and the manifest have them. */
export function sweepFacts(
  begin: BeginRecord,
  entries: ReadonlyMap<number, PointEntry>,
  { elapsedS, threads }: SweepTimes,
): Record<string, unknown> {
  const { shard } = begin;
  return {
    version: begin.version,
    title: begin.title,
    seed: begin.seed,
    points: begin.points,
    shard: shard && `${shard.index}/${shard.count}`,
    status: countStatus(begin, entries),
    histories: total(entries, ({ histories }) => histories),
    warnings: warningsOf(entries),
    timings: { wall_s: elapsedS, worker_s: total(entries, ({ workerS }) => workerS), threads },
  };
}

export function encodeManifest(
  begin: BeginRecord,
  entries: ReadonlyMap<number, PointEntry>,
  times: SweepTimes,
  files: Readonly<Record<string, Uint8Array>>,
): Uint8Array {
  const manifest = {
    format: SWEEP_FORMAT,
    ...sweepFacts(begin, entries, times),
    finished: new Date().toISOString(),
    sweep: { text: begin.text, sha256: sha256(begin.text) },
    base: begin.baseText === null ? null : { text: begin.baseText, sha256: sha256(begin.baseText) },
    files: Object.fromEntries(Object.entries(files).map(([name, bytes]) => [name, sha256(bytes)])),
  };
  return Buffer.from(`${JSON.stringify(manifest, null, 2)}\n`);
}
