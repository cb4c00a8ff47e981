import { spawn } from 'node:child_process';
import * as fs from 'node:fs';
import { hostname, tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { isLocked, LOCK_NAME, lockFolder } from '../../cli/checkpoint/folder-lock.js';

let folder: string;
const lockPath = () => join(folder, LOCK_NAME);
const entries = () => fs.readdirSync(folder);

beforeEach(() => {
  folder = fs.mkdtempSync(join(tmpdir(), 'thickset-lock-'));
});
afterEach(() => fs.rmSync(folder, { recursive: true }));

/** A lock as this process would make it, with some facts changed. */
function leaveLock(change: Readonly<Record<string, unknown>>): void {
  const lock = lockFolder(folder);
  const own = JSON.parse(fs.readFileSync(lockPath(), 'utf8')) as object;
  lock.release();
  fs.writeFileSync(lockPath(), JSON.stringify({ ...own, ...change }));
}

test('a lock is there until it is released, and nothing is left of it then', () => {
  const lock = lockFolder(folder);
  expect(entries()).toEqual([LOCK_NAME]);
  expect(isLocked(folder)).toBe(true);
  expect(() => lockFolder(folder)).toThrow(`in use by process ${process.pid}`);
  lock.release();
  expect(entries()).toEqual([]);
  expect(isLocked(folder)).toBe(false);
});

test('a lock that was taken over is not removed by its earlier holder', () => {
  const lock = lockFolder(folder);
  fs.writeFileSync(lockPath(), JSON.stringify({ pid: 1, host: 'elsewhere' }));
  lock.release();
  expect(entries()).toEqual([LOCK_NAME]);
});

describe('a lock is taken over at once', () => {
  test.runIf(process.platform === 'linux').each([
    ['whose process id belongs to a younger process now', { started: '1' }],
    ['from before the machine was started', { boot: 'another-boot' }],
    ['whose process is gone', { pid: 4_194_303 }],
  ])('%s', (_, change) => {
    leaveLock(change);
    expect(isLocked(folder)).toBe(false);
    lockFolder(folder).release();
    expect(entries()).toEqual([]);
  });

  test('that makes no sense', () => {
    fs.writeFileSync(lockPath(), '{"pid":');
    lockFolder(folder).release();
    expect(entries()).toEqual([]);
  });
});

describe('a lock of another machine', () => {
  test('is respected while it is renewed', () => {
    leaveLock({ host: 'elsewhere', pid: 4_194_303 });
    expect(() => lockFolder(folder)).toThrow('process 4194303 on elsewhere since');
  });

  test('is taken over after ten minutes without a sign of life', () => {
    leaveLock({ host: 'elsewhere' });
    const old = new Date(Date.now() - 11 * 60_000);
    fs.utimesSync(lockPath(), old, old);
    lockFolder(folder).release();
    expect(entries()).toEqual([]);
    expect(hostname()).not.toBe('elsewhere');
  });
});

test('of many processes that find a dead lock, one gets it', async () => {
  leaveLock({ pid: 4_194_303, boot: 'another-boot' });
  const door = resolve('dist/cli/checkpoint/folder-lock.js');
  const script = `
    const { lockFolder } = await import(${JSON.stringify(door)});
    try { lockFolder(${JSON.stringify(folder)}); console.log('held'); } catch (error) { console.log(error.code); }
    process.stdin.resume();
    process.stdin.on('end', () => process.exit());`;
  const children = Array.from({ length: 6 }, () =>
    spawn(process.execPath, ['--input-type=module', '-e', script], { stdio: ['pipe', 'pipe', 'inherit'] }),
  );
  const told = await Promise.all(
    children.map(
      (child) => new Promise<string>((done) => child.stdout.on('data', (word) => done(String(word).trim()))),
    ),
  );
  const ends = children.map((child) => new Promise((done) => child.on('close', done)));
  children.forEach((child) => child.stdin.end());
  await Promise.all(ends);
  expect(told.sort()).toEqual([...Array<string>(5).fill('folder_in_use'), 'held']);
});
