/**
 * The density effect on the stopping of electrons: R. M. Sternheimer's model of one oscillator per subshell
 * (Phys. Rev. 88 (1952) 851; R. M. Sternheimer, S. M. Seltzer and M. J. Berger, Phys. Rev. B 26 (1982) 6067,
 * equations 1–8), solved for the material itself instead of fitted, so that any composition and density will do.
 */
import { subshells } from './electron-data.js';
import { elementOf } from './elements.js';
import { electronsPerMass, isCompound, meanExcitationEv, type Matter } from './mean-excitation.js';

/** Plasma energy of 1 mol of electrons per cm³, eV (same paper, equation 3). */
const PLASMA_EV = 28.816;
/** H, He, N, O, F, Ne, P, S, Cl, Ar, Br, Kr, I, Xe, At, Rn: no conduction electrons as elements. */
const INSULATORS = new Set([1, 2, 7, 8, 9, 10, 15, 16, 17, 18, 35, 36, 53, 54, 85, 86]);

const NEWTON_STEPS = 60;
const BISECTIONS = 80;
/** Bounds of the factor by which binding energies are scaled; published ones lie between 1.3 and 3. */
const SCALE_LOW = 1e-3;
const SCALE_HIGH = 1e3;

/** Oscillators of a material; energies in units of its plasma energy, squared. */
export interface Oscillators {
  /** Share f of all electrons. */
  readonly share: Float64Array;
  readonly energySquared: Float64Array;
  /** Share of the conduction electrons; 0 in insulators. */
  readonly conduction: number;
}

/**
 * The oscillators of a material: subshells of its elements, binding energies scaled by the one factor that makes
 * the model give the material's mean excitation energy. Conduction electrons (in elements that conduct and their
 * alloys) are those of the least bound subshell; all electrons of compounds are bound.
 */
export function oscillators(material: Matter): Oscillators {
  const perMass = electronsPerMass(material);
  const plasmaEv = PLASMA_EV * Math.sqrt(material.densityGPerCm3 * perMass);
  const compound = isCompound(material);
  const shares: number[] = [];
  const energies: number[] = [];
  let conduction = 0;
  for (const { z, massFraction } of material.constituents) {
    const { electrons, bindingEv } = subshells(z);
    const perElectron = massFraction / elementOf(z).atomicWeight / perMass;
    const least = bindingEv.indexOf(Math.min(...bindingEv));
    const conducting = !compound && !INSULATORS.has(z);
    for (let i = 0; i < electrons.length; i++) {
      if (conducting && i === least) {
        conduction += perElectron * electrons[i];
      } else {
        shares.push(perElectron * electrons[i]);
        energies.push(bindingEv[i] / plasmaEv);
      }
    }
  }
  const share = Float64Array.from(shares);
  const logExcitation = Math.log(meanExcitationEv(material) / plasmaEv);
  const scale = bindingScale(share, energies, conduction, logExcitation);
  return { share, energySquared: Float64Array.from(energies, (energy) => (scale * energy) ** 2), conduction };
}

/** Solves ln I = Σ f ½ ln((ρ E)² + ⅔ f) + f_c ½ ln f_c for ρ; energies in units of the plasma energy. */
function bindingScale(
  share: Float64Array,
  energies: readonly number[],
  conduction: number,
  logExcitation: number,
): number {
  const conductionPart = conduction > 0 ? (conduction * Math.log(conduction)) / 2 : 0;
  let low = SCALE_LOW;
  let high = SCALE_HIGH;
  for (let step = 0; step < BISECTIONS; step++) {
    const middle = Math.sqrt(low * high);
    let sum = conductionPart;
    for (let i = 0; i < share.length; i++) {
      sum += (share[i] / 2) * Math.log((middle * energies[i]) ** 2 + (2 / 3) * share[i]);
    }
    if (sum > logExcitation) high = middle;
    else low = middle;
  }
  return low;
}

/**
 * The density-effect correction δ.
 *
 * @param betaSquared square of the electron's speed in units of that of light
 */
export function densityEffect(
  { share, energySquared, conduction }: Oscillators,
  betaSquared: number,
): number {
  const target = 1 / betaSquared - 1;
  const l2 = frequencySquared(share, energySquared, conduction, target);
  if (l2 === 0) return 0;
  let delta = conduction > 0 ? conduction * Math.log(1 + l2 / conduction) : 0;
  for (let i = 0; i < share.length; i++) {
    delta += share[i] * Math.log(1 + l2 / (energySquared[i] + (2 / 3) * share[i]));
  }
  return delta - l2 * (1 - betaSquared);
}

/**
 * The root l² of Σ f / (E² + l²) + f_c / l² = 1/β² − 1, or 0 below the threshold of insulators. The left side is
 * convex and falls, so Newton's method climbs to the root from any point below it, such as the largest root of a
 * single term.
 */
function frequencySquared(
  share: Float64Array,
  energySquared: Float64Array,
  conduction: number,
  target: number,
): number {
  let l2 = conduction / target;
  let atZero = 0;
  for (let i = 0; i < share.length; i++) {
    l2 = Math.max(l2, share[i] / target - energySquared[i]);
    atZero += share[i] / energySquared[i];
  }
  if (conduction === 0 && atZero <= target) return 0;
  for (let step = 0; step < NEWTON_STEPS; step++) {
    let excess = conduction > 0 ? conduction / l2 - target : -target;
    let slope = conduction > 0 ? -conduction / (l2 * l2) : 0;
    for (let i = 0; i < share.length; i++) {
      const term = share[i] / (energySquared[i] + l2);
      excess += term;
      slope -= term / (energySquared[i] + l2);
    }
    const next = l2 - excess / slope;
    if (Math.abs(next - l2) <= 1e-12 * next) return next;
    l2 = next;
  }
  return l2;
}
