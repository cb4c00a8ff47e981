/** The setup that a sweep varies: inline, or from a file of its own. */
import { realpathSync } from 'node:fs';
import { dirname, resolve, sep } from 'node:path';
import { complaints, reason, type Complaint } from '../errors.js';
import { ProblemList } from '../setup/problem-list.js';
import { readYaml } from '../setup/yaml-source.js';
import { readSetupText } from '../setup-reader.js';

export interface BaseSetup {
  /** The setup as plain values. */
  readonly raw: unknown;
  /** Takes what is wrong with it; for an inline setup that of the sweep file. */
  readonly problems: ProblemList;
  /** Where its own places begin in `problems`. */
  readonly prefix: readonly string[];
  /** How messages call it, and where its spectrum files lie. */
  readonly fileName: string;
  readonly directory: string;
  /** The text of the file; null for an inline setup. */
  readonly text: string | null;
}

/**
 * The base of a sweep; null after a complaint.
 *
 * @param given a file name or the setup itself
 * @throws SetupError when the file cannot be read or is no YAML
 */
export function readBase(given: unknown, sweepPath: string, problems: ProblemList): BaseSetup | null {
  const directory = dirname(sweepPath);
  if (typeof given === 'object' && given !== null && !Array.isArray(given)) {
    return { raw: given, problems, prefix: ['base'], fileName: sweepPath, directory, text: null };
  }
  if (typeof given !== 'string' || given.trim() === '') {
    problems.add(['base'], complaints.wrongType('the name of a setup file, or a setup'), given);
    return null;
  }
  const path = pathInside(given, directory);
  if (typeof path !== 'string') {
    problems.add(['base'], path, given);
    return null;
  }
  const text = readSetupText(path);
  const own = new ProblemList(path);
  const raw = readYaml(text, own);
  own.throwIfAny();
  return { raw: raw ?? {}, problems: own, prefix: [], fileName: path, directory: dirname(path), text };
}

/** The path of a file that lies in the folder or below it, not even by symbolic links outside. */
function pathInside(name: string, directory: string): string | Complaint {
  try {
    const root = realpathSync(directory);
    const inside = (path: string) => path.startsWith(root.endsWith(sep) ? root : root + sep);
    // Asked before the file system is, so that an error cannot tell what exists elsewhere.
    if (!inside(resolve(root, name)) || !inside(realpathSync(resolve(root, name)))) {
      return complaints.fileOutsideSweep();
    }
    return directory === '.' ? name : `${directory}${sep}${name}`;
  } catch (cause) {
    const missing = (cause as NodeJS.ErrnoException).code === 'ENOENT';
    return missing ? complaints.fileMissing(name) : complaints.fileUnreadable(name, reason(cause));
  }
}
