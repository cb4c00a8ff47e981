/** What a sweep varies: each parameter with its place in the setup and its values. */
import { complaints, type Path } from '../errors.js';
import type { ProblemList } from '../setup/problem-list.js';
import type { Partially } from '../setup/read-keys.js';
import { showNumber } from '../show.js';
import { latinShares } from './hypercube.js';
import { parsePath, resolvePath } from './parameter-path.js';
import { MAX_POINTS, type RangeKeys, type SweepKeys } from './sweep-schema.js';
import { canonicalText, measureOf, valueInRange, type RangeEnds } from './values.js';

export type Combination = 'grid' | 'zip' | 'samples';

export interface Parameter {
  /** The path as the sweep file has it. */
  readonly name: string;
  readonly path: Path;
  readonly values: readonly unknown[];
  /** Where a value stands in the sweep file. */
  readonly placeOf: (index: number) => Path;
}

type VaryKeys = Partially<SweepKeys['vary']>;
type Values = NonNullable<VaryKeys[string]>;

/** What the values of all parameters depend on. */
interface Sampling {
  readonly combine: Combination;
  readonly samples: number;
  readonly seed: string;
}

/** The parameters; those with something wrong are reported and left out. */
export function makeParameters(
  vary: VaryKeys,
  base: unknown,
  sampling: Sampling,
  problems: ProblemList,
): Parameter[] {
  const names = Object.keys(vary);
  if (names.length === 0) problems.add(['vary'], complaints.count(1, Infinity, 0));
  const parameters = names.flatMap((name) => {
    const path = placeInSetup(name, base, problems);
    const values = vary[name] === undefined ? null : makeValues(name, vary[name], sampling, problems);
    if (path === null || values === null) return [];
    const isList = Array.isArray(vary[name]);
    const placeOf = (index: number) => (isList ? ['vary', name, index] : ['vary', name]);
    return [{ name, path, values, placeOf }];
  });
  reportNested(parameters, problems);
  return parameters;
}

function placeInSetup(name: string, base: unknown, problems: ProblemList): Path | null {
  const steps = parsePath(name);
  if (steps === null) {
    problems.addKey(['vary', name], complaints.noPath());
    return null;
  }
  if (base === undefined) return null;
  const path = resolvePath(base, steps);
  if (Array.isArray(path)) return path as Path;
  problems.addKey(['vary', name], path as Exclude<typeof path, Path>);
  return null;
}

function makeValues(
  name: string,
  given: Values,
  { combine, samples, seed }: Sampling,
  problems: ProblemList,
): readonly unknown[] | null {
  if (Array.isArray(given)) {
    const values = given as readonly unknown[];
    if (values.length === 0 || (combine === 'grid' && !allDifferent(name, values, problems))) return null;
    if (combine !== 'samples') return values;
    return latinShares(samples, seed, name).map((share) => values[Math.floor(share * values.length)]);
  }
  const { count } = given as Partially<RangeKeys>;
  const range = makeRange(name, given as Partially<RangeKeys>, problems);
  if (combine === 'samples') {
    if (count !== undefined) {
      const rule = 'does not go with samples, which says how many values there are';
      problems.addKey(['vary', name, 'count'], complaints.contradiction(rule, 'remove it'));
    }
    return range && latinShares(samples, seed, name).map((share) => valueInRange(range, share));
  }
  if (count === undefined) {
    if (!('count' in given))
      problems.add(['vary', name, 'count'], complaints.missingKey('add it, as in count: 10'));
    return null;
  }
  return (
    range && Array.from({ length: count }, (_, i) => valueInRange(range, count === 1 ? 0 : i / (count - 1)))
  );
}

function allDifferent(name: string, values: readonly unknown[], problems: ProblemList): boolean {
  const first = new Map<string, number>();
  let fine = true;
  values.forEach((value, index) => {
    const text = canonicalText(value);
    const earlier = first.get(text);
    if (earlier === undefined) first.set(text, index);
    else {
      problems.add(['vary', name, index], complaints.repeated(text, ['vary', name, earlier]));
      fine = false;
    }
  });
  return fine;
}

function makeRange(name: string, keys: Partially<RangeKeys>, problems: ProblemList): RangeEnds | null {
  if (!('from' in keys) || !('to' in keys)) return null;
  const [from, to] = [measureOf(keys.from), measureOf(keys.to)];
  for (const key of ['from', 'to'] as const) {
    if (measureOf(keys[key]) === null) problems.add(['vary', name, key], complaints.noMeasure(), keys[key]);
  }
  if (from === null || to === null) return null;
  const path = ['vary', name, 'to'];
  if (from.unit !== to.unit) {
    problems.add(path, complaints.order(`must be of the same kind as from, ${String(keys.from)}`), keys.to);
    return null;
  }
  if (!(to.value > from.value)) {
    problems.add(
      path,
      complaints.order(`must be above from, ${showNumber(from.value)} ${from.unit}`.trim()),
      keys.to,
    );
    return null;
  }
  const spacing = keys.spacing ?? 'linear';
  if (spacing === 'log' && !(from.value > 0)) {
    const rule = 'must be above 0 where steps are equal ratios';
    problems.add(['vary', name, 'from'], complaints.order(rule, 'take spacing: linear'), keys.from);
    return null;
  }
  return { from, to, spacing };
}

/** A parameter inside another one would be overwritten by it, or not, by their order. */
function reportNested(parameters: readonly Parameter[], problems: ProblemList): void {
  for (const inner of parameters) {
    const outer = parameters.find(
      (other) => other !== inner && other.path.every((step, at) => inner.path[at] === step),
    );
    if (outer === undefined || (outer.path.length === inner.path.length && outer.name > inner.name)) continue;
    const rule = `lies in ${outer.name}, which is varied too`;
    problems.addKey(['vary', inner.name], complaints.contradiction(rule, 'vary one of them'));
  }
}

/** Points of all parameters together; 0 after a complaint. */
export function countPoints(
  parameters: readonly Parameter[],
  combine: Combination,
  problems: ProblemList,
): number {
  const lengths = parameters.map(({ values }) => values.length);
  if (combine === 'zip' && new Set(lengths).size > 1) {
    const told = parameters.map(({ name, values }) => `${name} has ${values.length}`).join(', ');
    problems.addKey(
      ['combine'],
      complaints.contradiction(`zip needs lists of equal length, but ${told}`, 'take combine: grid'),
    );
    return 0;
  }
  const points = combine === 'grid' ? lengths.reduce((all, length) => all * length, 1) : lengths[0];
  if (points <= MAX_POINTS) return points;
  problems.addKey(['vary'], complaints.tooManyPoints(points, MAX_POINTS));
  return 0;
}

/** Which value of each parameter a point has; in a grid the last parameter changes first. */
export function valueIndices(
  parameters: readonly Parameter[],
  combine: Combination,
  point: number,
): number[] {
  if (combine !== 'grid') return parameters.map(() => point);
  const indices: number[] = [];
  let rest = point;
  for (let at = parameters.length - 1; at >= 0; at--) {
    const { length } = parameters[at].values;
    indices[at] = rest % length;
    rest = Math.floor(rest / length);
  }
  return indices;
}
