/**
 * One process at a time works in an output folder. The lock file names its holder by process id, start time and boot,
 * so that on one machine a holder that was killed is told from a living one at once, even when its id was given to
 * another process since. Of a holder on another machine (a shared disk) only the age of its last sign of life is known.
 */
import * as fs from 'node:fs';
import { hostname } from 'node:os';
import { join } from 'node:path';
import { errors } from '../errors.js';
import { codeOf } from './durable-file.js';

/** All names in a folder that belong to its lock begin with this. */
export const LOCK_NAME = '.lock';
const GUARD_NAME = '.lock-takeover';

/** Holders on other machines renew their lock every half minute; this much silence means that one is gone. */
const SILENCE_MS = 10 * 60_000;
/** A takeover takes a few system calls; one that is older was cut short. */
const GUARD_MS = 10_000;
const ATTEMPTS = 100;
const PAUSE_MS = 50;

interface Holder {
  readonly pid: number;
  /** Clock ticks after boot at which the process began; null where the system does not say. */
  readonly started: string | null;
  readonly boot: string | null;
  readonly host: string;
  readonly since: string;
}

export interface FolderLock {
  /** A sign of life, for processes on other machines. */
  readonly renew: () => void;
  readonly release: () => void;
}

/**
 * Takes the lock of a folder, which must exist.
 *
 * @throws ThicksetError folder_in_use; system errors when the folder cannot be written
 */
export function lockFolder(folder: string): FolderLock {
  const path = join(folder, LOCK_NAME);
  const own = JSON.stringify(describeSelf());
  for (let attempt = 0; attempt < ATTEMPTS; attempt++) {
    if (create(path, own)) return makeLock(path, own);
    const text = read(path);
    if (text !== null && isHeld(text, path)) throw inUse(folder, parseHolder(text)!);
    takeOver(folder, path);
  }
  throw errors.folderInUse(folder, 'another process', 'wait for it to end');
}

/** Whether a living process works in a folder. */
export function isLocked(folder: string): boolean {
  const path = join(folder, LOCK_NAME);
  const text = read(path);
  return text !== null && isHeld(text, path);
}

function makeLock(path: string, own: string): FolderLock {
  return {
    renew: () => fs.utimesSync(path, new Date(), new Date()),
    release: () => {
      if (read(path) === own) fs.rmSync(path, { force: true });
    },
  };
}

/** Creates the lock with its content in one step; false where there is one. */
function create(path: string, content: string): boolean {
  const own = `${path}-${hostname()}-${process.pid}`;
  try {
    fs.writeFileSync(own, content);
    fs.linkSync(own, path);
    return true;
  } catch (cause) {
    if (codeOf(cause) === 'EEXIST') return false;
    throw cause;
  } finally {
    fs.rmSync(own, { force: true });
  }
}

/** Removes a lock whose holder is dead; the guard keeps two processes from removing each other's new lock. */
function takeOver(folder: string, path: string): void {
  const guard = join(folder, GUARD_NAME);
  try {
    fs.mkdirSync(guard);
  } catch (cause) {
    if (codeOf(cause) !== 'EEXIST') throw cause;
    if (ageMs(guard) > GUARD_MS) fs.rmdirSync(guard);
    else Atomics.wait(new Int32Array(new SharedArrayBuffer(4)), 0, 0, PAUSE_MS);
    return;
  }
  try {
    // A lock that still stands after its holder was found dead can be removed by the holder of the guard alone.
    const text = read(path);
    if (text !== null && !isHeld(text, path) && read(path) === text) fs.rmSync(path);
  } finally {
    fs.rmdirSync(guard);
  }
}

function inUse(folder: string, { pid, host, since }: Holder) {
  if (host === hostname())
    return errors.folderInUse(folder, `process ${pid} since ${since}`, 'wait for it to end');
  return errors.folderInUse(
    folder,
    `process ${pid} on ${host} since ${since}`,
    `wait for it to end; if it is gone, delete ${join(folder, LOCK_NAME)}`,
  );
}

function describeSelf(): Holder {
  return {
    pid: process.pid,
    started: startOf(process.pid),
    boot: bootId(),
    host: hostname(),
    since: new Date().toISOString(),
  };
}

/** A lock that makes no sense is held by nobody: locks are made with their whole content in one step. */
function isHeld(text: string, path: string): boolean {
  const holder = parseHolder(text);
  return holder !== null && isAlive(holder, path);
}

function isAlive(holder: Holder, path: string): boolean {
  if (holder.host !== hostname()) return ageMs(path) < SILENCE_MS;
  if (holder.boot !== bootId()) return false;
  if (holder.started !== null) return startOf(holder.pid) === holder.started;
  try {
    process.kill(holder.pid, 0);
    return true;
  } catch (cause) {
    return codeOf(cause) === 'EPERM';
  }
}

/** Field 22 of /proc/PID/stat; the second field may hold anything, up to its last bracket. Zombies are dead. */
function startOf(pid: number): string | null {
  const stat = read(`/proc/${pid}/stat`);
  const fields = stat?.slice(stat.lastIndexOf(')') + 2).split(' ');
  return fields === undefined || fields[0] === 'Z' ? null : fields[19];
}

function bootId(): string | null {
  return read('/proc/sys/kernel/random/boot_id')?.trim() ?? null;
}

function parseHolder(text: string): Holder | null {
  try {
    const holder = JSON.parse(text) as Holder | null;
    return typeof holder?.pid === 'number' ? holder : null;
  } catch {
    return null;
  }
}

function read(path: string): string | null {
  try {
    return fs.readFileSync(path, 'utf8');
  } catch {
    return null;
  }
}

function ageMs(path: string): number {
  try {
    return Date.now() - fs.statSync(path).mtimeMs;
  } catch {
    return 0;
  }
}
