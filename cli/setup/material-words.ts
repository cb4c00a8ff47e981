/** The materials a setup may name: its own, vacuum, and those the materials folder knows. */
import {
  materialFromFormula,
  materialFromMassFractions,
  MaterialError,
  nearestMaterialName,
  nearestWord,
  resolveMaterial,
  type Material,
} from '../../materials/index.js';
import { complaints, type Complaint, type Path } from '../errors.js';
import type { SetupKeys } from '../setup-schema.js';
import { MAX_MATERIALS } from './limits.js';
import type { ProblemList } from './problem-list.js';
import type { Partially } from './read-keys.js';

export const VACUUM = 'vacuum';

type OwnKeys = Partially<NonNullable<SetupKeys['materials']>>;

/** Looks up materials for one setup; the same words give the same object. */
export class MaterialWords {
  /** null: defined, but wrong. */
  readonly #own = new Map<string, Material | null>();
  readonly #known = new Map<string, Material>();
  readonly #problems: ProblemList;

  /** Makes the own materials. */
  constructor(keys: OwnKeys, problems: ProblemList) {
    this.#problems = problems;
    const own = Object.entries(keys);
    if (own.length > MAX_MATERIALS) {
      problems.add(['materials'], complaints.count(0, MAX_MATERIALS, own.length));
    }
    for (const [name, given] of own)
      this.#own.set(name, given === undefined ? null : this.#make(name, given));
  }

  /**
   * The material of a layer: null is vacuum, undefined means that it is wrong and has been reported.
   *
   * @param density replaces the density of the material; 0 makes a vacuum
   */
  find(name: string, density: number | undefined, path: Path): Material | null | undefined {
    if (name.toLowerCase() === VACUUM) return null;
    const material = this.#own.has(name)
      ? this.#findOwn(name, density)
      : this.#findKnown(name, density, path);
    return density === 0 && material !== undefined ? null : material;
  }

  #findOwn(name: string, density: number | undefined): Material | undefined {
    const material = this.#own.get(name) ?? undefined;
    if (material === undefined || density === undefined || density === 0) return material;
    return this.#remember(name, density, () => ({ ...material, densityGPerCm3: density }));
  }

  #findKnown(name: string, density: number | undefined, path: Path): Material | undefined {
    try {
      return this.#remember(name, density, () => {
        // Any density will do for the check of a word that ends as vacuum.
        const found = resolveMaterial(name, density === 0 ? 1 : density);
        return { name: found.name, densityGPerCm3: found.densityGPerCm3, constituents: found.constituents };
      });
    } catch (error) {
      this.#report(error, [...path, 'material'], (cause) => this.#unknown(name, cause));
      return undefined;
    }
  }

  #remember(name: string, density: number | undefined, make: () => Material): Material {
    const key = `${name}\u0000${density ?? ''}`;
    const known = this.#known.get(key) ?? make();
    this.#known.set(key, known);
    return known;
  }

  #unknown(name: string, cause: MaterialError): Complaint {
    if (cause.code === 'no_density') return complaints.formulaWithoutDensity(name);
    if (cause.code !== 'unknown_material') return fromMaterials(cause);
    const near =
      nearestWord(name, [...this.#own.keys(), VACUUM]) ?? nearestMaterialName(name) ?? cause.suggestion;
    return complaints.unknownName(
      'material',
      name,
      near,
      'define it under materials, by formula or mass fractions',
    );
  }

  #make(name: string, keys: NonNullable<OwnKeys[string]>): Material | null {
    const path = ['materials', name];
    if (name.toLowerCase() === VACUUM) {
      this.#problems.addKey(path, complaints.forbiddenKey(name));
      return null;
    }
    const given = (['formula', 'mass_fractions'] as const).filter((key) => key in keys);
    if (given.length !== 1) {
      this.#problems.add(path, complaints.chooseOne(['formula', 'mass_fractions'], given));
      return null;
    }
    const { formula, mass_fractions: fractions, density } = keys;
    const shares = fractions === undefined ? undefined : complete(fractions);
    try {
      // Without a density the material cannot be used, but its composition is checked all the same.
      const made =
        formula !== undefined
          ? materialFromFormula(formula, density ?? 1, name)
          : shares !== undefined
            ? materialFromMassFractions(shares, density ?? 1, name)
            : null;
      return density === undefined ? null : made;
    } catch (error) {
      this.#report(error, [...path, given[0]], fromMaterials);
      return null;
    }
  }

  #report(error: unknown, path: Path, words: (cause: MaterialError) => Complaint): void {
    if (!(error instanceof MaterialError)) throw error;
    this.#problems.add(path, words(error), error.value);
  }
}

function fromMaterials(error: MaterialError): Complaint {
  return complaints.badMaterial(error.rule, error.suggestion);
}

/** The fractions if every one of them could be read. */
function complete(
  fractions: Readonly<Record<string, number | undefined>>,
): Record<string, number> | undefined {
  const entries = Object.entries(fractions);
  if (entries.some(([, value]) => value === undefined)) return undefined;
  return Object.fromEntries(entries) as Record<string, number>;
}
