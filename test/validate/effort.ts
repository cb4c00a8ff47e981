/** How much work the long statistical checks do: all of it, or a twentieth with `--quick`. */
export const QUICK = process.env.VALIDATE_QUICK === '1';

/** Samples or histories of a check. */
export function effort(full: number): number {
  return QUICK ? Math.ceil(full / 20) : full;
}
