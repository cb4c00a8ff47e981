/**
 * YAML text into plain values with the place of each. Setup files may come from strangers, so only what a setup
 * needs is taken: mappings with text keys, lists, and scalars of the YAML 1.2 core schema. Anchors, aliases, merge
 * keys, tags and deep nesting are refused; they are the means to blow up or to trick a reader.
 */
import {
  isAlias,
  isMap,
  isScalar,
  isSeq,
  Lexer,
  LineCounter,
  parseDocument,
  Parser,
  type Document,
  type Node,
  type Pair,
} from 'yaml';
import { complaints, type Path, type Place } from '../errors.js';
import { clip } from '../show.js';
import type { ProblemList } from './problem-list.js';

export const MAX_SETUP_BYTES = 262_144;
export const MAX_SETUP_SIZE = '256 KiB';
/** A setup is at most seven levels deep, and the library's parser stacks up to three entries per level. */
const MAX_PARSER_STACK = 60;
/** Names that mean something to JavaScript objects. */
const FORBIDDEN_KEYS = new Set(['__proto__', 'constructor', 'prototype']);

/** The value of the text; undefined if it cannot be read, and `problems` says why. */
export function readYaml(fileText: string, problems: ProblemList): unknown {
  const text = fileText.replace(/^\ufeff/, '');
  if (text.length > MAX_SETUP_BYTES) {
    problems.add([], complaints.tooLarge(MAX_SETUP_SIZE));
    return undefined;
  }
  if (isTooDeep(text)) {
    problems.add([], complaints.tooDeep());
    return undefined;
  }
  const lines = new LineCounter();
  const document = parseDocument(text, {
    version: '1.2',
    schema: 'core',
    // The library's own search for repeated keys takes quadratic time; TreeReader does it in linear time.
    uniqueKeys: false,
    prettyErrors: false,
    logLevel: 'error',
    lineCounter: lines,
  });
  const reader = new TreeReader(lines, problems);
  if (!reader.reportSyntax(document)) return undefined;
  return reader.read(document.contents, []);
}

/** The composer of the library recurses and dies on deep nesting; its parser does not, and knows the depth. */
function isTooDeep(text: string): boolean {
  const parser = new Parser();
  for (const lexeme of new Lexer().lex(text)) {
    // The generator has to be drained for the parser to move on.
    for (const token of parser.next(lexeme)) void token;
    if (parser.stack.length > MAX_PARSER_STACK) return true;
  }
  return false;
}

/** The library speaks to programmers; these are the messages a setup's author is likely to meet. */
const SYNTAX_WORDS: Readonly<Record<string, { what: string; wayOut: string | null }>> = {
  TAB_AS_INDENT: { what: 'a tab cannot indent', wayOut: 'indent with spaces' },
  MULTIPLE_DOCS: {
    what: 'the file holds more than one document',
    wayOut: 'remove the lines "---" and "..."',
  },
  BAD_INDENT: {
    what: 'wrong indentation, or a bracket that is not closed above',
    wayOut: 'indent all keys of a section alike',
  },
  MISSING_CHAR: { what: 'a quote, a bracket or a comma is missing', wayOut: null },
  BLOCK_AS_IMPLICIT_KEY: {
    what: 'a second "key:" where a value should be',
    wayOut: 'begin a new line with the indentation of its neighbours, or put the value in quotes',
  },
};

class TreeReader {
  readonly #lines: LineCounter;
  readonly #problems: ProblemList;

  constructor(lines: LineCounter, problems: ProblemList) {
    this.#lines = lines;
    this.#problems = problems;
  }

  /** Reports what is no YAML, or a newer or older YAML; true if the tree can be read. */
  reportSyntax(document: Document.Parsed): boolean {
    let last = -1;
    for (const error of document.errors) {
      // One slip often breaks several rules at one place; the first says most.
      if (error.pos[0] === last) continue;
      last = error.pos[0];
      const words = SYNTAX_WORDS[error.code];
      const complaint = complaints.notYaml(words?.what ?? clip(error.message, 200), words?.wayOut ?? null);
      this.#problems.addAt([], complaint, this.#place(error.pos[0]));
    }
    const yaml = document.directives.yaml;
    if (yaml.explicit === true && yaml.version !== '1.2') {
      this.#problems.addAt(
        [],
        complaints.forbiddenYaml(`YAML ${yaml.version} is`, 'remove the line "%YAML"'),
        { line: 1, column: 1 },
      );
    }
    return document.errors.length === 0;
  }

  read(node: Node | null, path: Path): unknown {
    if (node === null) return null;
    const place = this.#place(node.range?.[0] ?? 0);
    this.#problems.places.setValue(path, place);
    if (isAlias(node)) {
      this.#forbid(path, place, 'aliases (*name) are', 'write the value again');
      return undefined;
    }
    if (node.anchor !== undefined) {
      this.#forbid(path, place, 'anchors (&name) are', 'remove the anchor');
    }
    // A flow collection or block scalar carries a tag of the core schema only where the author wrote one.
    if (node.tag !== undefined) this.#forbid(path, place, 'tags (!name) are', 'remove the tag');
    if (isScalar(node)) return node.value;
    if (isSeq(node)) return node.items.map((item, index) => this.read(item as Node | null, [...path, index]));
    if (isMap(node)) return this.#readMap(node.items as Pair<Node | null, Node | null>[], path);
    return undefined;
  }

  #readMap(pairs: readonly Pair<Node | null, Node | null>[], path: Path): Record<string, unknown> {
    const result: Record<string, unknown> = {};
    const firstLines = new Map<string, number>();
    for (const { key: keyNode, value } of pairs) {
      const place = this.#place(keyNode?.range?.[0] ?? 0);
      const key = this.#readKey(keyNode, path, place);
      if (key === null) continue;
      const inner = [...path, key];
      const first = firstLines.get(key);
      if (first !== undefined) {
        this.#problems.addAt(inner, complaints.duplicateKey(first), place);
        continue;
      }
      firstLines.set(key, place.line);
      this.#problems.places.setKey(inner, place);
      // A key without a value: the place of the key is the best there is.
      this.#problems.places.setValue(inner, place);
      result[key] = this.read(value, inner);
    }
    return result;
  }

  /** The key as text, or null if it cannot be one. */
  #readKey(node: Node | null, path: Path, place: Place): string | null {
    if (isAlias(node) || node?.anchor !== undefined || node?.tag !== undefined) {
      this.#forbid(path, place, 'anchors, aliases and tags are', 'write the key alone');
      return null;
    }
    if (!isScalar(node) || typeof node.value === 'object' || typeof node.value === 'undefined') {
      this.#problems.addAt(path, complaints.badKey(), place);
      return null;
    }
    const key = typeof node.value === 'string' ? node.value : (node.source ?? String(node.value));
    if (key === '<<') {
      this.#forbid(path, place, 'merge keys (<<) are', 'write the keys out');
      return null;
    }
    if (FORBIDDEN_KEYS.has(key)) {
      this.#problems.addAt(path, complaints.forbiddenKey(key), place);
      return null;
    }
    return key;
  }

  #forbid(path: Path, place: Place, what: string, wayOut: string): void {
    this.#problems.addAt(path, complaints.forbiddenYaml(what, wayOut), place);
  }

  #place(offset: number): Place {
    const { line, col } = this.#lines.linePos(offset);
    return { line: Math.max(1, line), column: Math.max(1, col) };
  }
}
