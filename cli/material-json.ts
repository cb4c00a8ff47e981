/** A material as the one object that `thickset material --json` prints. */
import type { AttenuationRow, MaterialFacts } from './material-facts.js';
import { NARROW_BEAM_CAUTION } from './text/caution.js';

/** Lengths in cm, coefficients in the units of their names. */
export function materialObject(facts: MaterialFacts): Record<string, unknown> {
  return {
    name: facts.name,
    aliases: facts.aliases,
    description: facts.description,
    density_g_cm3: facts.densityGPerCm3,
    density_source: facts.densitySource,
    composition: facts.elements.map(({ symbol, z, massFraction }) => ({
      element: symbol,
      z,
      mass_fraction: massFraction,
    })),
    composition_source: facts.compositionSource,
    absorption_edges: facts.edges.map(({ symbol, shell, energyKeV }) => ({
      element: symbol,
      shell,
      energy_keV: energyKeV,
    })),
    attenuation: facts.attenuation.map(attenuationObject),
    warnings: [NARROW_BEAM_CAUTION],
  };
}

function attenuationObject(row: AttenuationRow): Record<string, unknown> {
  return {
    energy_keV: row.energyKeV,
    mass_attenuation_cm2_g: { ...row.coefficients },
    linear_attenuation_per_cm: row.linear,
    mean_free_path_cm: row.meanFreePathCm,
    half_value_cm: row.halfValueCm,
    tenth_value_cm: row.tenthValueCm,
  };
}
