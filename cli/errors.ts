/**
 * Every error a user can meet: one closed vocabulary, its classes and the exit codes. The words are made here and
 * nowhere else, so that they can be read in one sitting and one error is never said in two ways.
 *
 * A line reads `file: path: rule, got value (line, column); way out`.
 */
// Not through the door: that would load every table of materials with every command, a fifth of the time of a summary.
import { nearestWord } from '../materials/nearest.js';
import { clip, listOr, rounded, show, showNumber } from './show.js';

/** How the program ends; `--help` lists the meanings. */
export const EXIT_CODES = {
  ok: 0,
  internal: 1,
  usage: 2,
  setup: 3,
  files: 4,
  run: 5,
  incomplete: 6,
  interrupted: 7,
  killed: 130,
} as const;

export type ExitName = keyof typeof EXIT_CODES;
export type ExitCode = (typeof EXIT_CODES)[ExitName];

export const EXIT_MEANINGS: Readonly<Record<ExitName, string>> = {
  ok: 'done',
  internal: 'a fault of the program itself',
  usage: 'the command line cannot be understood',
  setup: 'the setup file has problems',
  files: 'a file or folder cannot be read or written',
  run: 'the run failed',
  incomplete: 'finished, but part of the answer is missing or fails its check',
  interrupted: 'stopped by Ctrl-C; what was finished is written',
  killed: 'stopped by a second Ctrl-C, or before anything was finished; nothing is written',
};

/** Errors outside setup files, each with the exit code it leads to. */
const EXIT_OF = {
  usage: 'usage',
  output_exists: 'files',
  output_foreign: 'files',
  output_not_writable: 'files',
  disk_full: 'files',
  result_missing: 'files',
  result_damaged: 'files',
  folder_in_use: 'files',
  checkpoint_unfit: 'files',
  not_the_same: 'usage',
  shards_do_not_fit: 'files',
  scheduler: 'run',
  unknown_material: 'usage',
  unknown_nuclide: 'usage',
  not_supported: 'run',
  worker_died: 'run',
  balance_violated: 'run',
  internal: 'internal',
} as const satisfies Record<string, ExitName>;

export type ErrorCode = keyof typeof EXIT_OF | 'setup';

/** An error with words meant for the user: what is wrong, and the way out where there is one. */
export class ThicksetError extends Error {
  readonly code: ErrorCode;
  readonly wayOut: string | null;

  constructor(code: ErrorCode, message: string, wayOut: string | null = null, cause?: unknown) {
    super(message, cause === undefined ? undefined : { cause });
    this.name = 'ThicksetError';
    this.code = code;
    this.wayOut = wayOut;
  }

  get exitCode(): ExitCode {
    return EXIT_CODES[this.code === 'setup' ? 'setup' : EXIT_OF[this.code]];
  }

  /** The lines to print, without a final line break. */
  format(): string {
    return this.wayOut === null ? this.message : `${this.message}; ${this.wayOut}`;
  }
}

