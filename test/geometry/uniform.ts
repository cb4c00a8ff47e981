/** Uniform numbers for tests of the geometry, from a seed. */
import seedrandom from 'seedrandom';

export function uniforms(seed: string): () => number {
  return seedrandom.alea(seed);
}
