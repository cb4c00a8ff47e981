/** The layers of a setup: names, materials, thicknesses, detectors. */
import type { Detector, EnergyWindow, Extent, Layer, Resolution } from '../../engine/setup.js';
import { nearestWord, type Material } from '../../materials/index.js';
import { complaints, type Path } from '../errors.js';
import type { SetupKeys } from '../setup-schema.js';
import { rounded, showNumber } from '../show.js';
import type { Quantity } from '../units.js';
import { VACUUM, type MaterialWords } from './material-words.js';
import type { ProblemList } from './problem-list.js';
import type { Partially } from './read-keys.js';
import { rangeComplaint } from './fields.js';
import { THICKNESS_CM, widthKeV } from './schema-layer.js';

type LayerKeys = Partially<SetupKeys['stack'][number]>;
type DetectorKeys = NonNullable<LayerKeys['detector']>;

/** What is known of a layer, also where parts of it are wrong. */
export interface LayerDraft {
  /** null: no name can be made. */
  readonly name: string | null;
  readonly isDetector: boolean;
  readonly thicknessCm: number | null;
  /** null: something is wrong with it. */
  readonly layer: Layer | null;
}

/** Layers that other sections can refer to by name. */
export class StackDraft {
  readonly layers: readonly LayerDraft[];

  constructor(layers: readonly LayerDraft[]) {
    this.layers = layers;
  }

  get names(): string[] {
    return this.layers.flatMap(({ name }) => name ?? []);
  }

  get detectors(): LayerDraft[] {
    return this.layers.filter(({ isDetector }) => isDetector);
  }

  /** Sum of all thicknesses; null if one is wrong. */
  get thicknessCm(): number | null {
    return this.layers.reduce<number | null>(
      (sum, { thicknessCm }) => (sum === null || thicknessCm === null ? null : sum + thicknessCm),
      0,
    );
  }

  /** Reports a name that no layer has; says nothing while some layer's name is not known. */
  find(name: string, path: Path, problems: ProblemList): LayerDraft | null {
    const found = this.layers.find((layer) => layer.name === name);
    if (found !== undefined) return found;
    if (this.layers.length > 0 && this.layers.every((layer) => layer.name !== null)) {
      const wayOut = `layers here: ${this.names.slice(0, 10).join(', ')}`;
      problems.add(path, complaints.unknownName('layer', name, nearestWord(name, this.names), wayOut));
    }
    return null;
  }
}

export function makeStack(
  keys: Partially<SetupKeys['stack']>,
  materials: MaterialWords,
  problems: ProblemList,
): StackDraft {
  const layers = keys.map((layer, index) =>
    layer === undefined
      ? { name: null, isDetector: false, thicknessCm: null, layer: null }
      : makeLayer(layer, index, materials, problems),
  );
  reportSameNames(layers, problems);
  return new StackDraft(layers);
}

function makeLayer(
  keys: LayerKeys,
  index: number,
  materials: MaterialWords,
  problems: ProblemList,
): LayerDraft {
  const path = ['stack', index];
  const isDetector = 'detector' in keys;
  const name = keys.name ?? (keys.material === undefined ? null : `${keys.material}-${index + 1}`);
  const material =
    keys.material === undefined ? undefined : materials.find(keys.material, keys.density, path);
  const thicknessCm =
    keys.thickness === undefined ? null : makeThickness(keys.thickness, material, path, problems);
  if (keys.material?.toLowerCase() === VACUUM && (keys.density ?? 0) > 0) {
    problems.add(
      [...path, 'density'],
      complaints.contradiction('a vacuum has no density', 'name a material'),
    );
  }
  if (material === null && isDetector) {
    problems.add(
      [...path, 'detector'],
      complaints.contradiction('a vacuum cannot be a detector', 'give it a material'),
    );
  }
  const detector =
    keys.detector === undefined ? null : makeDetector(keys.detector, [...path, 'detector'], problems);
  const layer =
    name === null || material === undefined || thicknessCm === null
      ? null
      : { name, material, thicknessCm, radiusCm: keys.radius ?? null, detector };
  return { name, isDetector, thicknessCm, layer };
}

/** Thickness in cm; a mass per area is divided by the density. Null if wrong or not known. */
function makeThickness(
  { dimension, value }: Quantity,
  material: Material | null | undefined,
  layerPath: Path,
  problems: ProblemList,
): number | null {
  const path = [...layerPath, 'thickness'];
  if (dimension === 'mass_per_area' && material === null) {
    const rule = 'a vacuum has no mass per area';
    problems.add(path, complaints.contradiction(rule, 'give the thickness as a length'));
    return null;
  }
  if (dimension === 'mass_per_area' && material === undefined) return null;
  const thicknessCm = dimension === 'length' ? value : value / (material as Material).densityGPerCm3;
  const broken = rangeComplaint(thicknessCm, THICKNESS_CM, 'cm');
  if (broken === null) return thicknessCm;
  problems.add(path, broken, `${showNumber(rounded(thicknessCm))} cm by its mass per area`);
  return null;
}