/** Makers of the errors outside setup files. */
export const errors = {
  usage: (message: string, wayOut: string | null = null) => new ThicksetError('usage', message, wayOut),
  outputExists: (directory: string) =>
    new ThicksetError(
      'output_exists',
      `${directory}: exists already`,
      'choose another folder with --out or replace it with --overwrite',
    ),
  outputUnfinished: (directory: string) =>
    new ThicksetError(
      'output_exists',
      `${directory}: holds an unfinished run`,
      'go on with --resume, replace it with --overwrite, or choose another folder with --out',
    ),
  sweepExists: (directory: string) =>
    new ThicksetError(
      'output_exists',
      `${directory}: holds a sweep already`,
      'go on with --resume, replace it with --overwrite, or choose another folder with --out',
    ),
  outputForeign: (path: string, what: string) =>
    new ThicksetError('output_foreign', `${path}: ${what}`, 'choose another folder with --out'),
  outputNotWritable: (path: string, cause: unknown) =>
    new ThicksetError(
      'output_not_writable',
      `${path}: cannot be written (${reason(cause)})`,
      'choose another folder with --out',
      cause,
    ),
  diskFull: (path: string, cause: unknown) =>
    new ThicksetError('disk_full', `${path}: no space left`, 'free some space and run again', cause),
  resultMissing: (path: string) =>
    new ThicksetError(
      'result_missing',
      `${path}: no results here`,
      'name a folder written by thickset run or thickset sweep',
    ),
  isShard: (path: string) =>
    new ThicksetError(
      'result_missing',
      `${path}: a shard of a run has no figures of its own`,
      'put all shards together with thickset merge',
    ),
  resultDamaged: (path: string, what: string, cause?: unknown) =>
    new ThicksetError('result_damaged', `${path}: damaged, ${what}`, 'run the setup again', cause),
  journalDamaged: (path: string) =>
    new ThicksetError(
      'result_damaged',
      `${path}: damaged, its beginning is not that of a sweep`,
      'start anew with --overwrite, or in another folder',
    ),
  folderInUse: (folder: string, holder: string, wayOut: string) =>
    new ThicksetError('folder_in_use', `${folder}: in use by ${holder}`, wayOut),
  checkpointUnfit: (what: string, cause?: unknown) =>
    new ThicksetError('checkpoint_unfit', `saved state: ${what}`, 'start anew in another folder', cause),
  /** `changes` says what was and what is. */
  notTheSame: (folder: string, what: string, changes: readonly string[]) =>
    new ThicksetError(
      'not_the_same',
      `${folder}: holds another ${what}: ${changes.join('; ')}`,
      'undo the change, or choose another folder with --out',
    ),
  shardsDoNotFit: (what: string, wayOut: string | null = null) =>
    new ThicksetError('shards_do_not_fit', what, wayOut),
  scheduler: (what: string, wayOut: string | null = null, cause?: unknown) =>
    new ThicksetError('scheduler', what, wayOut, cause),
  unknownMaterial: (name: string, nearest: string | null) =>
    new ThicksetError('unknown_material', `unknown material ${show(name)}`, didYouMean(nearest)),
  unknownNuclide: (name: string, nearest: string | null) =>
    new ThicksetError('unknown_nuclide', `unknown nuclide ${show(name)}`, didYouMean(nearest)),
  notSupported: (what: string, wayOut: string | null = null) =>
    new ThicksetError('not_supported', what, wayOut),
  workerDied: (what: string, cause?: unknown) =>
    new ThicksetError(
      'worker_died',
      `a worker thread died: ${what}`,
      'run again, with fewer --threads',
      cause,
    ),
  balanceViolated: (relativeError: number) =>
    new ThicksetError(
      'balance_violated',
      `energy in and energy out differ by ${relativeError} of the whole; the figures cannot be trusted`,
      'report this setup as a fault of the program',
    ),
  internal: (cause: unknown) =>
    new ThicksetError('internal', `fault of the program: ${reason(cause)}`, 'report it', cause),
} as const;

/** What a system or library error says, on one line. */
export function reason(cause: unknown): string {
  return clip(cause instanceof Error ? cause.message : String(cause), 200);
}

/** Keys and indices from the top of the setup. */
export type Path = readonly (string | number)[];

/** `stack[2].thickness`; a key with unusual characters is put in brackets and quotes. */
export function formatPath(path: Path): string {
  let text = '';
  for (const step of path) {
    if (typeof step === 'number') text += `[${step}]`;
    else if (!/^[\w-]+$/.test(step)) text += `[${show(step)}]`;
    else text += text === '' ? step : `.${step}`;
  }
  return text;
}

/** Where something stands in its file, counted from 1. */
export interface Place {
  readonly line: number;
  readonly column: number;
}

export type ProblemCode =
  | 'file_missing'
  | 'file_unreadable'
  | 'file_outside'
  | 'too_large'
  | 'not_yaml'
  | 'forbidden_yaml'
  | 'forbidden_key'
  | 'duplicate_key'
  | 'wrong_type'
  | 'unknown_key'
  | 'missing_key'
  | 'choose_one'
  | 'count'
  | 'bad_text'
  | 'missing_unit'
  | 'unknown_unit'
  | 'not_a_quantity'
  | 'not_a_number'
  | 'not_finite'
  | 'out_of_range'
  | 'unknown_name'
  | 'duplicate_name'
  | 'bad_material'
  | 'bad_spectrum_file'
  | 'order'
  | 'contradiction'
  | 'not_available';

/** A rule that a value breaks. */
export class Complaint {
  readonly code: ProblemCode;
  /** What must hold, as the middle of a sentence. */
  readonly rule: string;
  readonly wayOut: string | null;
  /** False where the value adds nothing to the rule. */
  readonly showsValue: boolean;

  constructor(code: ProblemCode, rule: string, wayOut: string | null = null, showsValue = true) {
    this.code = code;
    this.rule = rule;
    this.wayOut = wayOut;
    this.showsValue = showsValue;
  }
}

