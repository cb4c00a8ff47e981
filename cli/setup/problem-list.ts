/** Collects everything that is wrong with one setup file, each with its place, so that all is told at once. */
import { SetupError, type Complaint, type Path, type Place, type Problem } from '../errors.js';
import { showValue } from '../show.js';

function placeKey(path: Path): string {
  return path.join('\u0000');
}

/** Where keys and values stand in the text of a setup file. */
export class Places {
  readonly #values = new Map<string, Place>();
  readonly #keys = new Map<string, Place>();

  setValue(path: Path, place: Place): void {
    this.#values.set(placeKey(path), place);
  }

  setKey(path: Path, place: Place): void {
    this.#keys.set(placeKey(path), place);
  }

  key(path: Path): Place | null {
    return this.#keys.get(placeKey(path)) ?? this.value(path);
  }

  /** Place of the value, or of the nearest thing around it that stands in the text. */
  value(path: Path): Place | null {
    for (let length = path.length; length >= 0; length--) {
      const place = this.#values.get(placeKey(path.slice(0, length)));
      if (place !== undefined) return place;
    }
    return null;
  }
}

export class ProblemList {
  readonly fileName: string;
  /** Empty where the setup came as an object. */
  readonly places = new Places();
  readonly #problems: Problem[] = [];

  constructor(fileName: string) {
    this.fileName = fileName;
  }

  get isEmpty(): boolean {
    return this.#problems.length === 0;
  }

  /** A value that breaks a rule; `got` undefined: nothing to show. */
  add(path: Path, complaint: Complaint, got?: unknown): void {
    this.#push(path, complaint, got, this.places.value(path));
  }

  /** A key that should not be where it is. */
  addKey(path: Path, complaint: Complaint): void {
    this.#push(path, complaint, undefined, this.places.key(path));
  }

  /** A problem whose place is known although no path leads to it. */
  addAt(path: Path, complaint: Complaint, place: Place | null): void {
    this.#push(path, complaint, undefined, place);
  }

  #push(path: Path, complaint: Complaint, got: unknown, place: Place | null): void {
    const { code, rule, wayOut, showsValue } = complaint;
    const shown = showsValue && got !== undefined ? showValue(got) : null;
    this.#problems.push({ code, path, rule, got: shown, place, wayOut });
  }

  throwIfAny(): void {
    if (!this.isEmpty) throw new SetupError(this.fileName, this.#problems);
  }
}
