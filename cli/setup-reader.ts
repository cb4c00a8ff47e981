/**
 * Setup files: YAML text in, checked setup out, or one error that tells everything that is wrong.
 *
 * Text → plain values with places (`yaml-source`) → every key by itself (`read-keys` along `setup-schema`) → what
 * the keys demand of one another (`stack`, `emission`, `tally`, `run-options`).
 */
import { constants, closeSync, fstatSync, openSync, readFileSync } from 'node:fs';
import { basename, dirname, extname } from 'node:path';
import type { Setup } from '../engine/setup.js';
import { complaints, errors, reason, type Complaint } from './errors.js';
import { makeEmission, makeShape, makeSource, reportBelowCutoff, reportLiveTime } from './setup/emission.js';
import { DEFAULTS } from './setup/limits.js';
import { MaterialWords } from './setup/material-words.js';
import { ProblemList } from './setup/problem-list.js';
import { readKeys } from './setup/read-keys.js';
import { hasNarrowLayer, makePhysics, makeRun } from './setup/run-options.js';
import { makeExtent, makeStack, reportNegativeWidths } from './setup/stack.js';
import { countSpectra, dosePointNames, makeTally } from './setup/tally.js';
import type { SetupWarning } from './setup/warnings.js';
import { MAX_SETUP_BYTES, MAX_SETUP_SIZE, readYaml } from './setup/yaml-source.js';
import { setupSchema } from './setup-schema.js';

/** Where a setup comes from. */
export interface SetupOrigin {
  /** How messages call it; default "setup". */
  readonly fileName?: string;
  /** Folder in which spectrum files are looked for; null or absent: there are none. */
  readonly directory?: string | null;
}

export interface CheckedSetup {
  readonly setup: Setup;
  readonly warnings: readonly SetupWarning[];
}

/** A checked setup with the very text it was read from. */
export interface SetupFile extends CheckedSetup {
  readonly text: string;
}

/**
 * The setup in a file.
 *
 * @throws SetupError with all problems
 */
export function readSetup(path: string): Setup {
  return readSetupFile(path).setup;
}

/** Like {@link readSetup}, with warnings and text. */
export function readSetupFile(path: string): SetupFile {
  const text = readSetupText(path);
  return { ...parseSetup(text, { fileName: path, directory: dirname(path) }), text };
}

/**
 * The setup in a YAML text.
 *
 * @throws SetupError with all problems and their places
 */
export function parseSetup(text: string, origin: SetupOrigin = {}): CheckedSetup {
  const problems = new ProblemList(origin.fileName ?? 'setup');
  const raw = readYaml(text, problems);
  if (raw === undefined) problems.throwIfAny();
  if (raw === null) {
    problems.add([], complaints.emptyFile());
    problems.throwIfAny();
  }
  return check(raw, origin, problems);
}

/**
 * The setup in a plain object of the same form as the YAML; messages then have no places.
 *
 * @throws SetupError with all problems
 */
export function checkSetup(raw: unknown, origin: SetupOrigin = {}): CheckedSetup {
  return check(raw, origin, new ProblemList(origin.fileName ?? 'setup'));
}

function check(
  raw: unknown,
  { fileName, directory = null }: SetupOrigin,
  problems: ProblemList,
): CheckedSetup {
  const keys = readKeys(setupSchema, raw, problems) ?? {};
  const { source: sourceKeys = {}, tally: tallyKeys = {}, run: runKeys = {} } = keys;
  const warnings: SetupWarning[] = [];

  const materials = new MaterialWords(keys.materials ?? {}, problems);
  const stack = makeStack(keys.stack ?? [], materials, problems);
  const extent = makeExtent(keys.extent, problems);
  const physics = makePhysics(keys.physics ?? {}, warnings);
  const shape = makeShape(sourceKeys, stack, problems);
  const emitted = keys.source === undefined ? null : makeEmission(sourceKeys, directory, problems);
  reportLiveTime(sourceKeys, problems);
  if (emitted !== null) {
    reportBelowCutoff(sourceKeys, emitted, physics.cutoffKeV, problems);
    reportNegativeWidths(stack, emitted.highestKeV, problems);
  }
  const needs = emitted && {
    highestKeV: emitted.highestKeV,
    cutoffKeV: physics.cutoffKeV,
    spectra: countSpectra(stack, tallyKeys),
  };
  const tally = makeTally(tallyKeys, needs, stack, problems);
  const run = makeRun(
    runKeys,
    {
      stack,
      hasSides: 'extent' in keys || hasNarrowLayer(stack),
      dose: tallyKeys.dose ?? [],
      dosePoints: dosePointNames(tallyKeys),
      coincidence: tallyKeys.coincidence ?? false,
      hasLines: emitted && emitted.emission.lines.length > 0,
    },
    problems,
  );
  problems.throwIfAny();
  const setup: Setup = {
    title: keys.title ?? defaultTitle(fileName),
    seed: keys.seed ?? DEFAULTS.seed,
    source: makeSource(sourceKeys, present(shape), present(emitted).emission),
    stack: stack.layers.map(({ layer }) => present(layer)),
    extent,
    tally: present(tally),
    physics,
    run,
    energyGridKeV: present(emitted).energyGridKeV,
  };
  return { setup, warnings };
}

/** A part that can only be absent after a complaint. */
function present<T>(part: T | null): T {
  if (part === null) throw errors.internal('a setup without complaints is not complete');
  return part;
}

function defaultTitle(fileName: string | undefined): string {
  return fileName === undefined ? 'Untitled' : basename(fileName, extname(fileName));
}

/** The text of a file that may not be what it says it is. @throws SetupError */
export function readSetupText(path: string): string {
  const text = readFileOrComplaint(path);
  if (typeof text === 'string') return text;
  const problems = new ProblemList(path);
  problems.add([], text);
  problems.throwIfAny();
  throw errors.internal('a complaint was lost');
}

function readFileOrComplaint(path: string): string | Complaint {
  try {
    // Opened without waiting for the other end of a pipe.
    const file = openSync(path, constants.O_RDONLY | constants.O_NONBLOCK);
    try {
      const status = fstatSync(file);
      if (!status.isFile()) return complaints.notAFile();
      if (status.size > MAX_SETUP_BYTES) return complaints.tooLarge(MAX_SETUP_SIZE);
      // The mark of byte order is kept: the text is to be the very content of the file.
      return new TextDecoder('utf-8', { fatal: true, ignoreBOM: true }).decode(readFileSync(file));
    } finally {
      closeSync(file);
    }
  } catch (error) {
    if (error instanceof TypeError) return complaints.notYaml('the file is not UTF-8 text');
    return (error as NodeJS.ErrnoException).code === 'ENOENT'
      ? complaints.setupMissing()
      : complaints.setupUnreadable(reason(error));
  }
}