/** Makers of everything that can be wrong in a setup file. */
export const complaints = {
  fileMissing: (file: string) =>
    new Complaint('file_missing', `file ${show(file)} does not exist`, null, false),
  fileUnreadable: (file: string, why: string) =>
    new Complaint('file_unreadable', `file ${show(file)} cannot be read, ${why}`, null, false),
  setupMissing: () => new Complaint('file_missing', 'does not exist', null, false),
  setupUnreadable: (why: string) => new Complaint('file_unreadable', `cannot be read, ${why}`, null, false),
  notAFile: () => new Complaint('file_unreadable', 'is not a file', null, false),
  fileOutside: () =>
    new Complaint(
      'file_outside',
      'must lie in the folder of the setup file or below it',
      'copy the file there and give its name alone',
    ),
  tooLarge: (limit: string) => new Complaint('too_large', `must not be larger than ${limit}`, null, false),
  emptyFile: () => new Complaint('missing_key', 'is empty', 'a setup needs at least source and stack', false),
  tooDeep: () => new Complaint('too_large', 'is nested too deeply for a setup', null, false),
  notYaml: (what: string, wayOut: string | null = null) =>
    new Complaint('not_yaml', `is not YAML: ${what}`, wayOut, false),
  forbiddenYaml: (what: string, wayOut: string) =>
    new Complaint('forbidden_yaml', `${what} not allowed in a setup file`, wayOut, false),
  forbiddenKey: (key: string) =>
    new Complaint('forbidden_key', `${show(key)} cannot be used as a name`, 'choose another one', false),
  badKey: () => new Complaint('wrong_type', 'every key must be a text', 'put the key in quotes', false),
  duplicateKey: (line: number) =>
    new Complaint('duplicate_key', `is given twice, first on line ${line}`, 'remove one of them', false),
  wrongType: (wanted: string, wayOut: string | null = null) =>
    new Complaint('wrong_type', `must be ${wanted}`, wayOut),
  unknownKey: (key: string, known: readonly string[], elsewhere: string | null = null) =>
    new Complaint('unknown_key', elsewhere ?? 'unknown key', nearestOrAll('keys', key, known), false),
  missingKey: (wayOut: string) => new Complaint('missing_key', 'is missing', wayOut, false),
  chooseOne: (keys: readonly string[], given: readonly string[]) =>
    given.length === 0
      ? new Complaint('choose_one', `needs one of ${listOr(keys)}`, null, false)
      : new Complaint(
          'choose_one',
          `takes only one of ${listOr(keys)}, but has ${given.join(' and ')}`,
          'keep one of them',
          false,
        ),
  count: (least: number, most: number, given: number) =>
    new Complaint(
      'count',
      given < least
        ? `needs ${entries(least)} or more, has ${given}`
        : `takes at most ${entries(most)}, has ${given}`,
      null,
      false,
    ),
  emptyText: () => new Complaint('bad_text', 'must not be empty', null, false),
  badText: (rule: string, wayOut: string | null = null) => new Complaint('bad_text', rule, wayOut),
  missingUnit: (units: readonly string[], example: string) =>
    new Complaint(
      'missing_unit',
      'needs a unit',
      `write one of ${units.join(', ')} behind it, as in "${example}"`,
    ),
  unknownUnit: (unit: string, units: readonly string[]) => {
    const nearest = nearestWord(unit, units);
    const meant = nearest === null ? '' : `did you mean ${nearest}? `;
    return new Complaint(
      'unknown_unit',
      `unknown unit ${show(unit)}`,
      `${meant}units here: ${units.join(', ')}`,
    );
  },
  notAQuantity: (units: readonly string[], example: string) =>
    new Complaint(
      'not_a_quantity',
      'must be a number and a unit',
      `write it as in "${example}"; units here: ${units.join(', ')}`,
    ),
  decimalComma: (corrected: string) =>
    new Complaint('not_a_quantity', 'must have a decimal point, not a comma', `write "${clip(corrected)}"`),
  widthForm: () =>
    new Complaint(
      'not_a_quantity',
      'must be a width at an energy, the coefficients a, b and c, or a list of widths',
      'write it as in "7 % at 661.7 keV"',
    ),
  notANumber: (what: string) => new Complaint('not_a_number', `must be ${what}`),
  notFinite: () => new Complaint('not_finite', 'must be a finite number'),
  outOfRange: (rule: string, wayOut: string | null = null) =>
    new Complaint('out_of_range', `must be ${rule}`, wayOut),
  unknownName: (what: string, name: string, nearest: string | null, wayOut: string | null = null) =>
    new Complaint('unknown_name', `unknown ${what} ${show(name)}`, didYouMean(nearest) ?? wayOut, false),
  unknownChoice: (what: string, name: string, known: readonly string[]) =>
    new Complaint('unknown_name', `unknown ${what} ${show(name)}`, nearestOrAll('known', name, known), false),
  repeated: (name: string, first: Path) =>
    new Complaint(
      'duplicate_name',
      `${show(name)} is given twice, first in ${formatPath(first)}`,
      'remove one of them',
      false,
    ),
  duplicateName: (name: string, first: Path) =>
    new Complaint(
      'duplicate_name',
      `the name ${show(name)} is taken by ${formatPath(first)}`,
      'give each its own name',
      false,
    ),
  badMaterial: (rule: string, nearest: string | null) =>
    new Complaint('bad_material', rule, didYouMean(nearest)),
  formulaWithoutDensity: (formula: string) =>
    new Complaint(
      'bad_material',
      `the formula ${show(formula)} needs a density`,
      'add density to the layer, or define the material under materials',
      false,
    ),
  badSpectrumFile: (file: string, line: number | null, rule: string, wayOut: string | null = null) =>
    new Complaint(
      'bad_spectrum_file',
      `${clip(file)}${line === null ? '' : ` line ${line}`}: ${rule}`,
      wayOut,
      false,
    ),
  order: (rule: string, wayOut: string | null = null) => new Complaint('order', rule, wayOut),
  contradiction: (rule: string, wayOut: string | null = null) =>
    new Complaint('contradiction', rule, wayOut, false),
  notAvailable: (rule: string, wayOut: string | null = null) =>
    new Complaint('not_available', rule, wayOut, false),
  fileOutsideSweep: () =>
    new Complaint(
      'file_outside',
      'must lie in the folder of the sweep file or below it',
      'copy the file there and give its name alone',
    ),
  emptySweep: () => new Complaint('missing_key', 'is empty', 'a sweep needs at least base and vary', false),
  samePoint: (first: number, second: number) =>
    new Complaint(
      'duplicate_name',
      `points ${first} and ${second} are the same`,
      'remove one of them',
      false,
    ),
  energiesInSweep: () =>
    new Complaint('contradiction', 'is a sweep of its own', 'give source.energy, and vary it', false),
  noPath: () =>
    new Complaint('bad_text', 'is no path into a setup', 'write it as in stack.shield.thickness', false),
  noWay: (why: string) =>
    new Complaint('unknown_name', `leads nowhere: ${why}`, 'give the place of a value in the setup', false),
  noMeasure: () =>
    new Complaint(
      'not_a_quantity',
      'must be a number, with its unit where it has one',
      'list other values one by one',
    ),
  tooManyPoints: (points: number, limit: number) =>
    new Complaint(
      'count',
      `asks for ${showNumber(points)} points, the limit is ${showNumber(limit)}`,
      'take fewer values, or samples',
      false,
    ),
  tooManyBins: (bins: number, limit: number) =>
    new Complaint(
      'count',
      `asks for ${showNumber(rounded(bins))} energy bins over all spectra, the limit is ${showNumber(limit)}`,
      'take wider bins',
      false,
    ),
} as const;

