/** What every figure for narrow beams is shown with. */

export const NARROW_BEAM_CAUTION =
  'Thicknesses are for a narrow beam, in which scattered photons count as removed; a real shield lets more ' +
  'through. These figures support design; they replace no measurement, no local code and no qualified expert.';
