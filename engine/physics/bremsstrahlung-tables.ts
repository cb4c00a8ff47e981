/**
 * Tables of thick-target bremsstrahlung for one material, made once per run (about 60 kB).
 *
 * An electron slows down continuously by collisions and by photons below the cutoff; photons above it are emitted
 * one by one. With L the stopping power of the continuous part and n the photons per path, both at energy T, the
 * mean number of emissions between T and rest, were no energy lost to them, is N(T) = ∫ n / L dT: the only thing
 * needed to draw the energy at the next emission.
 */
import { bremsstrahlungSpectrum, electronStopping, type Matter } from '../../materials/index.js';
import { bucketOf, bucketStartKeV } from '../energy-grid.js';
import { logPlace, logSamples, valueAtPlace, type LogGrid } from './log-sampled.js';
import { transportCoefficient } from './electron-scattering.js';

export interface BremsstrahlungTables {
  /** Photons below it are part of the continuous slowing down. */
  readonly cutoffKeV: number;
  readonly topKeV: number;
  /** Step in ln T of the arrays `photons`, `silent` and `turning`, from the cutoff to the top. */
  readonly step: number;
  /** N at the energies of the grid. */
  readonly photons: Float64Array;
  /** exp(−N) at the upper end of each bucket of the energy grid: below it a uniform number means no photon. */
  readonly silent: Float64Array;
  /** ∫ G₁ / L dT from the cutoff: mean cosines are exp(−differences). */
  readonly turning: Float64Array;
  /** Step in ln T of the rows of photon energies, from the cutoff. */
  readonly rowStep: number;
  readonly rows: number;
  /** Nodes of x = ln(k / cutoff) / ln(T / cutoff), from 0 to 1, closest at 1. */
  readonly nodes: Float64Array;
  /** Density and cumulative distribution of x by row; the density is linear between nodes. */
  readonly density: Float64Array;
  readonly cumulative: Float64Array;
}

const STEPS = 256;
const ROW_STEPS_MIN = 8;
const ROW_STEP = 0.2;
const NODES = 41;
const MAX_ENERGY_KEV = 20_000;
/** The first row stands for electrons just above the cutoff. */
const FIRST_ROW = 1 + 1e-6;
/** Gauss–Legendre nodes of order 2, as shares of a step. */
const GAUSS = [0.5 - Math.sqrt(1 / 12), 0.5 + Math.sqrt(1 / 12)];

/** Per row: photons per path and unit of ln(T / cutoff) (cm²/g), stopping power of those below (MeV cm²/g). */
interface RowSums {
  readonly density: Float64Array;
  readonly soft: Float64Array;
}

/** How electrons slow down and turn in a material, sampled once for tables of several cutoffs. */
export interface Slowing {
  /** Collision stopping power (MeV cm²/g) and transport coefficient (cm²/g) at the nodes of SLOWING_GRID. */
  readonly collision: Float64Array;
  readonly transport: Float64Array;
}

/** Kinetic energies in keV: steps of 2.5 %, over which both run straight to 1e-4. */
const SLOWING_GRID: LogGrid = { low: 1, high: MAX_ENERGY_KEV, nodes: 400 };

/** Samples the slowing down of electrons in a material. */
export function sampleSlowing(material: Matter): Slowing {
  const within = (energyKeV: number) => Math.min(MAX_ENERGY_KEV, energyKeV);
  return {
    collision: logSamples((energy) => electronStopping(material, within(energy)).collision, SLOWING_GRID),
    transport: logSamples((energy) => transportCoefficient(material, within(energy)), SLOWING_GRID),
  };
}

/**
 * @param topKeV highest kinetic energy to be asked for, at most 20 000 keV
 * @param cutoffKeV lowest photon energy emitted, at least 1 keV
 * @param slowing of the same material
 * @throws MaterialError for energies out of range
 */
