/**
 * Atomic relaxation: a K or L vacancy is followed down through radiative and non-radiative transitions (Coster–Kronig
 * included) until nothing above the cutoff can come out. Photons are isotropic; all energy that does not leave as a
 * photon above the cutoff stays where the atom is.
 */
import type { Relaxation } from '../../materials/index.js';
import { nextUniform, type StreamState } from '../random.js';
import type { Secondaries } from './secondaries.js';

/** Vacancies of one cascade: each transition opens at most two, in outer shells. */
const MAX_VACANCIES = 16;

/** Transitions of all shells of a problem; shells are numbered over all elements. */
export interface RelaxationTables {
  /** Transitions of shell i are numbers first[i] to first[i + 1] − 1. */
  readonly first: Int32Array;
  readonly cumulative: Float64Array;
  /** 0: non-radiative. */
  readonly photonKeV: Float64Array;
  /** Shells left vacant, −1 for a shell that is not followed. */
  readonly vacancyA: Int32Array;
  readonly vacancyB: Int32Array;
  readonly bindingKeV: Float64Array;
}

/** Stands for an L shell a light element does not have. */
const NO_SHELL = { bindingKeV: 0, transitions: [] };

/** Concatenates the shells of elements; shell s of element e is number 4 e + s (K, L1, L2, L3). */
export function makeRelaxationTables(elements: readonly Relaxation[]): RelaxationTables {
  const shells = elements.flatMap((element, e) =>
    [0, 1, 2, 3].map((s) => ({ shell: element.shells[s] ?? NO_SHELL, offset: 4 * e })),
  );
  const transitions = shells.flatMap(({ shell, offset }) => {
    let cumulative = 0;
    return shell.transitions.map((transition) => ({
      ...transition,
      cumulative: (cumulative += transition.probability),
      offset,
    }));
  });
  const shared = (length: number) => new Float64Array(new SharedArrayBuffer(8 * length));
  const sharedInt = (length: number) => new Int32Array(new SharedArrayBuffer(4 * length));
  const tables = {
    first: sharedInt(shells.length + 1),
    cumulative: shared(transitions.length),
    photonKeV: shared(transitions.length),
    vacancyA: sharedInt(transitions.length),
    vacancyB: sharedInt(transitions.length),
    bindingKeV: shared(shells.length),
  };
  shells.forEach(({ shell }, i) => {
    tables.bindingKeV[i] = shell.bindingKeV;
    tables.first[i + 1] = tables.first[i] + shell.transitions.length;
  });
  transitions.forEach((transition, i) => {
    tables.cumulative[i] = transition.cumulative;
    tables.photonKeV[i] = transition.photonKeV;
    tables.vacancyA[i] = transition.vacancyA < 0 ? -1 : transition.offset + transition.vacancyA;
    tables.vacancyB[i] = transition.vacancyB < 0 ? -1 : transition.offset + transition.vacancyB;
  });
  return tables;
}

const vacancies = new Int32Array(MAX_VACANCIES);

/**
 * Relaxes a vacancy in `shell`; photons of at least `cutoffKeV` go to `secondaries`.
 *
 * @param availableKeV energy of the absorbed photon: an edge and a binding energy from two tables differ by some eV,
 *   and no more than this may come out
 * @returns energy that left as photons, keV
 */
export function relax(
  tables: RelaxationTables,
  shell: number,
  availableKeV: number,
  cutoffKeV: number,
  secondaries: Secondaries,
  random: StreamState,
): number {
  let emittedKeV = 0;
  let open = 1;
  vacancies[0] = shell;
  while (open > 0) {
    const vacancy = vacancies[--open];
    if (tables.bindingKeV[vacancy] < cutoffKeV) continue;
    let i = tables.first[vacancy];
    const end = tables.first[vacancy + 1] - 1;
    if (i > end) continue;
    const u = nextUniform(random);
    while (i < end && u >= tables.cumulative[i]) i++;
    const photonKeV = tables.photonKeV[i];
    if (photonKeV >= cutoffKeV && emittedKeV + photonKeV <= availableKeV) {
      emittedKeV += photonKeV;
      secondaries.push(photonKeV, 2 * nextUniform(random) - 1, 0);
    }
    if (open + 2 > MAX_VACANCIES) throw new Error(`more than ${MAX_VACANCIES} vacancies in one atom`);
    if (tables.vacancyA[i] >= 0) vacancies[open++] = tables.vacancyA[i];
    if (tables.vacancyB[i] >= 0) vacancies[open++] = tables.vacancyB[i];
  }
  return emittedKeV;
}
