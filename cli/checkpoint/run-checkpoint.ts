/**
 * The saved state of a run in its folder. There are two files, so that one whole state is there at any moment: the
 * last one, and the one before it for the case that the last cannot be read.
 */
import { join } from 'node:path';
import { decodeState, EngineError, encodeState, type RunState } from '../../engine/index.js';
import { errors } from '../errors.js';
import { disk, readIfThere, replaceFile, type DiskCalls } from './durable-file.js';
import { identityChanges, type RunIdentity } from './identity.js';

export const CHECKPOINT_NAME = 'checkpoint.bin';
const PREVIOUS_NAME = 'checkpoint-previous.bin';

export class RunCheckpoint {
  private readonly path: string;
  private readonly previous: string;

  constructor(
    private readonly folder: string,
    private readonly identity: RunIdentity,
    private readonly system: DiskCalls = disk,
  ) {
    this.path = join(folder, CHECKPOINT_NAME);
    this.previous = join(folder, PREVIOUS_NAME);
  }

  /** @throws system errors; what was saved before is then still there */
  save(state: RunState): void {
    const bytes = encodeState(state, JSON.stringify(this.identity));
    replaceFile(this.path, bytes, { previous: this.previous, system: this.system });
  }

  /**
   * The last state that is whole; null where there is none.
   *
   * @param onDamage called with a message when the last one is not
   * @throws ThicksetError not_the_same for the state of another run, checkpoint_unfit when all there is is damaged
   */
  load(onDamage: (message: string) => void): RunState | null {
    let damage: EngineError | null = null;
    for (const path of [this.path, this.previous]) {
      const bytes = readIfThere(path, this.system);
      if (bytes === null) continue;
      try {
        return this.checked(decodeState(bytes));
      } catch (cause) {
        if (!(cause instanceof EngineError)) throw cause;
        damage = cause;
        onDamage(`${path} is damaged, ${cause.message}`);
      }
    }
    if (damage !== null) throw errors.checkpointUnfit(damage.message, damage);
    return null;
  }

  private checked({ identity, state }: { identity: string; state: RunState }): RunState {
    const changes = identityChanges(JSON.parse(identity) as RunIdentity, this.identity);
    if (changes.length > 0) throw errors.notTheSame(this.folder, 'run', changes);
    return state;
  }

  remove(): void {
    for (const path of [this.path, this.previous]) this.system.rmSync(path, { force: true });
  }
}
