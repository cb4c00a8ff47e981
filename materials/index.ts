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
export { materialFromFormula } from './compound.js';
export { elementBySymbol, elementOf, elements, findElement, type Element } from './elements.js';
export { parseFormula, type AtomCounts } from './formula.js';
export {
  findMaterial,
  materialFromMassFractions,
  namedMaterials,
  nearestMaterialName,
  resolveMaterial,
  type NamedMaterial,
} from './named-materials.js';
export {
  fluorescenceYield,
  relaxation,
  type InnerShell,
  type Relaxation,
  type ShellIndex,
  type ShellRelaxation,
  type Transition,
} from './relaxation.js';
export { SUBSHELL_COUNT, subshellShares } from './subshell-shares.js';
export { nearestWord } from './nearest.js';
export { bremsstrahlungSpectrum } from './bremsstrahlung-spectrum.js';
export {
  csdaRangeGPerCm2,
  electronStopping,
  radiationYield,
  type Matter,
  type StoppingPower,
} from './electrons.js';
export { meanExcitationEv } from './mean-excitation.js';
export {
  findNuclide,
  nearestNuclideName,
  nuclideLines,
  nuclides,
  type ChainMember,
  type LineKind,
  type Nuclide,
  type NuclideLine,
} from './nuclides.js';
export {
  airEnergyAbsorptionCm2PerG,
  airRadiatedShare,
  doseCoefficient,
  type DoseCoefficientQuantity,
} from './dose-coefficients.js';
