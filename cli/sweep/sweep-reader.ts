/** Sweep files: YAML text in, checked sweep out, or one error that tells everything that is wrong. */
import { basename, extname } from 'node:path';
import type { Warning } from '../../engine/index.js';
import { complaints, type Path } from '../errors.js';
import { DEFAULTS } from '../setup/limits.js';
import { ProblemList } from '../setup/problem-list.js';
import { readKeys, type Partially } from '../setup/read-keys.js';
import { readYaml } from '../setup/yaml-source.js';
import { readSetupText } from '../setup-reader.js';
import { readBase, type BaseSetup } from './base-setup.js';
import { checkPoints } from './check-points.js';
import { countPoints, makeParameters, type Combination } from './parameters.js';
import { Sweep, type Precision } from './sweep.js';
import { sweepSchema, type SweepKeys } from './sweep-schema.js';

type Keys = Partially<SweepKeys>;

export interface SweepFile {
  readonly sweep: Sweep;
  /** Those of all points, each once. */
  readonly warnings: readonly Warning[];
  readonly text: string;
}

/**
 * The sweep in a file, every point of it checked as a setup.
 *
 * @throws SetupError with all problems and their places
 */
export function readSweepFile(path: string): SweepFile {
  const text = readSetupText(path);
  const problems = new ProblemList(path);
  const raw = readYaml(text, problems);
  problems.throwIfAny();
  if (raw === null) problems.add([], complaints.emptySweep());
  problems.throwIfAny();
  return { ...makeSweep(path, raw, problems), text };
}

function makeSweep(path: string, raw: unknown, problems: ProblemList): Omit<SweepFile, 'text'> {
  const keys: Keys = readKeys(sweepSchema, raw, problems) ?? {};
  const base = keys.base === undefined ? null : readBase(keys.base, path, problems);
  const seed = keys.seed ?? seedOf(base) ?? DEFAULTS.seed;
  const combine = combinationOf(keys, problems);
  const sampling = { combine, samples: keys.samples ?? 0, seed };
  const parameters = keys.vary === undefined ? [] : makeParameters(keys.vary, base?.raw, sampling, problems);
  const points = parameters.length === 0 ? 0 : countPoints(parameters, combine, problems);
  problems.throwIfAny();
  const sweep = new Sweep({
    title: keys.title ?? titleOf(base) ?? basename(path, extname(path)),
    seed,
    base: base!,
    parameters,
    combine,
    points,
    precision: precisionOf(keys),
    timeLimitS: keys.time_limit ?? null,
    spectra: keys.spectra ?? false,
  });
  return { sweep, warnings: checkPoints(sweep, problems) };
}

function combinationOf(keys: Keys, problems: ProblemList): Combination {
  if (keys.samples === undefined) return keys.combine ?? 'grid';
  if ('combine' in keys) {
    problems.addKey(['combine'], complaints.contradiction('does not go with samples', 'remove one of them'));
  }
  return 'samples';
}

function precisionOf({ precision }: Keys): Precision | null {
  if (precision === undefined) return null;
  if (typeof precision === 'number') return { quantity: null, layer: null, relativeError: precision };
  const { quantity, layer, relative_error: relativeError } = precision;
  return { quantity: quantity!, layer: layer ?? null, relativeError: relativeError! };
}

function seedOf(base: BaseSetup | null): string | null {
  const seed = textAt(base, ['seed']);
  return seed === null ? null : String(seed);
}

function titleOf(base: BaseSetup | null): string | null {
  const title = textAt(base, ['title']);
  return typeof title === 'string' ? title : null;
}

/** A text or number of the base that has not been checked yet. */
function textAt(base: BaseSetup | null, path: Path): string | number | null {
  const value = path.reduce<unknown>(
    (inner, key) =>
      typeof inner === 'object' && inner !== null ? (inner as Record<string, unknown>)[key] : undefined,
    base?.raw,
  );
  return typeof value === 'string' || typeof value === 'number' ? value : null;
}