function entries(count: number): string {
  return count === 1 ? '1 entry' : `${count} entries`;
}

function nearestOrAll(label: string, word: string, known: readonly string[]): string {
  return didYouMean(nearestWord(word, known)) ?? `${label} here: ${known.join(', ')}`;
}

/** One thing wrong with a setup file. */
export interface Problem {
  readonly code: ProblemCode;
  readonly path: Path;
  readonly rule: string;
  /** The value as text; null where there is none. */
  readonly got: string | null;
  readonly place: Place | null;
  readonly wayOut: string | null;
}

const MOST_SHOWN = 50;

/** All problems of one setup file, in the order in which they stand there. */
export class SetupError extends ThicksetError {
  readonly fileName: string;
  readonly problems: readonly Problem[];

  constructor(fileName: string, problems: readonly Problem[]) {
    const sorted = [...problems].sort(
      (a, b) =>
        (a.place?.line ?? Infinity) - (b.place?.line ?? Infinity) ||
        (a.place?.column ?? Infinity) - (b.place?.column ?? Infinity) ||
        0,
    );
    super('setup', sorted.map((problem) => formatProblem(fileName, problem)).join('\n'));
    this.name = 'SetupError';
    this.fileName = fileName;
    this.problems = sorted;
  }

  override format(): string {
    const lines = this.problems.slice(0, MOST_SHOWN).map((problem) => formatProblem(this.fileName, problem));
    const more = this.problems.length - lines.length;
    if (more > 0) lines.push(`${this.fileName}: and ${more} more ${more === 1 ? 'problem' : 'problems'}`);
    return lines.join('\n');
  }
}

function formatProblem(fileName: string, { path, rule, got, place, wayOut }: Problem): string {
  const subject = path.length === 0 ? fileName : `${fileName}: ${formatPath(path)}`;
  const value = got === null ? '' : `, got ${got}`;
  const where = place === null ? '' : ` (line ${place.line}, column ${place.column})`;
  return `${subject}: ${rule}${value}${where}${wayOut === null ? '' : `; ${wayOut}`}`;
}

function didYouMean(nearest: string | null): string | null {
  return nearest === null ? null : `did you mean ${nearest}?`;
}
