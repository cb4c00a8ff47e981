/**
 * Walks a value along a zod schema, key by key. zod by itself gives either the whole value or its problems; here
 * every key that is right is kept beside the problems of the others, so that what one key demands of another can
 * still be checked and everything wrong is told at once.
 */
import * as z from 'zod';
import { nearestWord } from '../../materials/index.js';
import { Complaint, complaints, type Path } from '../errors.js';
import { showFlow } from '../show.js';
import type { Quantity } from '../units.js';
import { readText } from './fields.js';
import { MAX_NAME } from './limits.js';
import type { ProblemList } from './problem-list.js';
import type { WidthAtEnergy } from './schema-layer.js';

type Leaf = string | number | boolean | Quantity | WidthAtEnergy;

/** The value with every key that was given; `undefined` stands for a value that is wrong and has been reported. */
export type Partially<T> = T extends Leaf
  ? T
  : T extends readonly (infer Item)[]
    ? readonly (Partially<Item> | undefined)[]
    : T extends object
      ? { readonly [K in keyof T]?: Partially<T[K]> }
      : T;

/** Reads what can be read; everything else goes to `problems`. */
export function readKeys<S extends z.ZodType>(
  schema: S,
  raw: unknown,
  problems: ProblemList,
): Partially<z.output<S>> | undefined {
  return new KeyReader(problems).read(schema, raw, []) as Partially<z.output<S>> | undefined;
}

/** What `list` leaves in the metadata. */
interface ListBounds {
  readonly minItems?: number;
  readonly maxItems?: number;
}

function isMapping(value: unknown): value is Readonly<Record<string, unknown>> {
  return typeof value === 'object' && value !== null && !Array.isArray(value);
}

class KeyReader {
  readonly #problems: ProblemList;

  constructor(problems: ProblemList) {
    this.#problems = problems;
  }

  read(schema: z.core.$ZodType, raw: unknown, path: Path): unknown {
    if (schema instanceof z.ZodOptional)
      return raw === undefined ? undefined : this.read(schema.unwrap(), raw, path);
    if (schema instanceof z.ZodObject) return this.#readObject(schema, raw, path);
    if (schema instanceof z.ZodArray) return this.#readArray(schema, raw, path);
    if (schema instanceof z.ZodRecord) return this.#readRecord(schema, raw, path);
    if (schema instanceof z.ZodDiscriminatedUnion) return this.#readKind(schema, raw, path);
    if (schema instanceof z.ZodUnion) return this.read(optionFor(schema, raw), raw, path);
    return this.#readLeaf(schema, raw, path);
  }

