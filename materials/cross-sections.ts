/**
 * Mass attenuation coefficients of elements and materials, 1 keV to 20 MeV, from the XCOM tables.
 *
 * Interpolation is that of XCOM (Berger and Hubbell, NBSIR 87-3597): cubic splines in log–log for smooth
 * curves, straight lines in log–log for the photoelectric curve below the K edge, a jump at each edge. Every
 * element becomes one table of polynomials over intervals that never span an edge, so that "above" and
 * "below" an edge is only a choice between two neighbouring intervals.
 */
import { naturalSpline, polynomialAt, straightLines, type PiecewiseCubic } from './cubic-spline.js';
import { dataTable, numberColumn, textColumn } from './data-table.js';
import { MaterialError } from './errors.js';
import type { Constituent } from './material.js';

/** Mass attenuation coefficients in cm²/g. */
export interface Coefficients {
  photoelectric: number;
  incoherent: number;
  coherent: number;
  /** Pair production in the fields of nucleus and electrons together. */
  pair: number;
  total: number;
}

/** The same for many energies: one array per process, cm²/g. */
export interface CoefficientArrays {
  readonly photoelectric: Float64Array;
  readonly incoherent: Float64Array;
  readonly coherent: Float64Array;
  readonly pair: Float64Array;
  readonly total: Float64Array;
}

/** Which side of an absorption edge is meant at exactly its energy; anywhere else it makes no difference. */
export type EdgeSide = 'above' | 'below';

/** An absorption edge: a jump of the photoelectric coefficient. */
export interface AbsorptionEdge {
  readonly shell: string;
  readonly energyKeV: number;
}

/** What has constituents: a material. */
export interface Composition {
  readonly constituents: readonly Constituent[];
}

const MIN_ENERGY_KEV = 1;
const MAX_ENERGY_KEV = 20_000;
const MAX_Z = 100;
/** Allowed rounding of an energy at the ends of the range. */
const RANGE_SLACK = 1e-9;
/** Twice the electron's rest energy, 510.998 95 keV (CODATA 2018): the threshold of pair production. */
const PAIR_THRESHOLD_KEV = 2 * 510.99895;

/** Relative distance below which an edge and its neighbour in the table do not both carry a scattering spline. */
const CROWDED = 0.003;

/** Polynomials per interval: 16 numbers, 4 each for photoelectric, incoherent, coherent, reduced pair. */
const STRIDE = 16;
const PHOTOELECTRIC = 0;
const INCOHERENT = 4;
const COHERENT = 8;
const PAIR = 12;

interface ElementTable {
  /** Energies at the ends of the intervals, ascending, each once. */
  readonly energyKeV: Float64Array;
  readonly logEnergy: Float64Array;
  readonly polynomials: Float64Array;
  readonly edges: readonly AbsorptionEdge[];
}

const tables: (ElementTable | undefined)[] = [];

/**
 * Mass attenuation coefficients of an element.
 *
 * @param z atomic number, 1–100
 * @param energyKeV photon energy, 1–20 000 keV
 * @param side which side is meant at exactly an absorption edge
 * @throws MaterialError for an energy or atomic number out of range
 */
export function elementCoefficients(z: number, energyKeV: number, side: EdgeSide = 'above'): Coefficients {
  return materialCoefficients({ constituents: [{ z, massFraction: 1 }] }, energyKeV, side);
}

/** Mass attenuation coefficients of a material: those of its elements, weighted by mass fraction. */
export function materialCoefficients(
  material: Composition,
  energyKeV: number,
  side: EdgeSide = 'above',
): Coefficients {
  const out = coefficientArrays(1);
  fillCoefficients(material, Float64Array.of(energyKeV), out, side);
  const { photoelectric, incoherent, coherent, pair, total } = out;
  return {
    photoelectric: photoelectric[0],
    incoherent: incoherent[0],
    coherent: coherent[0],
    pair: pair[0],
    total: total[0],
  };
}

/** Empty arrays for {@link fillCoefficients}. */
export function coefficientArrays(length: number): CoefficientArrays {
  return {
    photoelectric: new Float64Array(length),
    incoherent: new Float64Array(length),
    coherent: new Float64Array(length),
    pair: new Float64Array(length),
    total: new Float64Array(length),
  };
}

