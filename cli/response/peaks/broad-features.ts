/**
 * Where the Compton edge and the backscatter peak are seen. Both are broad: they are looked for in groups of bins of
 * the spectrum as tallied, near the energy that kinematics gives.
 */
import { leastSquares } from '../least-squares.js';
import type { Value } from '../pulses.js';
import { range, type Continuum } from './continuum.js';
import { UNRESOLVED, type Bins } from './escape-peaks.js';
import { backscatteredKeV, comptonEdgeKeV, SEEN_SIGMAS, type PeakRow } from './peak-row.js';

type Finding = Pick<PeakRow, 'mean' | 'stdError' | 'status'>;

const ABSENT: Finding = { mean: null, stdError: null, status: 'absent' };

/** Mean height per keV around an energy. */
interface Group {
  readonly energyKeV: number;
  readonly height: Value;
}

/** Groups of bins; those in which an escape peak is expected are left out. */
function groupsBetween(
  continuum: Continuum,
  peaks: readonly Bins[],
  lowKeV: number,
  highKeV: number,
  count: number,
): Group[] {
  const [first, end] = [continuum.binOf(lowKeV), continuum.binOf(highKeV)];
  const bins = Math.max(1, Math.floor((end - first) / count));
  const { edgesKeV } = continuum;
  return range(0, Math.floor((end - first) / bins)).flatMap((group) => {
    const start = first + group * bins;
    const stop = start + bins;
    if (peaks.some((peak) => peak.first < stop && peak.end > start)) return [];
    return { energyKeV: 0.5 * (edgesKeV[start] + edgesKeV[stop]), height: continuum.height(start, stop) };
  });
}

/** Groups that a step or a bump needs to be told from its neighbours. */
const LEAST_GROUPS = 10;
const EDGE_GROUPS = 60;
/** Groups to either side that the spectrum is averaged over, as few as steady it. */
const SMOOTHINGS = [0, 1, 2, 3, 4];
/**
 * Standard errors of a group in half the step of an edge: fewer, and chance takes a group across the half (1 in 500 at
 * 60 groups), which would put the edge anywhere.
 */
const STEADY_SIGMAS = 4;
/** What binding and scattering twice may move the edge by. */
const EDGE_WITHIN = 0.05;
const BUMP_GROUPS = 40;

/**
 * The Compton edge: where the spectrum, smoothed as far as chance asks for, has fallen half way from its top below the
 * kinematic edge to the mean between the edge and the full energy (from a quarter to a half of that way).
 */
export function comptonEdge(continuum: Continuum, peaks: readonly Bins[], lineKeV: number): Finding {
  const edgeKeV = comptonEdgeKeV(lineKeV);
  const gapKeV = lineKeV - edgeKeV;
  const valley = continuum.height(
    continuum.binOf(edgeKeV + 0.25 * gapKeV),
    continuum.binOf(edgeKeV + 0.5 * gapKeV),
  );
  if (Number.isNaN(valley.mean)) return UNRESOLVED;
  const isBelow = ({ energyKeV }: Group) => energyKeV <= edgeKeV;
  const fine = groupsBetween(continuum, peaks, 0.9 * edgeKeV, edgeKeV + 0.25 * gapKeV, EDGE_GROUPS);
  if (fine.length < LEAST_GROUPS || !fine.some(isBelow)) return UNRESOLVED;
  const curves = SMOOTHINGS.map((reach) => smoothed(fine, reach)).filter((curve) => curve.some(isBelow));
  const groups = curves.find((curve) => isSteady(curve.filter(isBelow), valley)) ?? curves[curves.length - 1];
  const below = groups.filter(isBelow);
  const top = below.reduce((best, group) => (group.height.mean > best.height.mean ? group : best), below[0]);
  const error = (value: Value) => value.stdError ?? 0;
  const spread = Math.hypot(error(top.height), error(valley));
  if (!(top.height.mean - valley.mean > SEEN_SIGMAS * spread)) return ABSENT;
  if (!isSteady(below, valley)) return UNRESOLVED;
  const half = 0.5 * (top.height.mean + valley.mean);
  const next = groups.findIndex(({ energyKeV, height }) => energyKeV > top.energyKeV && height.mean < half);
  if (next < 1) return ABSENT;
  const [before, after] = [groups[next - 1], groups[next]];
  const slope = (after.height.mean - before.height.mean) / (after.energyKeV - before.energyKeV);
  const mean = before.energyKeV + (half - before.height.mean) / slope;
  // A step this far off belongs to another line, or to photons scattered in front of the detector.
  if (Math.abs(mean / edgeKeV - 1) > EDGE_WITHIN) return UNRESOLVED;
  const heightError = Math.hypot(0.5 * spread, Math.max(error(before.height), error(after.height)));
  // Inside a group the fall may stand anywhere: an even spread over its width.
  const withinKeV = (after.energyKeV - before.energyKeV) / Math.sqrt(12);
  return { mean, stdError: Math.hypot(heightError / slope, withinKeV), status: 'seen' };
}

/** Means over each group and `reach` ones to either side: a step stays where it is. */
function smoothed(groups: readonly Group[], reach: number): Group[] {
  return groups.slice(reach, groups.length - reach).map(({ energyKeV }, i) => {
    const near = groups.slice(i, i + 2 * reach + 1);
    const mean = near.reduce((sum, { height }) => sum + height.mean, 0) / near.length;
    const stdError = Math.hypot(...near.map(({ height }) => height.stdError ?? Infinity)) / near.length;
    return { energyKeV, height: { mean, stdError: Number.isFinite(stdError) ? stdError : null } };
  });
}

/** Whether chance cannot take one of the groups below half of the step from their mean to the valley. */
function isSteady(below: readonly Group[], valley: Value): boolean {
  const mean = below.reduce((sum, { height }) => sum + height.mean, 0) / below.length;
  const half = 0.5 * (mean - valley.mean);
  return below.every(({ height }) => half >= STEADY_SIGMAS * (height.stdError ?? Infinity));
}

/**
 * The backscatter peak: the top of a parabola through the spectrum from 0.8 to 1.35 times the energy of photons
 * scattered straight back, where it bends down by more than 3 standard errors and has its top near that energy.
 */
export function backscatterPeak(continuum: Continuum, peaks: readonly Bins[], lineKeV: number): Finding {
  const energyKeV = backscatteredKeV(lineKeV);
  const groups = groupsBetween(continuum, peaks, 0.8 * energyKeV, 1.35 * energyKeV, BUMP_GROUPS);
  if (groups.length < LEAST_GROUPS || groups.some(({ height }) => !height.stdError)) return UNRESOLVED;
  const x = groups.map((group) => group.energyKeV / energyKeV - 1);
  const { coefficients, covariance } = leastSquares(
    x.map((value) => [1, value, value * value]),
    groups.map(({ height }) => height.mean),
    groups.map(({ height }) => height.stdError as number),
  );
  const [, b, c] = coefficients;
  const top = -b / (2 * c);
  if (!(c < -SEEN_SIGMAS * Math.sqrt(covariance[2][2])) || top < -0.1 || top > 0.25) return ABSENT;
  // First-order propagation to −b / 2c.
  const [byB, byC] = [-1 / (2 * c), b / (2 * c * c)];
  const variance =
    byB * byB * covariance[1][1] + 2 * byB * byC * covariance[1][2] + byC * byC * covariance[2][2];
  return { mean: energyKeV * (1 + top), stdError: energyKeV * Math.sqrt(variance), status: 'seen' };
}
