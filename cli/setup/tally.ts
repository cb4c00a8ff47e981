/** What is scored, and what of it the rest of the setup allows. */
import type { DepthProfile, DosePoint, DoseQuantity, Tally } from '../../engine/setup.js';
import { complaints } from '../errors.js';
import type { SetupKeys } from '../setup-schema.js';
import { DEFAULTS } from './limits.js';
import { makeEnergyEdges, type BinNeeds } from './energy-bins.js';
import type { ProblemList } from './problem-list.js';
import type { Partially } from './read-keys.js';
import type { StackDraft } from './stack.js';

type TallyKeys = Partially<NonNullable<SetupKeys['tally']>>;
type PointKeys = Partially<NonNullable<NonNullable<SetupKeys['tally']>['dose_points']>[number]>;

/** Spectra whatever the layers are: transmitted, reflected, escaped through the side. */
const SPECTRA_OF_STACK = 3;

/** Number of spectra that share the energy bins. */
export function countSpectra(stack: StackDraft, { coincidence = false }: TallyKeys = {}): number {
  const detectors = stack.detectors.length;
  return SPECTRA_OF_STACK + stack.layers.length + detectors + (coincidence ? detectors + 1 : 0);
}

/**
 * Null if something in it is wrong, and has been reported.
 *
 * @param needs null while the source is not known: the bins are then left unchecked
 */
export function makeTally(
  keys: TallyKeys,
  needs: BinNeeds | null,
  stack: StackDraft,
  problems: ProblemList,
): Tally | null {
  const dose = makeDose(keys.dose ?? [], problems);
  const dosePoints = makePoints(keys.dose_points ?? [], stack.thicknessCm, problems);
  if ('dose_points' in keys && (!('dose' in keys) || keys.dose?.length === 0)) {
    const rule = 'need a dose quantity';
    problems.addKey(
      ['tally', 'dose_points'],
      complaints.contradiction(rule, 'add dose, as in dose: [ambient_dose]'),
    );
  }
  const depthProfile = makeDepthProfile(keys.depth_profile, stack, problems);
  if (keys.coincidence && stack.layers.length > 0 && stack.detectors.length < 2) {
    const rule = `needs two detectors or more, there ${stack.detectors.length === 1 ? 'is one' : 'is none'}`;
    problems.add(
      ['tally', 'coincidence'],
      complaints.contradiction(rule, 'add detector: {} to another layer'),
    );
  }
  const binsAreWrong = 'energy_bins' in keys && keys.energy_bins === undefined;
  const edges = binsAreWrong ? null : makeEnergyEdges(keys.energy_bins, needs, problems);
  const coincidence = keys.coincidence ?? false;
  return edges === null ? null : { energyEdgesKeV: edges, dose, dosePoints, depthProfile, coincidence };
}

function makeDose(quantities: readonly (DoseQuantity | undefined)[], problems: ProblemList): DoseQuantity[] {
  const first = new Map<string, number>();
  return quantities.flatMap((quantity, index) => {
    if (quantity === undefined) return [];
    const taken = first.get(quantity);
    if (taken === undefined) first.set(quantity, index);
    else problems.add(['tally', 'dose', index], complaints.repeated(quantity, ['tally', 'dose', taken]));
    return [quantity];
  });
}

function pointName(row: PointKeys | undefined, index: number): string {
  return row?.name ?? `point-${index + 1}`;
}

/** Names that other sections can refer to. */
export function dosePointNames(keys: TallyKeys): string[] {
  return (keys.dose_points ?? []).map(pointName);
}

function makePoints(
  rows: readonly (PointKeys | undefined)[],
  stackCm: number | null,
  problems: ProblemList,
): DosePoint[] {
  const first = new Map<string, number>();
  return rows.flatMap((row, index) => {
    if (row === undefined) return [];
    const path = ['tally', 'dose_points', index];
    const given = (['behind', 'in_front'] as const).filter((key) => key in row);
    if (given.length !== 1) problems.add(path, complaints.chooseOne(['behind', 'in_front'], given));
    const name = pointName(row, index);
    const taken = first.get(name);
    if (taken === undefined) first.set(name, index);
    else problems.add([...path, 'name'], complaints.duplicateName(name, ['tally', 'dose_points', taken]));
    const zCm = row.in_front !== undefined ? -row.in_front : (stackCm ?? 0) + (row.behind ?? 0);
    return [{ name, zCm, offsetCm: row.offset ?? 0 }];
  });
}

function makeDepthProfile(
  keys: TallyKeys['depth_profile'],
  stack: StackDraft,
  problems: ProblemList,
): DepthProfile | null {
  if (keys?.layer === undefined) return null;
  if (stack.find(keys.layer, ['tally', 'depth_profile', 'layer'], problems) === null) return null;
  return { layer: keys.layer, bins: keys.bins ?? DEFAULTS.depthBins };
}
