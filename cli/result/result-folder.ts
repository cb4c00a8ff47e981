/**
 * The folder that holds a result. It changes from one whole state to the next: files are written under a temporary
 * name, flushed to disk and renamed, the manifest last; whatever goes wrong on the way leaves what was there before.
 * Everything is synchronous: a signal handler cannot run in the middle of it.
 */
import * as nodeFs from 'node:fs';
import { basename, dirname, join, resolve } from 'node:path';
import { flushFolder, PARTIAL_PREFIX } from '../checkpoint/durable-file.js';
import { LOCK_NAME } from '../checkpoint/folder-lock.js';
import { errors, ThicksetError } from '../errors.js';
import { MANIFEST_NAME, parseManifest } from './manifest.js';

/** The calls used here; tests hand in their own to make them fail. */
export type FileSystem = Pick<
  typeof nodeFs,
  | 'accessSync'
  | 'closeSync'
  | 'copyFileSync'
  | 'existsSync'
  | 'fsyncSync'
  | 'mkdirSync'
  | 'openSync'
  | 'readdirSync'
  | 'readFileSync'
  | 'renameSync'
  | 'rmSync'
  | 'rmdirSync'
  | 'statSync'
  | 'writeFileSync'
>;

function nearestExisting(path: string, system: FileSystem): string {
  return system.existsSync(path) ? path : nearestExisting(dirname(path), system);
}

/** Names that say nothing about what a folder holds. */
function isPassing(name: string): boolean {
  return name.startsWith(PARTIAL_PREFIX) || name.startsWith(LOCK_NAME);
}

/** A folder that was made for a run which was killed before it had anything to keep. */
function isLeftOver(folder: string, system: FileSystem): boolean {
  const entries = system.readdirSync(folder);
  return entries.length > 0 && entries.every(isPassing);
}

/** States of a run, and the data files it may have been killed while putting in place. */
const UNFINISHED =
  /^(checkpoint(-previous)?\.bin|shard\.bin|(totals|spectra|depth|efficiency|efficiency_fit)\.arrow)$/;

function isOurs(folder: string, system: FileSystem): boolean {
  const entries = system.readdirSync(folder).filter((name) => !isPassing(name));
  if (!entries.includes(MANIFEST_NAME)) {
    const hasState = entries.some((name) => name.endsWith('.bin'));
    return entries.length === 0 || (hasState && entries.every((name) => UNFINISHED.test(name)));
  }
  try {
    parseManifest(system.readFileSync(join(folder, MANIFEST_NAME), 'utf8'));
    return true;
  } catch {
    return false;
  }
}

/**
 * Makes sure, before any work is done, that results can go to `folder`: a new one whose parent can be written, or
 * with `overwrite` an empty one or one that holds an earlier result.
 * @throws ThicksetError output_exists, output_not_writable
 */
export function checkResultFolder(folder: string, overwrite: boolean, system: FileSystem = nodeFs): void {
  const path = resolve(folder);
  try {
    if (system.existsSync(path)) {
      if (!system.statSync(path).isDirectory()) {
        throw errors.outputForeign(folder, 'is not a folder');
      }
      if (!isOurs(path, system)) {
        throw errors.outputForeign(folder, 'holds something other than results');
      }
      if (!overwrite && !isLeftOver(path, system)) {
        throw errors.outputExists(folder);
      }
    }
    const place = nearestExisting(path, system);
    if (!system.statSync(place).isDirectory()) {
      throw errors.outputForeign(place, 'is not a folder');
    }
    system.accessSync(place, nodeFs.constants.W_OK | nodeFs.constants.X_OK);
  } catch (cause) {
    throw asFolderError(folder, cause);
  }
}

/**
 * Replaces the result in `folder` by the given files (name to content), all or nothing; makes the folder and its
 * parents where needed. `manifest.json` becomes visible last. Files of an earlier result not among them go.
 * @throws ThicksetError disk_full, output_not_writable
 */
export function replaceResult(
  folder: string,
  files: ReadonlyMap<string, Uint8Array>,
  system: FileSystem = nodeFs,
): void {
  const path = resolve(folder);
  try {
    if (system.existsSync(path)) {
      replaceInside(path, files, system);
    } else {
      createWhole(path, files, system);
    }
  } catch (cause) {
    throw asFolderError(folder, cause);
  }
}

