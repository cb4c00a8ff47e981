/** Edges of the energy bins, from 0 to above the highest energy a source can give. */
import { complaints } from '../errors.js';
import { showNumber } from '../show.js';
import type { SetupKeys } from '../setup-schema.js';
import { MAX_BINS } from './limits.js';
import type { ProblemList } from './problem-list.js';
import type { Partially } from './read-keys.js';
import { BIN_KEYS } from './schema-tally.js';

type BinKeys = Partially<NonNullable<NonNullable<SetupKeys['tally']>['energy_bins']>>;

const PATH = ['tally', 'energy_bins'];

/** Fine enough for X-rays, coarse enough for accelerators. */
function defaultWidthKeV(highestKeV: number): number {
  if (highestKeV < 100) return 0.1;
  return highestKeV <= 5000 ? 1 : 10;
}

/** What the bins depend on. */
export interface BinNeeds {
  readonly highestKeV: number;
  readonly cutoffKeV: number;
  /** Number of spectra that will have these bins. */
  readonly spectra: number;
}

/**
 * The edges in keV; the last is above `highestKeV`. Null if something is wrong, and has been reported.
 *
 * @param needs null while they are not known: only the keys among themselves are checked
 */
export function makeEnergyEdges(
  keys: BinKeys | undefined,
  needs: BinNeeds | null,
  problems: ProblemList,
): Float64Array | null {
  if (keys !== undefined && !keysFit(keys, problems)) return null;
  if (needs === null) return null;
  const { highestKeV, cutoffKeV, spectra } = needs;
  const limited = (bins: number, edges: () => Float64Array | null): Float64Array | null => {
    if (bins * spectra <= MAX_BINS) return edges();
    problems.add(PATH, complaints.tooManyBins(bins * spectra, MAX_BINS));
    return null;
  };
  if (keys === undefined) {
    const width = defaultWidthKeV(highestKeV);
    const bins = binsOfWidth(highestKeV, width);
    return limited(bins, () => uniformEdges(width, bins));
  }
  if (!topIsAbove(keys.to, highestKeV, problems)) return null;
  const { width, count, edges, to } = keys;
  if (width !== undefined) {
    const bins = Math.max(binsOfWidth(highestKeV, width), to === undefined ? 0 : Math.ceil(to / width));
    return limited(bins, () => uniformEdges(width, bins));
  }
  if (count !== undefined && keys.spacing === 'log') {
    return limited(count, () => logEdges(count, cutoffKeV, highestKeV, to, problems));
  }
  if (count !== undefined) return limited(count, () => linearEdges(count, highestKeV, to));
  return edges === undefined
    ? null
    : limited(edges.length - 1, () => listedEdges(edges, highestKeV, problems));
}

function topIsAbove(to: number | undefined, highestKeV: number, problems: ProblemList): boolean {
  if (to === undefined || to > highestKeV) return true;
  const rule = `must be above the highest source energy, ${showNumber(highestKeV)} keV`;
  problems.add([...PATH, 'to'], complaints.order(rule), `${to} keV`);
  return false;
}

function keysFit(keys: BinKeys, problems: ProblemList): boolean {
  const given = BIN_KEYS.filter((key) => key in keys);
  if (given.length !== 1) {
    problems.add(PATH, complaints.chooseOne(BIN_KEYS, given));
    return false;
  }
  if ('spacing' in keys && given[0] !== 'count') {
    problems.addKey([...PATH, 'spacing'], complaints.contradiction('applies to count only', 'remove it'));
  }
  if ('to' in keys && given[0] === 'edges') {
    const rule = 'applies to width and count only';
    problems.addKey([...PATH, 'to'], complaints.contradiction(rule, 'remove it'));
  }
  return true;
}

/** Enough bins for the last edge to lie above the highest energy, also after rounding. */
function binsOfWidth(highestKeV: number, width: number): number {
  const bins = Math.floor(highestKeV / width) + 1;
  return edgeAt(bins, width) > highestKeV ? bins : bins + 1;
}

/** Edge i; a width of 1/n keV is divided by n, which rounds once and keeps 0.3 keV from being 0.30000000000000004. */
function edgeAt(i: number, width: number): number {
  const inverse = Math.round(1 / width);
  return Math.abs(inverse * width - 1) < 1e-12 ? i / inverse : i * width;
}

/** Filled in a loop: ten times faster than `Float64Array.from`, which counts in sweeps of many setups. */
function makeEdges(bins: number, edge: (i: number) => number): Float64Array {
  const edges = new Float64Array(bins + 1);
  for (let i = 0; i <= bins; i++) edges[i] = edge(i);
  return edges;
}

function uniformEdges(width: number, bins: number): Float64Array {
  return makeEdges(bins, (i) => edgeAt(i, width));
}

/** Without an upper end, the highest source energy is the middle of the last bin. */
function linearEdges(count: number, highestKeV: number, to: number | undefined): Float64Array {
  const width = to === undefined ? highestKeV / (count - 0.5) : to / count;
  const edges = uniformEdges(width, count);
  if (to !== undefined) edges[count] = to;
  return edges;
}

/** One bin up to the cutoff and equal ratios above; without an upper end the last bin's middle is the highest energy. */
function logEdges(
  count: number,
  cutoffKeV: number,
  highestKeV: number,
  to: number | undefined,
  problems: ProblemList,
): Float64Array | null {
  const ratio =
    to === undefined
      ? (highestKeV / cutoffKeV) ** (1 / (count - 1.5))
      : (to / cutoffKeV) ** (1 / (count - 1));
  const edges = makeEdges(count, (i) => (i === 0 ? 0 : cutoffKeV * ratio ** (i - 1)));
  if (to !== undefined) edges[count] = to;
  if (edges.every((edge, i) => i === 0 || edge > edges[i - 1])) return edges;
  const rule = `log bins need room between the cutoff, ${showNumber(cutoffKeV)} keV, and the highest source energy`;
  problems.add(PATH, complaints.contradiction(rule, 'take bins of equal width'));
  return null;
}

function listedEdges(
  edges: readonly (number | undefined)[],
  highestKeV: number,
  problems: ProblemList,
): Float64Array | null {
  let fine = edges.length > 0;
  const report = (index: number, rule: string, wayOut: string | null) => {
    problems.add([...PATH, 'edges', index], complaints.order(rule, wayOut), `${edges[index]} keV`);
    fine = false;
  };
  edges.forEach((edge, index) => {
    const last = edges[index - 1];
    if (edge === undefined) fine = false;
    else if (index === 0 && edge !== 0) report(0, 'the first edge must be 0 keV', 'put "0 keV" before it');
    else if (last !== undefined && !(edge > last))
      report(index, `must be above the edge before, ${last} keV`, null);
  });
  const top = edges.at(-1);
  if (top !== undefined && !(top > highestKeV)) {
    const rule = `the last edge must be above the highest source energy, ${showNumber(highestKeV)} keV`;
    report(edges.length - 1, rule, 'add an edge');
  }
  return fine ? Float64Array.from(edges as readonly number[]) : null;
}