function reportSameNames(layers: readonly LayerDraft[], problems: ProblemList): void {
  const first = new Map<string, number>();
  layers.forEach(({ name }, index) => {
    if (name === null) return;
    const taken = first.get(name);
    if (taken === undefined) first.set(name, index);
    else problems.add(['stack', index, 'name'], complaints.duplicateName(name, ['stack', taken]));
  });
}

function makeDetector(keys: DetectorKeys, path: Path, problems: ProblemList): Detector {
  return {
    resolution: keys.fwhm === undefined ? null : makeResolution(keys.fwhm, [...path, 'fwhm'], problems),
    thresholdKeV: keys.threshold ?? null,
    windows: makeWindows(keys.windows ?? [], [...path, 'windows'], problems),
  };
}

/** Null if something in it is wrong, and has been reported. */
export function makeResolution(
  keys: NonNullable<DetectorKeys['fwhm']>,
  path: Path,
  problems: ProblemList,
): Resolution | null {
  if ('atKeV' in keys) return { kind: 'at_energy', fwhmKeV: keys.fwhmKeV, atKeV: keys.atKeV };
  if ('length' in keys) return makeTable(keys, path, problems);
  const { a, b, c } = keys;
  if (a === undefined || b === undefined || c === undefined) return null;
  if (a > 0 || b > 0) return { kind: 'formula', a, b, c };
  problems.add(
    path,
    complaints.contradiction('gives no width above 0 at any energy', 'a or b must be more than 0'),
  );
  return null;
}

function makeTable(
  rows: readonly (Partially<{ energy: number; fwhm: Quantity }> | undefined)[],
  path: Path,
  problems: ProblemList,
): Resolution | null {
  const energyKeV: number[] = [];
  const fwhmKeV: number[] = [];
  rows.forEach((row, index) => {
    if (row?.energy === undefined || row.fwhm === undefined) return;
    const last = energyKeV.at(-1);
    if (last !== undefined && !(row.energy > last)) {
      problems.add(
        [...path, index, 'energy'],
        complaints.order(`must be above the one before, ${last} keV`),
        `${row.energy} keV`,
      );
    }
    energyKeV.push(row.energy);
    fwhmKeV.push(widthKeV(row.fwhm, row.energy));
  });
  return energyKeV.length === rows.length ? { kind: 'table', energyKeV, fwhmKeV } : null;
}

function makeWindows(
  rows: readonly (Partially<{ name: string; from: number; to: number }> | undefined)[],
  path: Path,
  problems: ProblemList,
): EnergyWindow[] {
  const first = new Map<string, number>();
  return rows.flatMap((row, index) => {
    if (row === undefined) return [];
    const { name, from, to } = row;
    if (from !== undefined && to !== undefined && !(to > from)) {
      problems.add([...path, index, 'to'], complaints.order(`must be above from, ${from} keV`), `${to} keV`);
    }
    if (name === undefined || from === undefined || to === undefined) return [];
    const taken = first.get(name);
    if (taken === undefined) first.set(name, index);
    else problems.add([...path, index, 'name'], complaints.duplicateName(name, [...path, taken]));
    return [{ name, energyLowKeV: from, energyHighKeV: to }];
  });
}

/** A fitted width may fall below 0 at low energies, where it means nothing; not where the source is. */
export function reportNegativeWidths(stack: StackDraft, highestKeV: number, problems: ProblemList): void {
  stack.layers.forEach(({ layer }, index) => {
    const resolution = layer?.detector?.resolution;
    if (resolution?.kind !== 'formula') return;
    const { a, b, c } = resolution;
    const fwhmKeV = a + b * Math.sqrt(highestKeV + c * highestKeV ** 2);
    if (fwhmKeV > 0) return;
    const rule = `gives a width of ${showNumber(rounded(fwhmKeV))} keV at the highest source energy, ${showNumber(highestKeV)} keV`;
    problems.add(
      ['stack', index, 'detector', 'fwhm'],
      complaints.contradiction(rule, 'a, b and c are in units of keV'),
    );
  });
}

/** Null: no lateral limit. Also null after a complaint. */
export function makeExtent(keys: Partially<SetupKeys['extent']>, problems: ProblemList): Extent | null {
  if (keys === undefined) return null;
  const given = ['radius', 'width', 'height'].filter((key) => key in keys);
  const way = 'give a radius, or a width and a height';
  if (given.join() !== 'radius' && given.join() !== 'width,height') {
    const rule = given.length === 0 ? 'has no size' : `cannot be made of ${given.join(' and ')} alone`;
    problems.add(
      ['extent'],
      complaints.contradiction(given.length > 1 ? 'has both a radius and sides' : rule, way),
    );
    return null;
  }
  const { radius, width, height } = keys;
  if (radius !== undefined) return { kind: 'radius', radiusCm: radius };
  if (width !== undefined && height !== undefined)
    return { kind: 'rectangle', widthCm: width, heightCm: height };
  return null;
}
