/** Lengths as people read them. */
import { formatNumber } from '../text/figure-format.js';

/** A thickness with its standard error, cm. */
export interface Thickness {
  readonly mean: number;
  readonly stdError: number;
}

/** `6.4 mm`, `63.5 cm`: millimetres below a centimetre. */
export function lengthText(cm: number): string {
  if (cm === 0) return '0 cm';
  return cm < 1 ? `${formatNumber(cm * 10)} mm` : `${formatNumber(cm)} cm`;
}
