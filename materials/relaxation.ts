/**
 * How a vacancy in the K shell or an L subshell is filled: the photons and further vacancies that follow.
 * Vacancies are followed in K, L1, L2 and L3; a vacancy further out is dropped, its energy stays on the spot.
 */
import { dataTable } from './data-table.js';
import { elementOf } from './elements.js';

export type InnerShell = 'K' | 'L1' | 'L2' | 'L3';

/** Index of a followed shell in the order K, L1, L2, L3; −1: no vacancy, or one further out. */
export type ShellIndex = -1 | 0 | 1 | 2 | 3;

export interface Transition {
  /** Share of the transitions that fill this shell. */
  readonly probability: number;
  /** Energy of the photon: difference of the binding energies of the two shells; 0: non-radiative. */
  readonly photonKeV: number;
  readonly vacancyA: ShellIndex;
  /** Second vacancy of a non-radiative transition. */
  readonly vacancyB: ShellIndex;
}

export interface ShellRelaxation {
  readonly name: InnerShell;
  /** Binding energy, which is also XCOM's absorption edge. */
  readonly bindingKeV: number;
  /** Most probable first; the probabilities add up to 1. */
  readonly transitions: readonly Transition[];
}

export interface Relaxation {
  /** The shells among K, L1, L2, L3 the element has, in that order (so that index = ShellIndex). */
  readonly shells: readonly ShellRelaxation[];
}

const SHELL_NAMES: readonly InnerShell[] = ['K', 'L1', 'L2', 'L3'];
const cache = new Map<number, Relaxation>();

/**
 * Relaxation of the inner shells of element z (1–100). Energy is conserved by book-keeping: a vacancy holds its
 * binding energy, a photon and the vacancies left take their part, the rest deposits on the spot.
 * Source: EADL97, K line shares of Scofield 1974, binding energies of Larkins 1977; see data/README.md.
 * @throws MaterialError for another z
 */
export function relaxation(z: number): Relaxation {
  let found = cache.get(z);
  if (!found) {
    found = readRelaxation(z);
    cache.set(z, found);
  }
  return found;
}

/** Share of the vacancies of a shell of element z that are filled with emission of a photon; 0 without the shell. */
export function fluorescenceYield(z: number, shell: InnerShell): number {
  const found = relaxation(z).shells.find(({ name }) => name === shell);
  if (!found) return 0;
  return found.transitions.reduce(
    (sum, { probability, photonKeV }) => (photonKeV > 0 ? sum + probability : sum),
    0,
  );
}

function readRelaxation(z: number): Relaxation {
  elementOf(z); // refuses any other z
  const table = dataTable('relaxation');
  const numbers = table.getChild('z')!.toArray() as Uint8Array;
  const value = (column: string, row: number) => table.getChild(column)!.get(row) as number;
  const shells: { name: InnerShell; bindingKeV: number; transitions: Transition[] }[] = [];
  for (let row = numbers.indexOf(z); numbers[row] === z; row++) {
    const index = value('shell', row);
    shells[index] ??= { name: SHELL_NAMES[index], bindingKeV: value('binding_keV', row), transitions: [] };
    shells[index].transitions.push({
      probability: value('probability', row),
      photonKeV: value('photon_keV', row),
      vacancyA: value('vacancy_a', row) as ShellIndex,
      vacancyB: value('vacancy_b', row) as ShellIndex,
    });
  }
  return { shells };
}
