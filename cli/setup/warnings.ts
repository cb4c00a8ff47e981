/** Everything in a setup that is allowed but hardly meant: one closed vocabulary. */
import type { Warning } from '../../engine/result.js';

export type SetupWarningCode = 'doppler_without_binding' | 'point_time_limit';

export interface SetupWarning extends Warning {
  readonly code: SetupWarningCode;
}

const warning = (code: SetupWarningCode, message: string): SetupWarning => ({ code, message, count: 1 });

export const setupWarnings = {
  dopplerWithoutBinding: () =>
    warning('doppler_without_binding', 'physics.doppler has no effect with bound_incoherent: false'),
  pointTimeLimit: () =>
    warning(
      'point_time_limit',
      'run.time_limit of the base is not used in a sweep: give time_limit in the sweep file',
    ),
} as const;
