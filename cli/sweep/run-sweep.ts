/** A whole sweep in its folder: begun or gone on with, played, and its table written. */
import type { Simulator } from '../../engine/index.js';
import { SweepFolder, type SweepFolderChoice } from './sweep-folder.js';
import { beginRecord } from './sweep-identity.js';
import type { SweepFile } from './sweep-reader.js';
import { SweepRunner, type SweepEnd, type SweepRunOptions } from './sweep-runner.js';
import { writeTable } from './sweep-table.js';
import type { SweepView } from './sweep-text.js';

export interface SweepOutcome {
  readonly view: SweepView;
  readonly end: SweepEnd;
}

/**
 * Plays what is left of a sweep.
 *
 * @param out folder of the sweep
 * @throws ThicksetError when the folder cannot be used, or not any more; what was recorded by then is kept
 */
export async function runSweep(
  file: SweepFile,
  out: string,
  choice: SweepFolderChoice,
  simulator: Pick<Simulator, 'play' | 'threads'>,
  options: SweepRunOptions,
): Promise<SweepOutcome> {
  const begin = beginRecord(file, options.shard);
  const folder = new SweepFolder(out, choice, begin);
  try {
    reportDamage(folder, options);
    const runner = new SweepRunner(file.sweep, folder, simulator, options);
    const end = await runner.run();
    const { entries: points, elapsedS } = runner;
    writeTable(folder, begin, points, { elapsedS, threads: simulator.threads });
    folder.close();
    return { view: { begin, points, elapsedS, state: end === 'interrupted' ? 'stopped' : 'ended' }, end };
  } finally {
    folder.release();
  }
}

/** What was lost of the journal is found out anew. */
function reportDamage({ log }: SweepFolder, { warn }: SweepRunOptions): void {
  if (log === null || log.damagedAt.length === 0) return;
  const places = log.damagedAt.join(', ');
  warn?.(`the journal is damaged at byte ${places}; what it told there is played again`);
}