/**
 * Fills `out` with the mass attenuation coefficients (cm²/g) of a material at many energies.
 *
 * @param energiesKeV any order; ascending order is quickest
 * @param out arrays at least as long as `energiesKeV`
 * @throws MaterialError for an energy or atomic number out of range
 */
export function fillCoefficients(
  material: Composition,
  energiesKeV: Float64Array,
  out: CoefficientArrays,
  side: EdgeSide = 'above',
): void {
  energiesKeV.forEach(checkEnergy);
  const logEnergies = energiesKeV.map(Math.log);
  const { photoelectric, incoherent, coherent, pair, total } = out;
  for (const array of [photoelectric, incoherent, coherent, pair]) array.fill(0, 0, energiesKeV.length);
  for (const { z, massFraction } of material.constituents) {
    addElement(elementTable(z), massFraction, energiesKeV, logEnergies, out, side);
  }
  for (let i = 0; i < energiesKeV.length; i++) {
    total[i] = photoelectric[i] + incoherent[i] + coherent[i] + pair[i];
  }
}

/**
 * The absorption edges of an element at or above 1 keV, ascending in energy.
 *
 * @param z atomic number, 1–100
 */
export function absorptionEdges(z: number): readonly AbsorptionEdge[] {
  return elementTable(z).edges;
}

function addElement(
  table: ElementTable,
  massFraction: number,
  energiesKeV: Float64Array,
  logEnergies: Float64Array,
  out: CoefficientArrays,
  side: EdgeSide,
): void {
  const { energyKeV, logEnergy, polynomials } = table;
  const below = side === 'below';
  let interval = 0;
  for (let i = 0; i < energiesKeV.length; i++) {
    const energy = energiesKeV[i];
    interval = findInterval(energyKeV, energy, interval);
    const used = below && energy === energyKeV[interval] && interval > 0 ? interval - 1 : interval;
    const t = logEnergies[i] - logEnergy[used];
    const at = used * STRIDE;
    out.photoelectric[i] += massFraction * exponential(polynomials, at + PHOTOELECTRIC, t);
    out.incoherent[i] += massFraction * exponential(polynomials, at + INCOHERENT, t);
    out.coherent[i] += massFraction * exponential(polynomials, at + COHERENT, t);
    if (energy > PAIR_THRESHOLD_KEV) {
      const reduced = exponential(polynomials, at + PAIR, t);
      out.pair[i] += massFraction * pairThresholdFactor(energy) * reduced;
    }
  }
}

function exponential(polynomials: Float64Array, at: number, t: number): number {
  return Math.exp(
    ((polynomials[at + 3] * t + polynomials[at + 2]) * t + polynomials[at + 1]) * t + polynomials[at],
  );
}

/** (1 − 2mc²/E)³, the rise of the pair cross section above its threshold (NBSIR 87-3597). */
function pairThresholdFactor(energyKeV: number): number {
  return (1 - PAIR_THRESHOLD_KEV / energyKeV) ** 3;
}

/** Index of the interval that starts at or below the energy, tried first at and after the one found last. */
function findInterval(starts: Float64Array, energy: number, last: number): number {
  if (starts[last] <= energy) {
    if (energy < starts[last + 1]) return last;
    if (energy < starts[last + 2]) return last + 1;
  }
  let low = 0;
  let high = starts.length - 1;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if (starts[middle] <= energy) low = middle;
    else high = middle;
  }
  return low;
}

function checkEnergy(energyKeV: number): void {
  const inRange =
    energyKeV >= MIN_ENERGY_KEV * (1 - RANGE_SLACK) && energyKeV <= MAX_ENERGY_KEV * (1 + RANGE_SLACK);
  if (inRange) return;
  throw new MaterialError({
    code: 'energy_out_of_range',
    value: `${energyKeV} keV`,
    rule: `must be an energy from ${MIN_ENERGY_KEV} keV to ${MAX_ENERGY_KEV / 1000} MeV`,
  });
}

function elementTable(z: number): ElementTable {
  const known = tables[z];
  if (known) return known;
  if (!Number.isInteger(z) || z < 1 || z > MAX_Z) {
    throw new MaterialError({
      code: 'element_out_of_range',
      value: String(z),
      rule: `must be an atomic number from 1 to ${MAX_Z}`,
    });
  }
  return (tables[z] = buildTable(rowsOfElement(z)));
}