  #readLeaf(schema: z.core.$ZodType, raw: unknown, path: Path): unknown {
    const result = z.safeParse(schema, raw);
    if (result.success) return result.data;
    for (const issue of result.error.issues) {
      const complaint: unknown = issue.code === 'custom' ? issue.params?.complaint : undefined;
      this.#problems.add(
        path,
        complaint instanceof Complaint ? complaint : complaints.wrongType(issue.message),
        raw,
      );
    }
    return undefined;
  }

  /** The raw value as a mapping, or undefined after a complaint. */
  #mapping(
    raw: unknown,
    path: Path,
    known: readonly string[],
  ): Readonly<Record<string, unknown>> | undefined {
    if (isMapping(raw)) return raw;
    const keys = known.length === 0 ? '' : ` with keys such as ${known.slice(0, 3).join(', ')}`;
    this.#problems.add(path, complaints.wrongType(`a mapping${keys}`), raw ?? null);
    return undefined;
  }

  #readObject(schema: z.ZodObject, raw: unknown, path: Path): unknown {
    const known = Object.keys(schema.shape);
    const mapping = this.#mapping(raw, path, known);
    if (mapping === undefined) return undefined;
    const strangers = Object.keys(mapping).filter((key) => !Object.hasOwn(schema.shape, key));
    for (const key of strangers) this.#unknownKey(key, path, known, null);
    return this.#readShape(schema, mapping, path, meantBy(strangers, known));
  }

  #readShape(
    schema: z.ZodObject,
    mapping: Readonly<Record<string, unknown>>,
    path: Path,
    misspelt: ReadonlySet<string>,
  ): Record<string, unknown> {
    const result: Record<string, unknown> = {};
    for (const [key, inner] of Object.entries(schema.shape)) {
      if (Object.hasOwn(mapping, key) && mapping[key] !== undefined) {
        result[key] = this.read(inner, mapping[key], [...path, key]);
      } else if (misspelt.has(key)) {
        // Given, though not by its name: to call it missing as well would say one mistake twice.
        result[key] = undefined;
      } else if (!(inner instanceof z.ZodOptional)) {
        this.#missing(inner, [...path, key]);
      }
    }
    return result;
  }

  #unknownKey(key: string, path: Path, known: readonly string[], elsewhere: string | null): void {
    this.#problems.addKey([...path, key], complaints.unknownKey(key, known, elsewhere));
  }

  #missing(schema: z.core.$ZodType, path: Path): void {
    const { examples } = z.globalRegistry.get(schema) ?? {};
    const example = Array.isArray(examples) ? `, as in ${path.at(-1)}: ${showFlow(examples[0])}` : '';
    this.#problems.add(path, complaints.missingKey(`add it${example}`));
  }

  #readArray(schema: z.ZodArray, raw: unknown, path: Path): unknown {
    if (!Array.isArray(raw)) {
      this.#problems.add(path, complaints.wrongType('a list'), raw ?? null);
      return undefined;
    }
    const { minItems: least = 0, maxItems: most = Infinity } = (schema.meta() ?? {}) as ListBounds;
    if (raw.length < least || raw.length > most) {
      this.#problems.add(path, complaints.count(least, most, raw.length));
      if (raw.length > most) return undefined;
    }
    // Unlike map, from does not skip holes.
    return Array.from(raw, (item, index) => this.read(schema.element, item ?? null, [...path, index]));
  }

  #readRecord(schema: z.ZodRecord, raw: unknown, path: Path): unknown {
    const mapping = this.#mapping(raw, path, []);
    if (mapping === undefined) return undefined;
    const result: Record<string, unknown> = Object.create(null) as Record<string, unknown>;
    for (const [key, value] of Object.entries(mapping)) {
      const name = readText(key, MAX_NAME);
      if (name instanceof Complaint) this.#problems.addKey([...path, key], name);
      else if (name in Object.prototype) this.#problems.addKey([...path, key], complaints.forbiddenKey(name));
      else result[name] = this.read(schema.valueType, value, [...path, key]);
    }
    return result;
  }

  #readKind(schema: z.ZodDiscriminatedUnion, raw: unknown, path: Path): unknown {
    const options = new Map<string, z.ZodObject>();
    for (const option of schema.options as readonly z.ZodObject[]) {
      options.set(String((option.shape.kind as z.ZodLiteral).value), option);
    }
    const kinds = [...options.keys()];
    const mapping = this.#mapping(raw, path, ['kind']);
    if (mapping === undefined) return undefined;
    const chosen = typeof mapping.kind === 'string' ? options.get(mapping.kind) : undefined;
    if (chosen === undefined) {
      this.#reportKind(mapping.kind, kinds, [...path, 'kind']);
      return this.#readCommon([...options.values()], mapping, path);
    }
    const known = Object.keys(chosen.shape);
    const strangers = Object.keys(mapping).filter((key) => !Object.hasOwn(chosen.shape, key));
    for (const key of strangers) {
      const owners = kinds.filter((kind) => Object.hasOwn(options.get(kind)!.shape, key));
      const elsewhere =
        owners.length === 0 ? null : `belongs to kind ${owners.join(' or ')}, not to ${String(mapping.kind)}`;
      this.#unknownKey(key, path, known, elsewhere);
    }
    return this.#readShape(chosen, mapping, path, meantBy(strangers, known));
  }

  #reportKind(kind: unknown, kinds: readonly string[], path: Path): void {
    if (kind === undefined)
      this.#problems.add(path, complaints.missingKey(`write one of ${kinds.join(', ')}`));
    else if (typeof kind !== 'string')
      this.#problems.add(path, complaints.wrongType(`one of ${kinds.join(', ')}`), kind);
    else this.#problems.add(path, complaints.unknownChoice('kind', kind, kinds));
  }

  /** The kind is not known: reads the keys that mean the same in whichever kind has them. */
  #readCommon(
    options: readonly z.ZodObject[],
    mapping: Readonly<Record<string, unknown>>,
    path: Path,
  ): unknown {
    const result: Record<string, unknown> = {};
    const known = [...new Set(options.flatMap((option) => Object.keys(option.shape)))];
    for (const [key, value] of Object.entries(mapping)) {
      const owner = options.find((option) => Object.hasOwn(option.shape, key));
      if (owner === undefined) this.#unknownKey(key, path, known, null);
      else if (key !== 'kind') result[key] = this.read(owner.shape[key], value, [...path, key]);
    }
    return result;
  }
}

/** The known keys that misspelt ones stand for. */
function meantBy(strangers: readonly string[], known: readonly string[]): Set<string> {
  return new Set(strangers.flatMap((key) => nearestWord(key, known) ?? []));
}

/** Unions here are told apart by the form of the value: a list, a mapping or a scalar. */
function optionFor(schema: z.ZodUnion, raw: unknown): z.core.$ZodType {
  const fits = (option: z.core.$ZodType) =>
    Array.isArray(raw)
      ? option instanceof z.ZodArray
      : isMapping(raw)
        ? option instanceof z.ZodObject
        : !(option instanceof z.ZodArray || option instanceof z.ZodObject);
  return schema.options.find(fits) ?? schema.options[0];
}
