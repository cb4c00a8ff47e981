/**
 * Stopping of electrons from 1 keV to 20 MeV in any material: collision stopping power by Bethe's theory as in
 * ICRU Report 37 (1984), radiative stopping power, range and radiation yield of the continuous slowing down.
 *
 * No shell corrections, as in that report: below 10 keV in heavy elements the collision stopping power is too
 * low, by tens of per cent at 1 keV.
 */
import { densityEffect, oscillators, type Oscillators } from './density-effect.js';
import { MaterialError } from './errors.js';
import { electronsPerMass, meanExcitationEv, type Matter } from './mean-excitation.js';
import { elementRadiativeStopping } from './radiative-stopping.js';

export type { Matter } from './mean-excitation.js';

const MIN_ENERGY_KEV = 1;
const MAX_ENERGY_KEV = 20_000;
const ELECTRON_REST_KEV = 510.99895;
/** 2 π r_e² m c² N_A in MeV cm²/mol (CODATA 2018). */
const COLLISION_UNIT = 0.153537;
/** Intervals of the tables of range and yield, equal in ln T. */
const INTERVALS = 400;
const LOG_STEP = Math.log(MAX_ENERGY_KEV / MIN_ENERGY_KEV) / INTERVALS;
/** Gauss–Legendre nodes of order 2, as shares of an interval. */
const GAUSS = [0.5 - Math.sqrt(1 / 12), 0.5 + Math.sqrt(1 / 12)];

/** Mass stopping powers in MeV cm²/g. */
export interface StoppingPower {
  readonly collision: number;
  readonly radiative: number;
}

/** What is worked out once per material. */
interface Model {
  readonly excitationKeV: number;
  readonly electronsPerMass: number;
  readonly oscillators: Oscillators;
}

/** Logarithms of range (g/cm²) and radiation yield at the ends of the intervals. */
interface RangeTable {
  readonly logRange: Float64Array;
  readonly logYield: Float64Array;
}

const models = new WeakMap<Matter, Model>();
const rangeTables = new WeakMap<Matter, RangeTable>();

/**
 * Collision and radiative stopping power of a material for electrons.
 *
 * @param energyKeV kinetic energy, 1–20 000 keV
 * @throws MaterialError for an energy or atomic number out of range
 */
export function electronStopping(material: Matter, energyKeV: number): StoppingPower {
  checkEnergy(energyKeV);
  let model = models.get(material);
  if (!model) {
    model = {
      excitationKeV: meanExcitationEv(material) / 1000,
      electronsPerMass: electronsPerMass(material),
      oscillators: oscillators(material),
    };
    models.set(material, model);
  }
  let radiative = 0;
  for (const { z, massFraction } of material.constituents) {
    radiative += massFraction * elementRadiativeStopping(z, energyKeV);
  }
  return { collision: collisionStopping(model, energyKeV), radiative };
}

/** ICRU 37, equations 2.12 and 2.13 for electrons: Bethe's theory with Møller's cross section. */
function collisionStopping(model: Model, energyKeV: number): number {
  const tau = energyKeV / ELECTRON_REST_KEV;
  const betaSquared = (tau * (tau + 2)) / (tau + 1) ** 2;
  const exchange = (1 - betaSquared) * (1 + tau ** 2 / 8 - (2 * tau + 1) * Math.LN2);
  const delta = densityEffect(model.oscillators, betaSquared);
  const number = 2 * Math.log(energyKeV / model.excitationKeV) + Math.log(1 + tau / 2) + exchange - delta;
  return ((COLLISION_UNIT * model.electronsPerMass) / betaSquared) * number;
}

/**
 * Range in the continuous slowing-down approximation, g/cm². Below 1 keV the stopping power is taken as 1/T,
 * which gives ESTAR's ranges at the low end of its table.
 *
 * @param energyKeV kinetic energy, 1–20 000 keV
 * @throws MaterialError for an energy or atomic number out of range
 */
export function csdaRangeGPerCm2(material: Matter, energyKeV: number): number {
  return interpolate(rangeTable(material, energyKeV).logRange, energyKeV);
}

/**
 * Radiation yield: the share of its energy that an electron gives off as bremsstrahlung while it comes to rest,
 * in the continuous slowing-down approximation.
 *
 * @param energyKeV kinetic energy, 1–20 000 keV
 * @throws MaterialError for an energy or atomic number out of range
 */
export function radiationYield(material: Matter, energyKeV: number): number {
  return interpolate(rangeTable(material, energyKeV).logYield, energyKeV);
}

function rangeTable(material: Matter, energyKeV: number): RangeTable {
  checkEnergy(energyKeV);
  let table = rangeTables.get(material);
  if (!table) {
    table = integrate(material);
    rangeTables.set(material, table);
  }
  return table;
}

function integrate(material: Matter): RangeTable {
  const logRange = new Float64Array(INTERVALS + 1);
  const logYield = new Float64Array(INTERVALS + 1);
  const first = electronStopping(material, MIN_ENERGY_KEV);
  const firstTotal = first.collision + first.radiative;
  let range = MIN_ENERGY_KEV / 1000 / firstTotal / 2;
  let radiatedKeV = (MIN_ENERGY_KEV * first.radiative) / firstTotal / 2;
  for (let i = 0; i <= INTERVALS; i++) {
    logRange[i] = Math.log(range);
    logYield[i] = Math.log(radiatedKeV / (MIN_ENERGY_KEV * Math.exp(i * LOG_STEP)));
    if (i === INTERVALS) break;
    for (const share of GAUSS) {
      const energyKeV = MIN_ENERGY_KEV * Math.exp((i + share) * LOG_STEP);
      const { collision, radiative } = electronStopping(material, energyKeV);
      const total = collision + radiative;
      range += ((LOG_STEP / 2) * energyKeV) / 1000 / total;
      radiatedKeV += ((LOG_STEP / 2) * energyKeV * radiative) / total;
    }
  }
  return { logRange, logYield };
}

/** Straight lines in log–log. */
function interpolate(logValues: Float64Array, energyKeV: number): number {
  const at = Math.max(0, Math.log(energyKeV / MIN_ENERGY_KEV) / LOG_STEP);
  const i = Math.min(Math.floor(at), INTERVALS - 1);
  return Math.exp(logValues[i] + (at - i) * (logValues[i + 1] - logValues[i]));
}

function checkEnergy(energyKeV: number): void {
  if (energyKeV >= MIN_ENERGY_KEV && energyKeV <= MAX_ENERGY_KEV) return;
  throw new MaterialError({
    code: 'energy_out_of_range',
    value: `${energyKeV} keV`,
    rule: `the energy of an electron must be from ${MIN_ENERGY_KEV} to ${MAX_ENERGY_KEV} keV`,
  });
}
