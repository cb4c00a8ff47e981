/** Limits on the command line: `ambient_dose <= 2.5 uSv/h`, `air_kerma at desk <= 1 uGy/h`. */
import type { DoseQuantity } from '../../engine/setup.js';
import { errors } from '../errors.js';
import { DOSE_QUANTITIES } from '../setup/schema-tally.js';
import { nearestWord } from '../../materials/nearest.js';

/** A dose rate that must not be passed. */
export interface RateLimit {
  readonly quantity: DoseQuantity;
  /** Dose point; null: all of them. */
  readonly place: string | null;
  /** In µGy/h or µSv/h. */
  readonly microPerHour: number;
}

const EXAMPLE = 'write it as in "ambient_dose <= 2.5 uSv/h" or "ambient_dose at desk <= 2.5 uSv/h"';
const FORM = /^\s*(\S+)(?:\s+at\s+(.+?))?\s*(?:<=|≤|<)\s*([-+\d.eE]+)\s*([pnuµμmk]?)(Gy|Sv)\s*\/\s*h\s*$/;
const PREFIX: Readonly<Record<string, number>> = {
  p: 1e-6,
  n: 1e-3,
  u: 1,
  µ: 1,
  μ: 1,
  m: 1e3,
  '': 1e6,
  k: 1e9,
};

/** Reads a limit. @throws ThicksetError usage */
export function parseLimit(text: string): RateLimit {
  const match = FORM.exec(text);
  if (match === null) throw errors.usage(`--limit "${text}": cannot be understood`, EXAMPLE);
  const [, name, place, number, prefix, unit] = match;
  const quantity = DOSE_QUANTITIES.find((known) => known === name);
  if (quantity === undefined) {
    const nearest = nearestWord(name, DOSE_QUANTITIES);
    const way = nearest === null ? `known: ${DOSE_QUANTITIES.join(', ')}` : `did you mean ${nearest}?`;
    throw errors.usage(`--limit "${text}": unknown dose quantity ${name}`, way);
  }
  const wanted = quantity === 'air_kerma' ? 'Gy' : 'Sv';
  if (unit !== wanted) throw errors.usage(`--limit "${text}": ${quantity} is given in ${wanted}/h`, EXAMPLE);
  const value = Number(number);
  if (!(value > 0 && Number.isFinite(value))) {
    throw errors.usage(`--limit "${text}": the limit must be more than 0`, EXAMPLE);
  }
  return { quantity, place: place ?? null, microPerHour: value * PREFIX[prefix] };
}

/** Reads a transmission, `1e-3` or `0.1 %`. @throws ThicksetError usage */
export function parseTransmission(text: string): number {
  const match = /^\s*([-+\d.eE]+)\s*(%?)\s*$/.exec(text);
  const value = match === null ? NaN : Number(match[1]) / (match[2] === '%' ? 100 : 1);
  if (!(value > 0 && value < 1)) {
    throw errors.usage(
      `--transmission "${text}": must be a share between 0 and 1`,
      'write it as in "1e-3" or "0.1 %"',
    );
  }
  return value;
}
