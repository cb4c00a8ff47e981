/** A sweep: its points, each a checked setup with a seed of its own. */
import { createHash } from 'node:crypto';
import type { Setup } from '../../engine/index.js';
import type { Material } from '../../materials/index.js';
import { checkSetup, type CheckedSetup } from '../setup-reader.js';
import { setupWarnings } from '../setup/warnings.js';
import type { BaseSetup } from './base-setup.js';
import { withValue } from './parameter-path.js';
import { valueIndices, type Combination, type Parameter } from './parameters.js';
import { canonicalText } from './values.js';

/** `quantity` null: the leading figure of each point. */
export interface Precision {
  readonly quantity: string | null;
  readonly layer: string | null;
  readonly relativeError: number;
}

export interface SweepParts {
  readonly title: string;
  readonly seed: string;
  readonly base: BaseSetup;
  readonly parameters: readonly Parameter[];
  readonly combine: Combination;
  /** Number of points, which are counted from 0. */
  readonly points: number;
  readonly precision: Precision | null;
  readonly timeLimitS: number | null;
  readonly spectra: boolean;
}

/** Materials kept: enough for any list of them, few enough where a density takes a new value at each point. */
const MOST_MATERIALS = 200;

/** Long enough that two of 100 000 points share a seed less than once in a billion sweeps (birthday bound). */
const SEED_DIGITS = 16;

export class Sweep implements SweepParts {
  readonly title: string;
  readonly seed: string;
  readonly base: BaseSetup;
  readonly parameters: readonly Parameter[];
  readonly combine: Combination;
  readonly points: number;
  readonly precision: Precision | null;
  readonly timeLimitS: number | null;
  readonly spectra: boolean;
  private readonly materials = new Map<string, Material>();

  constructor(parts: SweepParts) {
    this.title = parts.title;
    this.seed = parts.seed;
    this.base = parts.base;
    this.parameters = parts.parameters;
    this.combine = parts.combine;
    this.points = parts.points;
    this.precision = parts.precision;
    this.timeLimitS = parts.timeLimitS;
    this.spectra = parts.spectra;
  }

  /** Which value of each parameter a point has. */
  indicesOf(point: number): number[] {
    return valueIndices(this.parameters, this.combine, point);
  }

  /** The values of a point, one for each parameter. */
  valuesOf(point: number): unknown[] {
    const indices = this.indicesOf(point);
    return this.parameters.map(({ values }, at) => values[indices[at]]);
  }

  /** One text for a point, whatever the order of parameters and points in the file. */
  keyOf(point: number): string {
    const values = this.valuesOf(point);
    return this.parameters
      .map(({ name }, at) => `${name} = ${canonicalText(values[at])}`)
      .sort()
      .join('; ');
  }

  /**
   * The seed of a point follows from that of the sweep and from the point's own values: whatever else is in the sweep,
   * the point gives the same figures, and `thickset run --seed` gives them too.
   */
  seedOf(point: number): string {
    const hash = createHash('sha256').update(this.keyOf(point)).digest('hex');
    return `${this.seed}/${hash.slice(0, SEED_DIGITS)}`;
  }

  /** The setup of a point. @throws SetupError with all problems, as if it had been written by itself */
  setupOf(point: number): CheckedSetup {
    const values = this.valuesOf(point);
    const raw = this.parameters.reduce<unknown>(
      (setup, { path }, at) => withValue(setup, path, values[at]),
      this.base.raw,
    );
    const { fileName, directory } = this.base;
    const checked = checkSetup(this.withPrecision(raw), { fileName, directory });
    const { stack } = checked.setup;
    const setup = {
      ...this.withAim(checked.setup),
      stack: stack.map((layer) => ({ ...layer, material: layer.material && this.known(layer.material) })),
      seed: this.seedOf(point),
    };
    if (setup.run.timeLimitS === null) return { ...checked, setup };
    // A limit on each point would make their figures depend on the speed of the machine.
    return {
      setup: { ...setup, run: { ...setup.run, timeLimitS: null } },
      warnings: [...checked.warnings, setupWarnings.pointTimeLimit()],
    };
  }

  /** One object for each material: what is worked out for it, such as ranges of electrons, is kept with it. */
  private known(material: Material): Material {
    const key = JSON.stringify(material);
    const known = this.materials.get(key);
    if (known !== undefined) return known;
    if (this.materials.size >= MOST_MATERIALS) this.materials.clear();
    this.materials.set(key, material);
    return material;
  }

  /** A precision that names its quantity is checked as a part of the setup. */
  private withPrecision(raw: unknown): unknown {
    if (this.precision === null || this.precision.quantity === null) return raw;
    const { quantity, layer, relativeError } = this.precision;
    const until = { quantity, ...(layer === null ? {} : { layer }), relative_error: relativeError };
    return withValue(raw, ['run', 'until'], until);
  }

  /** A precision without a quantity is that of what the setup watches anyway. */
  private withAim(setup: Setup): Setup {
    if (this.precision === null || this.precision.quantity !== null) return setup;
    const { relativeError } = this.precision;
    const watched = setup.run.until ?? { quantity: leadingQuantity(setup), layer: null };
    return { ...setup, run: { ...setup.run, until: { ...watched, relativeError } } };
  }
}

/** Full energy where a detector can see source lines, transmission otherwise. */
function leadingQuantity({ stack, source }: Setup): string {
  const hasPeaks = source.emission.lines.length > 0 && stack.some(({ detector }) => detector !== null);
  return hasPeaks ? 'full_energy' : 'transmitted';
}
