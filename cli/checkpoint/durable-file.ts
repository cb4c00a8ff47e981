/** Single files that are either the old one or the new one, whole, whenever the power goes. */
import * as nodeFs from 'node:fs';
import { mkdirSync } from 'node:fs';
import { basename, dirname, join } from 'node:path';

/** Files and folders on their way to their final name, and what is left of them after a power cut. */
export const PARTIAL_PREFIX = '.partial-';

/** The calls used here; tests hand in their own to make them fail. */
export type DiskCalls = Pick<
  typeof nodeFs,
  | 'closeSync'
  | 'fstatSync'
  | 'fsyncSync'
  | 'ftruncateSync'
  | 'openSync'
  | 'readFileSync'
  | 'renameSync'
  | 'rmSync'
  | 'writeSync'
>;

export const disk: DiskCalls = nodeFs;

/** Writes all bytes from a place of the file on; the system may take them in several pieces. */
export function writeAll(file: number, bytes: Uint8Array, system: DiskCalls = disk, from = 0): void {
  for (let at = 0; at < bytes.length;) {
    at += system.writeSync(file, bytes, at, bytes.length - at, from + at);
  }
}

/**
 * Replaces a file: written under a temporary name, flushed, renamed.
 *
 * @param previous keeps the earlier file under this path
 */
export function replaceFile(
  path: string,
  bytes: Uint8Array,
  { previous = null, system = disk }: { previous?: string | null; system?: DiskCalls } = {},
): void {
  const partial = join(dirname(path), `${PARTIAL_PREFIX}${basename(path)}`);
  try {
    const file = system.openSync(partial, 'w');
    try {
      writeAll(file, bytes, system);
      system.fsyncSync(file);
    } finally {
      system.closeSync(file);
    }
    if (previous !== null) renameIfThere(path, previous, system);
    system.renameSync(partial, path);
  } catch (cause) {
    system.rmSync(partial, { force: true });
    throw cause;
  }
  flushFolder(dirname(path), system);
}

function renameIfThere(from: string, to: string, system: DiskCalls): void {
  try {
    system.renameSync(from, to);
  } catch (cause) {
    if (codeOf(cause) !== 'ENOENT') throw cause;
  }
}

/** Makes renames last through a power cut. Windows cannot open folders; it keeps its own journal for them. */
export function flushFolder(
  path: string,
  system: Pick<DiskCalls, 'closeSync' | 'fsyncSync' | 'openSync'> = disk,
): void {
  if (process.platform === 'win32') return;
  const folder = system.openSync(path, 'r');
  try {
    system.fsyncSync(folder);
  } finally {
    system.closeSync(folder);
  }
}

/** The bytes of a file, null where there is none. */
export function readIfThere(path: string, system: Pick<DiskCalls, 'readFileSync'> = disk): Buffer | null {
  try {
    return system.readFileSync(path);
  } catch (cause) {
    if (codeOf(cause) === 'ENOENT' || codeOf(cause) === 'ENOTDIR') return null;
    throw cause;
  }
}

/** The system's code of a failed call, as in ENOSPC. */
export function codeOf(cause: unknown): string | undefined {
  return (cause as NodeJS.ErrnoException).code;
}

/**
 * Makes a folder and those above it; gives back the topmost one made. (The system's own recursive call never returns
 * where folders cannot be made although their parent is there, as in /proc.)
 */
export function makeFolders(path: string): string | undefined {
  try {
    mkdirSync(path);
    return path;
  } catch (cause) {
    if (codeOf(cause) === 'EEXIST') return undefined;
    if (codeOf(cause) !== 'ENOENT' || dirname(path) === path) throw cause;
  }
  const above = makeFolders(dirname(path));
  mkdirSync(path);
  return above ?? path;
}
