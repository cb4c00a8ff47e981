/** Physics switches and the end of the run, with what the rest of the setup must have for them. */
import type { DoseQuantity, Physics, RunOptions, Until } from '../../engine/setup.js';
import { nearestWord } from '../../materials/index.js';
import { complaints, type Complaint } from '../errors.js';
import type { SetupKeys } from '../setup-schema.js';
import { DEFAULTS } from './limits.js';
import type { ProblemList } from './problem-list.js';
import type { Partially } from './read-keys.js';
import { QUANTITIES, type QuantityName } from './schema-tally.js';
import { setupWarnings, type SetupWarning } from './warnings.js';
import type { StackDraft } from './stack.js';

type PhysicsKeys = Partially<NonNullable<SetupKeys['physics']>>;
type RunKeys = Partially<NonNullable<SetupKeys['run']>>;
type UntilKeys = NonNullable<RunKeys['until']>;

export function makePhysics(keys: PhysicsKeys, warnings: SetupWarning[]): Physics {
  const boundIncoherent = keys.bound_incoherent ?? true;
  if (keys.doppler === true && !boundIncoherent) warnings.push(setupWarnings.dopplerWithoutBinding());
  return {
    coherent: keys.coherent ?? true,
    boundIncoherent,
    // A free electron at rest has no momentum to broaden anything with.
    doppler: boundIncoherent && (keys.doppler ?? true),
    fluorescence: keys.fluorescence ?? true,
    pair: keys.pair ?? true,
    bremsstrahlung: keys.bremsstrahlung ?? true,
    cutoffKeV: keys.cutoff ?? DEFAULTS.cutoffKeV,
  };
}

/** What `until` is checked against; null parts are not known and are not held against it. */
export interface RunNeeds {
  readonly stack: StackDraft;
  readonly hasSides: boolean;
  /** null: not known. */
  readonly hasLines: boolean | null;
  readonly dose: readonly (DoseQuantity | undefined)[];
  /** Names of the dose points. */
  readonly dosePoints: readonly string[];
  readonly coincidence: boolean;
}

/** True if some layer has an edge of its own, or may have. */
export function hasNarrowLayer(stack: StackDraft): boolean {
  return stack.layers.some(({ layer }) => layer === null || layer.radiusCm !== null);
}

export function makeRun(keys: RunKeys, needs: RunNeeds, problems: ProblemList): RunOptions {
  if (keys.transport === 'deep') reportPulseHeights(keys, needs, problems);
  return {
    histories: keys.histories ?? DEFAULTS.histories,
    until: keys.until === undefined ? null : makeUntil(keys.until, needs, problems),
    timeLimitS: keys.time_limit ?? null,
    transport: keys.transport ?? 'auto',
  };
}

/** Weighted photons have no pulse heights: a pulse is what one history leaves as a whole. */
function reportPulseHeights(keys: RunKeys, { stack }: RunNeeds, problems: ProblemList): void {
  const quantity = keys.until?.quantity;
  const kind = quantity === undefined ? null : QUANTITIES[quantity];
  const way = 'take transport: analog, or leave transport out';
  if (stack.detectors.length > 0) {
    const rule = `deep transport gives no pulse heights, but ${stack.detectors[0].name ?? 'a layer'} is a detector`;
    problems.add(['run', 'transport'], complaints.contradiction(rule, `remove detector, or ${way}`));
  } else if (quantity === 'interacting' || kind === 'detector' || kind === 'detector_total') {
    const rule = `deep transport cannot give ${quantity}`;
    problems.add(['run', 'transport'], complaints.contradiction(rule, way));
  }
}

function makeUntil(keys: UntilKeys, needs: RunNeeds, problems: ProblemList): Until | null {
  const { quantity, layer, relative_error: relativeError } = keys;
  if (quantity === undefined) return null;
  const missing = missingFor(quantity, needs);
  if (missing !== null) problems.add(['run', 'until', 'quantity'], missing);
  else if (layer !== undefined) checkLayer(quantity, layer, needs, problems);
  return relativeError === undefined ? null : { quantity, layer: layer ?? null, relativeError };
}

/** Why this setup cannot give the quantity, or null. */
function missingFor(quantity: QuantityName, needs: RunNeeds): Complaint | null {
  const { stack, hasSides, dose } = needs;
  const lacks = (what: string, wayOut: string) =>
    complaints.notAvailable(`${quantity} needs ${what}`, wayOut);
  switch (QUANTITIES[quantity]) {
    case 'side':
      return hasSides ? null : lacks('layers with an edge', 'add extent, or give a layer a radius');
    case 'detector':
    case 'detector_total':
    case 'coincidence':
      if (stack.layers.length > 0 && stack.detectors.length === 0) {
        return lacks('a detector layer', 'add detector: {} to a layer');
      }
      return lackOfDetectors(quantity, needs, lacks);
    case 'dose':
      return dose.includes(quantity as DoseQuantity)
        ? null
        : lacks('a dose tally', `add it to the tally, as in dose: [${quantity}]`);
    case 'any_dose':
      return dose.length > 0 ? null : lacks('a dose tally', 'add one, as in dose: [ambient_dose]');
    default:
      return null;
  }
}

/** What a figure of detectors lacks beyond a detector. */
function lackOfDetectors(
  quantity: QuantityName,
  { hasLines, coincidence }: RunNeeds,
  lacks: (what: string, wayOut: string) => Complaint,
): Complaint | null {
  const kind = QUANTITIES[quantity];
  if (kind === 'coincidence' && !coincidence) {
    return lacks('detectors in coincidence', 'add coincidence: true to the tally');
  }
  return kind === 'detector' && hasLines === false
    ? lacks('source lines, not a spectrum', 'watch interacting instead')
    : null;
}

function checkLayer(quantity: QuantityName, layer: string, needs: RunNeeds, problems: ProblemList): void {
  const path = ['run', 'until', 'layer'];
  const kind = QUANTITIES[quantity];
  if (kind === 'whole' || kind === 'side') {
    problems.addKey(path, complaints.contradiction(`${quantity} belongs to the whole stack`, 'remove layer'));
  } else if (kind === 'dose' || kind === 'any_dose') {
    const names = needs.dosePoints;
    if (names.includes(layer)) return;
    const wayOut =
      names.length === 0
        ? 'remove layer, or add dose_points to the tally'
        : `dose points: ${names.join(', ')}`;
    problems.add(path, complaints.unknownName('dose point', layer, nearestWord(layer, names), wayOut));
  } else {
    const found = needs.stack.find(layer, path, problems);
    if (kind === 'layer' || found === null || found.isDetector) return;
    const names = needs.stack.detectors.flatMap(({ name }) => name ?? []);
    problems.add(
      path,
      complaints.notAvailable(`${layer} is no detector`, `detectors here: ${names.join(', ')}`),
    );
  }
}
