/**
 * Random streams. A batch owns one stream, addressed by (seed text, batch number) through seedrandom's alea
 * generator, so a batch gives the same histories in whatever worker it runs.
 *
 * The library seeds the generator; its published recurrence is then advanced on a state of four numbers that the
 * history loop keeps in locals: a call per number costs more than the rest of a flight. A test holds the recurrence
 * against the library, number by number.
 */
import seedrandom from 'seedrandom';

/** Multiplier and carry weight of the alea recurrence (Johannes Baagøe 2010). */
export const ALEA_MULTIPLIER = 2091639;
export const ALEA_CARRY = 2.3283064365386963e-10; // 2^-32

/** State of one stream: s0, s1, s2, carry. */
export type StreamState = Float64Array;

/** Puts the first state of the stream of `batch` into `state` (length 4). */
export function seedStream(state: StreamState, seed: string, batch: number): void {
  const start = seedrandom.alea(`${seed}/${batch}`, { state: true }).state() as unknown as AleaState;
  state[0] = start.s0;
  state[1] = start.s1;
  state[2] = start.s2;
  state[3] = start.c;
}

interface AleaState {
  readonly s0: number;
  readonly s1: number;
  readonly s2: number;
  readonly c: number;
}

/** The next uniform of the stream: a multiple of 2^-32 in [0, 1). */
export function nextUniform(state: StreamState): number {
  const t = ALEA_MULTIPLIER * state[0] + state[3] * ALEA_CARRY;
  const carry = Math.floor(t);
  const u = t - carry;
  state[0] = state[1];
  state[1] = state[2];
  state[2] = u;
  state[3] = carry;
  return u;
}

/** A uniform in (0, 1), never 0: the next one moved to the middle of its 2^-32 step. */
export function nextOpenUniform(state: StreamState): number {
  return nextUniform(state) + 0.5 * ALEA_CARRY;
}
