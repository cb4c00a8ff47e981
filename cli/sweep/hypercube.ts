/**
 * Latin hypercube samples: the range of each parameter is cut into as many equal parts as there are samples, and each
 * part is hit exactly once (M. D. McKay, R. J. Beckman and W. J. Conover, Technometrics 21 (1979) 239).
 */
import seedrandom from 'seedrandom';

/** Shares 0–1 of one parameter, one for each sample; they depend on the seed, the name and the number alone. */
export function latinShares(samples: number, seed: string, name: string): number[] {
  const random = seedrandom.alea(`${seed}/hypercube/${name}`);
  const parts = Array.from({ length: samples }, (_, i) => i);
  for (let i = samples - 1; i > 0; i--) {
    const other = Math.floor(random() * (i + 1));
    [parts[i], parts[other]] = [parts[other], parts[i]];
  }
  return parts.map((part) => (part + random()) / samples);
}
