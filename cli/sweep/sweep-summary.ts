/** `thickset summary` of a sweep: from its journal alone, whether it is finished or running. */
import { existsSync, readdirSync } from 'node:fs';
import { join } from 'node:path';
import { isLocked } from '../checkpoint/folder-lock.js';
import { SLURM_FOLDER } from '../checkpoint/names.js';
import { errors } from '../errors.js';
import { prepareWidths } from '../text/display-width.js';
import { makeStyle } from '../text/style.js';
import { describeTerminal } from '../text/terminal.js';
import { sweepObject } from './sweep-json.js';
import { readSweepLog } from './sweep-log.js';
import { sweepLines, type SweepView } from './sweep-text.js';

/** @throws ThicksetError result_missing, result_damaged */
export function viewSweep(folder: string): SweepView {
  const running = isLocked(folder);
  const log = readSweepLog(folder);
  if (log === null) return viewShards(folder);
  const { begin, points, end, elapsedS } = log;
  return { begin, points, elapsedS, state: running ? 'running' : end ? 'ended' : 'stopped' };
}

/** A sweep on a cluster before it is merged: what its shards have so far. */
function viewShards(folder: string): SweepView {
  const parts = join(folder, SLURM_FOLDER);
  const names = existsSync(parts) ? readdirSync(parts).filter((name) => /^shard-\d+$/.test(name)) : [];
  const shards = names.map((name) => join(parts, name));
  const logs = shards.flatMap((shard) => readSweepLog(shard) ?? []);
  if (logs.length === 0) throw errors.resultMissing(folder);
  return {
    begin: { ...logs[0].begin, shard: null },
    points: new Map(logs.flatMap(({ points }) => [...points])),
    elapsedS: Math.max(...logs.map(({ elapsedS }) => elapsedS)),
    state: shards.some(isLocked) ? 'running' : 'stopped',
  };
}

export async function printSweep(
  view: SweepView,
  folder: string,
  { json, width, threads }: { json?: boolean; width?: number; threads?: number },
): Promise<void> {
  if (json) {
    process.stdout.write(`${JSON.stringify(sweepObject(view, folder, threads ?? null), null, 2)}\n`);
    return;
  }
  const style = makeStyle(describeTerminal(process.stdout), width);
  const { title, parameters } = view.begin;
  await prepareWidths([title, ...parameters.map(({ name }) => name)]);
  process.stdout.write(`${sweepLines(view, style).join('\n')}\n`);
}
