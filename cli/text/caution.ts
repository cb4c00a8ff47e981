/** What figures are shown with. */

export const CAUTION =
  'These figures come from an idealised slab model. They support design; they replace no measurement, no local ' +
  'code and no qualified expert.';

/** For narrow beams. */
export const NARROW_BEAM_CAUTION =
  'Thicknesses are for a narrow beam, in which scattered photons count as removed; a real shield lets more ' +
  'through. These figures support design; they replace no measurement, no local code and no qualified expert.';