export function makeBremsstrahlungTables(
  material: Matter,
  topKeV: number,
  cutoffKeV: number,
  slowing: Slowing = sampleSlowing(material),
): BremsstrahlungTables {
  const top = Math.min(MAX_ENERGY_KEV, Math.max(topKeV, 2 * cutoffKeV));
  const span = Math.log(top / cutoffKeV);
  const rowSteps = Math.max(ROW_STEPS_MIN, Math.ceil(span / ROW_STEP));
  const rows = rowSteps + 1;
  const tables: BremsstrahlungTables = {
    cutoffKeV,
    topKeV: top,
    step: span / STEPS,
    photons: shared(STEPS + 1),
    silent: shared(bucketOf(top) + 1),
    turning: shared(STEPS + 1),
    rowStep: span / rowSteps,
    rows,
    nodes: shared(NODES),
    density: shared(rows * NODES),
    cumulative: shared(rows * NODES),
  };
  for (let i = 0; i < NODES; i++) tables.nodes[i] = 1 - (1 - i / (NODES - 1)) ** 2;
  slowDown(slowing, tables, fillRows(material, tables));
  return tables;
}

function shared(length: number): Float64Array {
  return new Float64Array(new SharedArrayBuffer(8 * length));
}

function fillRows(material: Matter, tables: BremsstrahlungTables): RowSums {
  const { cutoffKeV, topKeV, rows, rowStep, nodes, density, cumulative } = tables;
  const sums = { density: new Float64Array(rows), soft: new Float64Array(rows) };
  for (let row = 0; row < rows; row++) {
    const electronKeV = Math.min(topKeV, Math.max(FIRST_ROW, Math.exp(row * rowStep)) * cutoffKeV);
    const logRatio = Math.log(electronKeV / cutoffKeV);
    const spectrum = bremsstrahlungSpectrum(material, electronKeV);
    const first = row * NODES;
    for (let i = 0; i < NODES; i++) {
      density[first + i] = spectrum(Math.min(electronKeV, cutoffKeV * Math.exp(nodes[i] * logRatio)));
    }
    for (let i = 1; i < NODES; i++) {
      const area = ((density[first + i - 1] + density[first + i]) / 2) * (nodes[i] - nodes[i - 1]);
      cumulative[first + i] = cumulative[first + i - 1] + area;
    }
    const total = cumulative[first + NODES - 1];
    for (let i = 0; i < NODES; i++) {
      density[first + i] /= total;
      cumulative[first + i] /= total;
    }
    cumulative[first + NODES - 1] = 1;
    sums.density[row] = total;
    sums.soft[row] = GAUSS.reduce((sum, share) => sum + (spectrum(share * cutoffKeV) * cutoffKeV) / 2000, 0);
  }
  return sums;
}

/** Integrates number and turning from the cutoff upwards. */
function slowDown(slowing: Slowing, tables: BremsstrahlungTables, sums: RowSums): void {
  const { cutoffKeV, step, photons, silent, turning, rows, rowStep } = tables;
  for (let j = 0; j < STEPS; j++) {
    photons[j + 1] = photons[j];
    turning[j + 1] = turning[j];
    for (const share of GAUSS) {
      const logRatio = (j + share) * step;
      const electronKeV = cutoffKeV * Math.exp(logRatio);
      const row = Math.min(Math.floor(logRatio / rowStep), rows - 2);
      const weight = logRatio / rowStep - row;
      const mix = (values: Float64Array) => values[row] + weight * (values[row + 1] - values[row]);
      const place = logPlace(SLOWING_GRID, electronKeV);
      const stopping = valueAtPlace(slowing.collision, place) + mix(sums.soft);
      const path = ((step / 2) * electronKeV) / 1000 / stopping;
      photons[j + 1] += path * mix(sums.density) * logRatio;
      turning[j + 1] += path * valueAtPlace(slowing.transport, place);
    }
  }
  for (let bucket = 0; bucket < silent.length; bucket++) {
    const at = Math.log(bucketStartKeV(bucket + 1) / cutoffKeV) / step;
    silent[bucket] = Math.exp(-photons[Math.max(0, Math.min(STEPS, Math.ceil(at)))]);
  }
}