/** The rows of one element as they stand in the data table. */
interface ElementRows {
  readonly energyKeV: Float64Array;
  readonly photoelectric: Float64Array;
  readonly incoherent: Float64Array;
  readonly coherent: Float64Array;
  readonly pair: Float64Array;
  readonly shell: readonly (string | null)[];
}

function rowsOfElement(z: number): ElementRows {
  const table = dataTable('photon-cross-sections');
  const zs = table.getChild('z')!.toArray() as Uint8Array;
  const [from, to] = [zs.indexOf(z), zs.lastIndexOf(z) + 1];
  const column = (name: string) => numberColumn(table, name).subarray(from, to);
  return {
    energyKeV: column('energy_keV'),
    photoelectric: column('photoelectric'),
    incoherent: column('incoherent'),
    coherent: column('coherent'),
    pair: column('pair'),
    shell: textColumn(table, 'edge_shell', from, to),
  };
}

function buildTable(rows: ElementRows): ElementTable {
  const { energyKeV: energies, shell } = rows;
  // Rows that open an interval: all but the lower one of each edge.
  const nodes = [...energies.keys()].filter((i) => energies[i + 1] !== energies[i]);
  const energyKeV = Float64Array.from(nodes, (i) => energies[i]);
  const logEnergy = energyKeV.map(Math.log);
  const polynomials = new Float64Array(energyKeV.length * STRIDE);
  const place = (curve: PiecewiseCubic, from: number, to: number, offset: number) => {
    for (let i = from; i < to; i++) polynomialAt(curve, logEnergy[i], polynomials, i * STRIDE + offset);
  };

  const smoothNodes = nodes.filter((i) => !isCrowdedEdge(rows, i));
  place(splineThrough(energies, rows.incoherent, smoothNodes), 0, energyKeV.length, INCOHERENT);
  place(splineThrough(energies, rows.coherent, smoothNodes), 0, energyKeV.length, COHERENT);
  place(reducedPair(rows), 0, energyKeV.length, PAIR);
  for (const curve of photoelectricPieces(rows)) {
    const from = logEnergy.indexOf(curve.x[0]);
    place(curve, from, from + curve.x.length - 1, PHOTOELECTRIC);
  }

  const edges = [...energies.keys()]
    .filter((i) => shell[i] !== null)
    .map((i) => ({ shell: shell[i]!, energyKeV: energies[i] }));
  return { energyKeV, logEnergy, polynomials, edges };
}

/**
 * Whether row i is an edge so near to a grid energy that the rounding of the tabulated values, seen over the
 * short distance, would make a scattering spline swing (francium at 2.9999 and 3 keV, by 7 %).
 */
function isCrowdedEdge({ energyKeV, shell }: ElementRows, i: number): boolean {
  if (shell[i] === null) return false;
  const [before, here, after] = [energyKeV[i - 2], energyKeV[i], energyKeV[i + 1]];
  return here < before * (1 + CROWDED) || after < here * (1 + CROWDED);
}

function splineThrough(
  energyKeV: Float64Array,
  values: Float64Array,
  rows: readonly number[],
): PiecewiseCubic {
  const x = Float64Array.from(rows, (i) => Math.log(energyKeV[i]));
  return naturalSpline(
    x,
    Float64Array.from(rows, (i) => Math.log(values[i])),
  );
}

/** The photoelectric curve from edge to edge: straight lines below the K edge, a spline above it. */
function photoelectricPieces({ energyKeV, photoelectric, shell }: ElementRows): PiecewiseCubic[] {
  const kEdge = shell.indexOf('K');
  const starts = [0, ...[...shell.keys()].filter((i) => shell[i] !== null)];
  return starts.map((from, piece) => {
    const logEnergy = energyKeV.slice(from, starts[piece + 1]).map(Math.log);
    const logs = photoelectric.slice(from, starts[piece + 1]).map(Math.log);
    return from >= kEdge ? naturalSpline(logEnergy, logs) : straightLines(logEnergy, logs);
  });
}

/**
 * The pair coefficient with its threshold factor divided out. The first tabulated value lies at 1.25 MeV; from
 * there down to the threshold the end of the spline goes on as a straight line.
 */
function reducedPair({ energyKeV, pair }: ElementRows): PiecewiseCubic {
  const filled = [...pair.keys()].filter((i) => pair[i] > 0);
  const reduced = pair.map((value, i) => value / pairThresholdFactor(energyKeV[i]));
  return splineThrough(energyKeV, reduced, filled);
}
