/** A nuclide as the one object that `thickset nuclide --json` prints. */
import type { Nuclide, NuclideLine } from '../materials/index.js';

/** Half-life in s, energies in keV; uncertainties are standard ones, null where the evaluation gives none. */
export function nuclideObject(nuclide: Nuclide, lines: readonly NuclideLine[]): Record<string, unknown> {
  return {
    name: nuclide.name,
    aliases: nuclide.aliases,
    half_life_s: nuclide.halfLifeS,
    sources: nuclide.evaluations,
    note: nuclide.note,
    members: nuclide.members.map(({ nuclide: name, perDecay }) => ({ nuclide: name, per_decay: perDecay })),
    lines: lines.map((line) => ({
      energy_keV: line.energyKeV,
      energy_uncertainty_keV: line.energyUncertaintyKeV,
      per_decay: line.perDecay,
      per_decay_uncertainty: line.perDecayUncertainty,
      kind: line.kind,
      transition: line.transition,
      decay_of: line.emitter,
      origin: line.origin,
      source: line.source,
    })),
  };
}
