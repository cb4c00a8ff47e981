/** The K X rays that can escape from each detector, for those who look for their escape peaks. */
import { elementOf, relaxation, type Material } from '../materials/index.js';
import type { DetectorXRays, XRayGroup } from './result.js';
import type { Setup } from './setup.js';

/** Escape peaks of an element of which there is less are not to be seen. */
const LEAST_MASS_FRACTION = 1e-3;

/** Of every detector layer that has X rays above the cutoff. */
export function detectorXRays({ stack, physics }: Setup): DetectorXRays[] {
  if (!physics.fluorescence) return [];
  return stack.flatMap(({ name, material, detector }) => {
    if (detector === null || material === null) return [];
    const groups = kGroups(material, physics.cutoffKeV);
    return groups.length === 0 ? [] : [{ layer: name, groups }];
  });
}

/** Kα and Kβ of each element, with the energies and shares of their lines. */
function kGroups({ constituents }: Material, cutoffKeV: number): XRayGroup[] {
  return constituents.flatMap(({ z, massFraction }) => {
    const shell = relaxation(z).shells.find(({ name }) => name === 'K');
    if (!shell || massFraction < LEAST_MASS_FRACTION) return [];
    const lines = shell.transitions.filter(({ photonKeV }) => photonKeV > cutoffKeV);
    return (['Ka', 'Kb'] as const).flatMap((series) => {
      // A K vacancy filled from L2 or L3 gives Kα, one from further out Kβ.
      const own = lines.filter(({ vacancyA }) => (series === 'Ka') === vacancyA >= 0);
      const total = own.reduce((sum, { probability }) => sum + probability, 0);
      if (own.length === 0) return [];
      return {
        element: elementOf(z).symbol,
        series,
        edgeKeV: shell.bindingKeV,
        lines: own.map(({ photonKeV, probability }) => ({
          energyKeV: photonKeV,
          share: probability / total,
        })),
      };
    });
  });
}