function createWhole(path: string, files: ReadonlyMap<string, Uint8Array>, system: FileSystem): void {
  const parent = dirname(path);
  const firstMade = system.mkdirSync(parent, { recursive: true });
  const stage = join(parent, `.${basename(path)}${PARTIAL_PREFIX}${process.pid}`);
  try {
    writeStage(stage, files, system);
    system.renameSync(stage, path);
  } catch (cause) {
    system.rmSync(stage, { recursive: true, force: true });
    removeMadeFolders(parent, firstMade, system);
    throw cause;
  }
  flushFolder(parent, system);
}

function replaceInside(path: string, files: ReadonlyMap<string, Uint8Array>, system: FileSystem): void {
  const stage = join(path, `${PARTIAL_PREFIX}${process.pid}`);
  const earlier = earlierFiles(path, system);
  try {
    writeStage(stage, files, system);
    for (const name of files.keys()) {
      if (system.existsSync(join(path, name))) {
        system.copyFileSync(join(path, name), join(stage, `earlier-${name}`));
      }
    }
    moveIntoPlace(stage, path, manifestLast([...files.keys()]), system);
  } finally {
    system.rmSync(stage, { recursive: true, force: true });
  }
  for (const name of earlier.filter((name) => !files.has(name))) {
    system.rmSync(join(path, name), { force: true });
  }
  flushFolder(path, system);
}

/** Renames file after file; when one fails, puts back those already moved. */
function moveIntoPlace(stage: string, path: string, names: readonly string[], system: FileSystem): void {
  const moved: string[] = [];
  try {
    for (const name of names) {
      system.renameSync(join(stage, name), join(path, name));
      moved.push(name);
    }
  } catch (cause) {
    for (const name of moved) {
      const backup = join(stage, `earlier-${name}`);
      if (system.existsSync(backup)) {
        system.renameSync(backup, join(path, name));
      } else {
        system.rmSync(join(path, name), { force: true });
      }
    }
    throw cause;
  }
}

function manifestLast(names: readonly string[]): string[] {
  return [
    ...names.filter((name) => name !== MANIFEST_NAME),
    ...names.filter((name) => name === MANIFEST_NAME),
  ];
}

/** Names of the data files the earlier manifest lists; plain names only, whatever it says. */
function earlierFiles(path: string, system: FileSystem): string[] {
  const manifest = join(path, MANIFEST_NAME);
  if (!system.existsSync(manifest)) {
    return [];
  }
  const names = Object.keys(parseManifest(system.readFileSync(manifest, 'utf8')).files);
  return names.filter((name) => /^[\w-]+\.arrow$/.test(name));
}

function writeStage(stage: string, files: ReadonlyMap<string, Uint8Array>, system: FileSystem): void {
  system.rmSync(stage, { recursive: true, force: true });
  system.mkdirSync(stage);
  for (const [name, content] of files) {
    const file = system.openSync(join(stage, name), 'wx');
    try {
      system.writeFileSync(file, content);
      system.fsyncSync(file);
    } finally {
      system.closeSync(file);
    }
  }
  flushFolder(stage, system);
}

function removeMadeFolders(deepest: string, firstMade: string | undefined, system: FileSystem): void {
  if (firstMade === undefined) {
    return;
  }
  try {
    for (let path = deepest; ; path = dirname(path)) {
      system.rmdirSync(path);
      if (path === resolve(firstMade)) {
        return;
      }
    }
  } catch {
    // Somebody put something there meanwhile: it stays.
  }
}

/** What the system says about a folder, as an error of the program. */
export function asFolderError(folder: string, cause: unknown): ThicksetError {
  if (cause instanceof ThicksetError) {
    return cause;
  }
  const code = (cause as NodeJS.ErrnoException).code;
  return code === 'ENOSPC' || code === 'EDQUOT' || code === 'EFBIG'
    ? errors.diskFull(folder, cause)
    : errors.outputNotWritable(folder, cause);
}
