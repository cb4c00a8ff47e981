/** What tells one run from another: two runs of one identity give the same files. */
import type { Setup, Shard } from '../../engine/index.js';
import { packageVersion } from '../version.js';
import { changesBetween } from './changes.js';

export interface RunIdentity {
  readonly version: string;
  readonly shard: Shard | null;
  /** The text of the setup file; it goes into the manifest and is not compared. */
  readonly text: string | null;
  readonly setup: SetupFacts;
}

/** A setup as plain values: what JSON keeps of it. */
export type SetupFacts = Readonly<Record<string, unknown>>;

export function runIdentity(setup: Setup, text: string | null, shard: Shard | null): RunIdentity {
  return { version: packageVersion(), shard, text, setup: setupFacts(setup) };
}

export function setupFacts(setup: Setup): SetupFacts {
  const edges = Array.from(setup.tally.energyEdgesKeV);
  // Through JSON, so that facts from a file and facts from a setup are of one kind.
  return JSON.parse(
    JSON.stringify({ ...setup, tally: { ...setup.tally, energyEdgesKeV: edges } }),
  ) as SetupFacts;
}

/** The setup that facts were made from. */
export function setupFromFacts(facts: SetupFacts): Setup {
  const setup = facts as unknown as Setup;
  const energyEdgesKeV = Float64Array.from(setup.tally.energyEdgesKeV);
  return { ...setup, tally: { ...setup.tally, energyEdgesKeV } };
}

/** What differs between two runs, in words. A time limit only says when to pause: it may differ. */
export function identityChanges(was: RunIdentity, is: RunIdentity): string[] {
  const compared = ({ version, shard, setup }: RunIdentity) => ({
    ...setup,
    run: { ...(setup.run as object), timeLimitS: null },
    shard: shard && `${shard.index}/${shard.count}`,
    'version of thickset': version,
  });
  return changesBetween(compared(was), compared(is));
}
