/** The folder of a run from before its first batch to its last: locked, and with what is needed to go on. */
import { existsSync, readdirSync, rmdirSync, rmSync } from 'node:fs';
import { dirname, join, resolve } from 'node:path';
import type { Checkpointing, RunState } from '../../engine/index.js';
import { errors } from '../errors.js';
import { asFolderError, checkResultFolder } from '../result/result-folder.js';
import { makeFolders, PARTIAL_PREFIX } from './durable-file.js';
import { lockFolder, type FolderLock } from './folder-lock.js';
import type { RunIdentity } from './identity.js';
import { CHECKPOINT_NAME, RunCheckpoint } from './run-checkpoint.js';

export interface FolderChoice {
  readonly overwrite: boolean;
  readonly resume: boolean;
}

export class RunFolder {
  private readonly checkpoint: RunCheckpoint;
  private readonly lock: FolderLock;
  private readonly firstMade: string | undefined;
  private readonly onExit = () => this.release();
  private warned = false;

  /**
   * Checks, makes and locks the folder.
   *
   * @param warn takes messages about what is damaged or cannot be saved
   * @throws ThicksetError output_exists, output_foreign, output_not_writable, folder_in_use
   */
  constructor(
    private readonly folder: string,
    { overwrite, resume }: FolderChoice,
    identity: RunIdentity,
    private readonly warn: (message: string) => void,
  ) {
    if (!overwrite && !resume && existsSync(join(folder, CHECKPOINT_NAME)))
      throw errors.outputUnfinished(folder);
    checkResultFolder(folder, overwrite || resume);
    this.checkpoint = new RunCheckpoint(folder, identity);
    try {
      this.firstMade = makeFolders(resolve(folder));
      this.lock = lockFolder(folder);
      removePartial(folder);
      if (!resume) this.checkpoint.remove();
    } catch (cause) {
      throw asFolderError(folder, cause);
    }
    // Also when the program is ended from somewhere else, as by a second Ctrl-C.
    process.on('exit', this.onExit);
  }

  /** Where the run left off; null at its beginning. @throws ThicksetError not_the_same, checkpoint_unfit */
  load(): RunState | null {
    return this.checkpoint.load((message) => this.warn(`${message}; the one before it is taken`));
  }

  /** A state that cannot be saved stops nothing: the run may well end before it is needed. */
  checkpointing(everyS: number): Checkpointing {
    return {
      everyS,
      save: (state) => {
        try {
          this.lock.renew();
          this.checkpoint.save(state);
          this.warned = false;
        } catch (cause) {
          const { message } = asFolderError(this.folder, cause);
          if (!this.warned) this.warn(`the state of the run is not saved: ${message}; the run goes on`);
          this.warned = true;
        }
      },
    };
  }

  /** The run is complete and written: its states are not needed any more. */
  finish(): void {
    this.checkpoint.remove();
  }

  /** Gives the folder free, and removes it if it was made for nothing. */
  release(): void {
    process.off('exit', this.onExit);
    this.lock.release();
    if (this.firstMade === undefined) return;
    try {
      for (let path = resolve(this.folder); readdirSync(path).length === 0; path = dirname(path)) {
        rmdirSync(path);
        if (path === this.firstMade) return;
      }
    } catch {
      // Somebody else uses it already.
    }
  }
}

/** What an earlier process was writing when it was killed. */
export function removePartial(folder: string): void {
  for (const name of readdirSync(folder)) {
    if (name.startsWith(PARTIAL_PREFIX)) rmSync(join(folder, name), { recursive: true, force: true });
  }
}
