/** Checks every point of a sweep as a setup, and tells each problem once, at the place it comes from. */
import type { Setup, Warning } from '../../engine/index.js';
import { Complaint, complaints, SetupError, ThicksetError, type Path, type Problem } from '../errors.js';
import type { ProblemList } from '../setup/problem-list.js';
import { canonicalText } from './values.js';
import type { Sweep } from './sweep.js';

/** Different problems after which the rest is not looked for. */
const MOST_PROBLEMS = 100;

interface Found {
  readonly problem: Problem;
  /** Place in the sweep file; null where it belongs to the base. */
  readonly place: Path | null;
  readonly points: number[];
}

/**
 * @returns the warnings of all points together
 * @throws SetupError, or ThicksetError setup where both the sweep file and its base file have problems
 */
export function checkPoints(sweep: Sweep, problems: ProblemList): Warning[] {
  const found = new Map<string, Found>();
  const warnings = new Map<string, Warning>();
  reportSamePoints(sweep, problems);
  for (let point = 0; point < sweep.points && found.size < MOST_PROBLEMS; point++) {
    for (const problem of problemsOf(sweep, point, warnings)) {
      const place = varyPlace(sweep, point, problem);
      const key = JSON.stringify([place, problem.path, problem.rule, problem.got]);
      const known = found.get(key);
      if (known) known.points.push(point);
      else found.set(key, { problem, place, points: [point] });
    }
  }
  const { base } = sweep;
  for (const { problem, place, points } of found.values()) {
    const everywhere = points.length === sweep.points;
    const where = place !== null || everywhere ? '' : ` (in ${pointWords(points)})`;
    const complaint = new Complaint(problem.code, `${problem.rule}${where}`, problem.wayOut);
    if (place !== null && problem.code === 'unknown_key') problems.addKey(place, complaint);
    else if (place !== null) problems.add(place, complaint, problem.got ?? undefined);
    else base.problems.add([...base.prefix, ...problem.path], complaint, problem.got ?? undefined);
  }
  throwTogether(problems, base.problems);
  return [...warnings.values()];
}

function pointWords([first, ...more]: readonly number[]): string {
  return more.length === 0 ? `point ${first + 1}` : `point ${first + 1} and ${more.length} more`;
}

function problemsOf(sweep: Sweep, point: number, warnings: Map<string, Warning>): readonly Problem[] {
  try {
    const checked = sweep.setupOf(point);
    for (const warning of checked.warnings) addWarning(warnings, warning);
    return [...forbidden(checked.setup)];
  } catch (cause) {
    if (cause instanceof SetupError) return cause.problems;
    throw cause;
  }
}

/** Warnings of one code are told once, with how often they came up. */
export function addWarning(warnings: Map<string, Warning>, warning: Warning): void {
  const count = (warnings.get(warning.code)?.count ?? 0) + warning.count;
  warnings.set(warning.code, { ...warning, count });
}

/** What a run may have and the points of a sweep may not. */
function* forbidden({ energyGridKeV }: Setup): Generator<Problem> {
  if (!energyGridKeV) return;
  const { code, rule, wayOut } = complaints.energiesInSweep();
  yield { code, path: ['source', 'energies'], rule, wayOut, got: null, place: null };
}

/** Where the value that a problem is about stands in the sweep file; null where it does not come from there. */
function varyPlace(sweep: Sweep, point: number, { code, path }: Problem): Path | null {
  const indices = sweep.indicesOf(point);
  const at = sweep.parameters.findIndex((parameter) => parameter.path.every((step, i) => path[i] === step));
  if (at >= 0) {
    const { name, path: own, placeOf } = sweep.parameters[at];
    return code === 'unknown_key' && own.length === path.length ? ['vary', name] : placeOf(indices[at]);
  }
  const fromPrecision = path[0] === 'run' && path[1] === 'until' && sweep.precision?.quantity;
  return fromPrecision ? ['precision', ...path.slice(2)] : null;
}

/** The same point twice would be two equal rows; a grid has none, for its lists have none. */
function reportSamePoints(sweep: Sweep, problems: ProblemList): void {
  if (sweep.combine !== 'zip') return;
  const first = new Map<string, number>();
  for (let point = 0; point < sweep.points; point++) {
    const key = sweep.parameters.map(({ values }) => canonicalText(values[point])).join(';');
    const earlier = first.get(key);
    if (earlier === undefined) first.set(key, point);
    else problems.add(sweep.parameters[0].placeOf(point), complaints.samePoint(earlier + 1, point + 1));
  }
}

function throwTogether(sweep: ProblemList, base: ProblemList): void {
  const errors = [sweep, ...(base === sweep ? [] : [base])].flatMap((list) => {
    try {
      list.throwIfAny();
      return [];
    } catch (cause) {
      return [cause as SetupError];
    }
  });
  if (errors.length === 1) throw errors[0];
  if (errors.length > 1) throw new ThicksetError('setup', errors.map((error) => error.format()).join('\n'));
}
