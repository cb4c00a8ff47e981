/** The door of the materials folder. */
export type { Constituent, Material } from './material.js';
export { MaterialError, type MaterialErrorCode } from './errors.js';
export {
  absorptionEdges,
  coefficientArrays,
  elementCoefficients,
  fillCoefficients,
  materialCoefficients,
  type AbsorptionEdge,
  type CoefficientArrays,
  type Coefficients,
  type Composition,
  type EdgeSide,
} from './cross-sections.js';
export {
  HC_KEV_ANGSTROM,
  formFactor,
  formFactorAt,
  incoherentFunction,
  incoherentFunctionAt,
  type FormFactor,
  type IncoherentFunction,
} from './scattering-factors.js';
export { comptonProfiles, type ComptonProfiles, type ShellProfile } from './compton-profiles.js';
