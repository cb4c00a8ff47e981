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
    ...(withUnits(setup) as object),
    run: withUnits({ ...(setup.run as object), timeLimitS: null }),
    shard: shard && `${shard.index}/${shard.count}`,
    'version of thickset': version,
  });
  return changesBetween(compared(was), compared(is));
}

const UNITS: Readonly<Record<string, string>> = {
  Cm: 'cm',
  KeV: 'keV',
  GPerCm3: 'g/cm3',
  Deg: 'deg',
  Bq: 'Bq',
  S: 's',
};
const WITH_UNIT = new RegExp(`^(.+?)(${Object.keys(UNITS).join('|')})$`);

/** `thicknessCm: 3` as `thickness: 3 cm`, as it may stand in a setup file. */
function withUnits(value: unknown): unknown {
  if (Array.isArray(value)) return value.map(withUnits);
  if (typeof value !== 'object' || value === null) return value;
  const entries = Object.entries(value).map(([key, inner]) => {
    const match = typeof inner === 'number' ? WITH_UNIT.exec(key) : null;
    return match === null ? [key, withUnits(inner)] : [match[1], `${inner} ${UNITS[match[2]]}`];
  });
  return Object.fromEntries(entries) as object;
}
