/** Small tables that stand in for calls of the maths library in the history loops. */

/** Steps of the table of cos over half a turn. */
export const AZIMUTH_STEPS = 1024;
/** cos(π i / steps), for an azimuth uniform over half a turn (the sign of the sine is free by symmetry). */
export const AZIMUTH_COSINE = Float64Array.from({ length: AZIMUTH_STEPS + 2 }, (_, i) =>
  i === AZIMUTH_STEPS / 2 ? 0 : Math.cos((Math.PI * Math.min(i, AZIMUTH_STEPS)) / AZIMUTH_STEPS),
);

/** Intervals of the mantissa in the table of logarithms. */
export const LOG_STEPS = 256;
/** 1 / c and −ln c at the middle c of each interval of [1, 2). */
export const LOG_INVERSE = Float64Array.from(
  { length: LOG_STEPS },
  (_, i) => 1 / (1 + (i + 0.5) / LOG_STEPS),
);
export const LOG_NEGATIVE = LOG_INVERSE.map((inverse) => Math.log(inverse));
/** 2^i: turns a double of exponent −i into one of [1, 2). */
export const POWER_OF_TWO = Float64Array.from({ length: 128 }, (_, i) => 2 ** i);
