/**
 * The folder of a sweep: locked while a process works in it, its journal the one thing that counts. Everything else in
 * it can be made from the journal, save the spectra, which are put in place before the point they belong to is
 * recorded.
 */
import { existsSync, readdirSync, rmSync } from 'node:fs';
import { join, resolve } from 'node:path';
import { decodeState, encodeState, type RunState, type Shard, type Spectrum } from '../../engine/index.js';
import { changesBetween } from '../checkpoint/changes.js';
import { makeFolders, PARTIAL_PREFIX, readIfThere, replaceFile } from '../checkpoint/durable-file.js';
import { LOCK_NAME, lockFolder, type FolderLock } from '../checkpoint/folder-lock.js';
import { JOURNAL_NAME, SLURM_FOLDER } from '../checkpoint/names.js';
import { removePartial } from '../checkpoint/run-folder.js';
import { errors } from '../errors.js';
import { MANIFEST_NAME } from '../result/manifest.js';
import { asFolderError } from '../result/result-folder.js';
import { encodeSpectra } from '../result/result-tables.js';
import { beginsAsJournal, Journal } from './journal.js';
import { plainRecord, PointWriter, type BeginRecord, type EndRecord, type PointEntry } from './records.js';
import { readSweepLog, type SweepLog } from './sweep-log.js';

export const POINTS_NAME = 'points.arrow';
const SPECTRA_FOLDER = 'spectra';
const STATES_FOLDER = 'states';
const OWN_NAMES: ReadonlySet<string> = new Set([
  JOURNAL_NAME,
  POINTS_NAME,
  MANIFEST_NAME,
  SPECTRA_FOLDER,
  STATES_FOLDER,
]);
/** Points are counted from 1 in names, with enough digits to stand in order. */
const DIGITS = 6;

export interface SweepFolderChoice {
  readonly overwrite: boolean;
  readonly resume: boolean;
}

export class SweepFolder {
  /** What earlier sessions did. */
  readonly log: SweepLog | null;
  private readonly lock: FolderLock;
  private readonly journal: Journal;
  private readonly writer = new PointWriter();
  private readonly onExit = () => this.lock.release();

  /**
   * Checks, makes and locks the folder, and opens its journal.
   *
   * @throws ThicksetError output_exists, output_foreign, output_not_writable, folder_in_use, not_the_same
   */
  constructor(
    readonly folder: string,
    choice: SweepFolderChoice,
    begin: BeginRecord,
  ) {
    try {
      checkSweepFolder(folder, choice);
      makeFolders(resolve(folder));
      this.lock = lockFolder(folder);
    } catch (cause) {
      throw asFolderError(folder, cause);
    }
    // Also when the program is ended from somewhere else, as by a second Ctrl-C.
    process.on('exit', this.onExit);
    try {
      removePartial(folder);
      if (!choice.resume) removeOwn(folder);
      this.log = choice.resume ? readSweepLog(folder) : null;
      if (this.log !== null) refuseOther(folder, this.log.begin, begin);
      this.journal = new Journal(join(folder, JOURNAL_NAME), this.log?.length ?? 0);
      if (this.log === null) this.guarded(() => this.journal.append(plainRecord(begin)));
    } catch (cause) {
      this.release();
      throw asFolderError(folder, cause);
    }
  }

  /** Records a point. @throws ThicksetError disk_full, output_not_writable; what was recorded before is kept */
  record(entry: PointEntry): void {
    this.guarded(() => {
      for (const record of this.writer.recordsOf(entry)) this.journal.append(record);
    });
  }

  recordEnd(end: EndRecord): void {
    this.guarded(() => {
      this.journal.append(plainRecord(end));
      this.journal.flush();
    });
  }

  renewLock(): void {
    this.guarded(() => this.lock.renew());
  }

  writeSpectra(point: number, spectra: readonly Spectrum[]): void {
    this.writeSpectraFile(point, encodeSpectra(spectra));
  }

  writeSpectraFile(point: number, bytes: Uint8Array): void {
    this.guarded(() => {
      makeFolders(resolve(this.folder, SPECTRA_FOLDER));
      replaceFile(spectraPath(this.folder, point), bytes);
    });
  }

  /** The whole state of a point that is not done, where spectra are kept. */
  writeState(point: number, state: RunState): void {
    this.guarded(() => {
      makeFolders(resolve(this.folder, STATES_FOLDER));
      replaceFile(statePath(this.folder, point), encodeState(state, ''));
    });
  }

  /** @throws ThicksetError checkpoint_unfit via the engine when the file is damaged */
  readState(point: number): RunState | null {
    const bytes = readIfThere(statePath(this.folder, point));
    return bytes === null ? null : decodeState(bytes).state;
  }

  removeState(point: number): void {
    rmSync(statePath(this.folder, point), { force: true });
  }

  removeStates(): void {
    rmSync(join(this.folder, STATES_FOLDER), { recursive: true, force: true });
  }

  /** Replaces one of the files made from the journal. */
  writeFile(name: string, bytes: Uint8Array): void {
    this.guarded(() => replaceFile(join(this.folder, name), bytes));
  }

  release(): void {
    process.off('exit', this.onExit);
    this.lock.release();
  }

  close(): void {
    this.guarded(() => {
      this.journal.flush();
      this.journal.close();
    });
  }

  private guarded(action: () => void): void {
    try {
      action();
    } catch (cause) {
      throw asFolderError(this.folder, cause);
    }
  }
}

export function spectraPath(folder: string, point: number): string {
  return join(folder, SPECTRA_FOLDER, `point-${String(point + 1).padStart(DIGITS, '0')}.arrow`);
}

function statePath(folder: string, point: number): string {
  return join(folder, STATES_FOLDER, `point-${String(point + 1).padStart(DIGITS, '0')}.bin`);
}

/** @throws ThicksetError output_exists, output_foreign */
export function checkSweepFolder(folder: string, { overwrite, resume }: SweepFolderChoice): void {
  if (!existsSync(folder)) return;
  const entries = readdirSync(folder).filter(
    (name) => !name.startsWith(PARTIAL_PREFIX) && !name.startsWith(LOCK_NAME) && name !== SLURM_FOLDER,
  );
  if (entries.length === 0) return;
  const journal = readIfThere(join(folder, JOURNAL_NAME));
  if (journal === null || !beginsAsJournal(journal) || !entries.every((name) => OWN_NAMES.has(name))) {
    throw errors.outputForeign(folder, 'holds something other than a sweep');
  }
  if (!overwrite && !resume) throw errors.sweepExists(folder);
}

function removeOwn(folder: string): void {
  for (const name of OWN_NAMES) rmSync(join(folder, name), { recursive: true, force: true });
}

const shardText = (shard: Shard | null) => (shard === null ? null : `${shard.index}/${shard.count}`);

/** @throws ThicksetError not_the_same */
function refuseOther(folder: string, was: BeginRecord, is: BeginRecord): void {
  const facts = ({ identity, shard }: BeginRecord) => ({ ...identity, shard: shardText(shard) });
  const changes = changesBetween(facts(was), facts(is));
  if (changes.length > 0) throw errors.notTheSame(folder, 'sweep', changes);
}
