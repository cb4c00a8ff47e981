/**
 * Numbers as people read them. A figure with a standard error is written with the error rounded to two significant
 * figures and the value to the same decimal place (the practice of the GUM, JCGM 100:2008, 7.2.6), so that no digit
 * is shown that the run does not support.
 */

/** A figure cut in two for aligned columns; `error` is empty where there is none to show. */
export interface FigureText {
  readonly value: string;
  readonly error: string;
}

/** Fixed notation from 1e-4 up to below 1e6; powers of ten outside. */
const LOWEST_FIXED_EXPONENT = -4;
const HIGHEST_FIXED_EXPONENT = 5;

/** A relative error below this is the rounding of a sum, not a statistical error. */
const ROUNDING = 1e-12;

export function exponentOf(x: number): number {
  return x === 0 ? 0 : Number(x.toExponential().split('e')[1]);
}

/** x · 10^power, correctly rounded (multiplying by a power of ten would add rounding errors of its own). */
function shiftDecimal(x: number, power: number): number {
  const [mantissa, exponent] = x.toExponential().split('e');
  return Number(`${mantissa}e${Number(exponent) + power}`);
}

/** x rounded to a multiple of 10^lastDigit. */
function roundAt(x: number, lastDigit: number): number {
  return shiftDecimal(Math.round(shiftDecimal(x, -lastDigit)), lastDigit);
}

function withoutMinusZero(text: string): string {
  return /^-0(\.0*)?$/.test(text) ? text.slice(1) : text;
}

/** Value and standard error, e.g. 0.34121 and 0.00048, or 1.234e-6 and 0.056e-6 with one power of ten for both. */
export function formatFigure(mean: number | null, stdError: number | null): FigureText {
  if (mean === null || !Number.isFinite(mean)) {
    return { value: 'unknown', error: '' };
  }
  if (stdError === null || !Number.isFinite(stdError) || stdError <= ROUNDING * Math.abs(mean)) {
    return { value: formatNumber(mean), error: '' };
  }
  const error = Number(stdError.toPrecision(2));
  const lastDigit = exponentOf(error) - 1;
  const value = roundAt(mean, lastDigit);
  const leading = Math.max(value === 0 ? -Infinity : exponentOf(value), exponentOf(error));
  if (leading >= LOWEST_FIXED_EXPONENT && leading <= HIGHEST_FIXED_EXPONENT) {
    const decimals = Math.max(0, -lastDigit);
    return { value: withoutMinusZero(value.toFixed(decimals)), error: error.toFixed(decimals) };
  }
  const power = `e${leading}`;
  const decimals = leading - lastDigit;
  return {
    value: withoutMinusZero(shiftDecimal(value, -leading).toFixed(decimals)) + power,
    error: shiftDecimal(error, -leading).toFixed(decimals) + power,
  };
}

/** A number without error, to at most `digits` significant figures, trailing zeros dropped. */
export function formatNumber(x: number, digits = 4): string {
  const rounded = Number(x.toPrecision(digits));
  const exponent = exponentOf(rounded);
  if (rounded === 0 || (exponent >= LOWEST_FIXED_EXPONENT && exponent <= HIGHEST_FIXED_EXPONENT)) {
    return String(rounded === 0 ? 0 : rounded);
  }
  const [mantissa, power] = rounded.toExponential().split('e');
  return `${mantissa}e${Number(power)}`;
}

/** A relative error in per cent to two significant figures: 0.43 %, 7.0 %, 120 %. */
export function formatPercent(fraction: number | null): string {
  if (fraction === null || !Number.isFinite(fraction)) {
    return 'unknown';
  }
  const percent = Number((100 * fraction).toPrecision(2));
  return percent > 999 ? '> 999 %' : `${percent.toFixed(Math.max(0, 1 - exponentOf(percent)))} %`;
}

/** A whole number with its thousands set apart: 1,250,000. */
export function formatCount(n: number): string {
  return Math.round(n)
    .toString()
    .replace(/\B(?=(\d{3})+$)/g, ',');
}

/** A time in the units people would say it in: 0.42 s, 12 s, 10 min, 3 min 20 s, 2 h 5 min. */
export function formatDuration(seconds: number): string {
  if (seconds < 9.95) {
    return `${formatNumber(seconds, 2)} s`;
  }
  const whole = Math.round(seconds);
  const [hours, minutes] = [Math.floor(whole / 3600), Math.floor((whole % 3600) / 60)];
  const parts: [number, string][] =
    hours > 0
      ? [
          [hours, 'h'],
          [minutes, 'min'],
        ]
      : [
          [minutes, 'min'],
          [whole % 60, 's'],
        ];
  return parts
    .filter(([amount]) => amount > 0)
    .map(([amount, unit]) => `${amount} ${unit}`)
    .join(' ');
}

/** Standard error over value, both known and the value not 0; null otherwise. */
export function relativeError(mean: number | null, stdError: number | null): number | null {
  return mean === null || stdError === null || mean === 0 ? null : Math.abs(stdError / mean);
}

const PREFIXES = ['', 'k', 'M', 'G', 'T'];

/** An activity with the prefix that keeps it below 1000: 37 kBq. */
export function formatActivity(becquerel: number): string {
  const step = Math.min(PREFIXES.length - 1, Math.max(0, Math.floor(exponentOf(becquerel) / 3)));
  return `${formatNumber(becquerel / 1000 ** step)} ${PREFIXES[step]}Bq`;
}
