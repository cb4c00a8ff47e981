/** Optical length of a free flight: −ln u. */
import { LOG_INVERSE, LOG_NEGATIVE, POWER_OF_TWO } from './lookup-tables.js';
import { ALEA_CARRY, nextUniform, type StreamState } from './random.js';

const doubleView = new Float64Array(1);
const wordView = new Uint32Array(doubleView.buffer);

/**
 * Draws −ln u by the bits of u: exponent times ln 2, a table over the top of the mantissa, and a series for the rest
 * (its error is below 1e-14). A second draw fills the bits of a small u, so that there is no longest flight below
 * 43 mean free paths.
 */
export function nextOpticalLength(random: StreamState): number {
  let u = nextUniform(random);
  if (u < 1 / 1024) u += (nextUniform(random) + 0.5 * ALEA_CARRY) * ALEA_CARRY;
  doubleView[0] = u;
  const word = wordView[1];
  const exponent = 1023 - (word >>> 20);
  const interval = (word >>> 12) & 255;
  const r = u * POWER_OF_TWO[exponent] * LOG_INVERSE[interval] - 1;
  return (
    LOG_NEGATIVE[interval] + exponent * Math.LN2 - r * (1 - r * (0.5 - r * (1 / 3 - r * (0.25 - r * 0.2))))
  );
}
