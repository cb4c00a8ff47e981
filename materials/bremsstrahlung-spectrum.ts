/**
 * Spectrum of the bremsstrahlung photons that electrons of one energy emit per path length: the tabulated form
 * (screened Born approximation with Elwert's factor, see `data/README.md`) for each element, scaled so that the
 * energy emitted is its radiative stopping power; materials add up by mass fraction.
 */
import { dataTable, numberColumn } from './data-table.js';
import type { Matter } from './mean-excitation.js';
import { elementRadiativeStopping } from './radiative-stopping.js';

/** Photon energy as a share of the electron's from which the nodes lie equal in √(1 − share), below in ln share. */
const SPLIT_SHARE = 0.1;
const GAUSS_NODES = [-Math.sqrt(0.6), 0, Math.sqrt(0.6)];
const GAUSS_WEIGHTS = [5 / 18, 8 / 18, 5 / 18];

interface ShapeTable {
  readonly logZ: Float64Array;
  readonly logEnergy: Float64Array;
  /** Photon energies as shares of the electron's, ascending, and the same as coordinates of equal steps. */
  readonly shares: Float64Array;
  readonly coordinates: Float64Array;
  /** Logarithms of k dσ/dk: by electron energy, then Z, then share. */
  readonly logShape: Float64Array;
}

let table: ShapeTable | undefined;

/**
 * The spectrum k · dN/dk of photons emitted per mass per area of electron path, in cm²/g, as a function of the
 * photon energy k in keV. Its integral over k (in MeV) from 0 to the electron energy is the radiative stopping
 * power in MeV cm²/g; above the electron energy it is 0.
 *
 * @param electronKeV kinetic energy, 1–20 000 keV
 */
export function bremsstrahlungSpectrum(material: Matter, electronKeV: number): (photonKeV: number) => number {
  const shape = shapeTable();
  const values = new Float64Array(shape.shares.length);
  for (const { z, massFraction } of material.constituents) {
    const ofElement = elementShape(shape, z, electronKeV);
    const electronMeV = electronKeV / 1000;
    const scale =
      elementRadiativeStopping(z, electronKeV) / (electronMeV * integralOverShare(shape, ofElement));
    for (let i = 0; i < values.length; i++) values[i] += massFraction * scale * ofElement[i];
  }
  return (photonKeV) => (photonKeV > electronKeV ? 0 : valueAt(shape, values, photonKeV / electronKeV));
}

/** k dσ/dk of an element at the shares of the table, not yet scaled: straight lines in ln Z and ln T. */
function elementShape(
  { logZ, logEnergy, shares, logShape }: ShapeTable,
  z: number,
  electronKeV: number,
): Float64Array {
  const [atomic, zWeight] = position(logZ, Math.log(z));
  const [kinetic, weight] = position(logEnergy, Math.log(electronKeV));
  const start = (energy: number, element: number) => (energy * logZ.length + element) * shares.length;
  const corners: readonly (readonly [number, number])[] = [
    [start(kinetic, atomic), (1 - weight) * (1 - zWeight)],
    [start(kinetic, atomic + 1), (1 - weight) * zWeight],
    [start(kinetic + 1, atomic), weight * (1 - zWeight)],
    [start(kinetic + 1, atomic + 1), weight * zWeight],
  ];
  return shares.map((_, i) => Math.exp(corners.reduce((sum, [from, w]) => sum + w * logShape[from + i], 0)));
}

/** Interval of ascending nodes that u lies in, and how far into it. */
function position(nodes: Float64Array, u: number): [number, number] {
  let i = 0;
  while (i < nodes.length - 2 && nodes[i + 1] <= u) i++;
  return [i, (u - nodes[i]) / (nodes[i + 1] - nodes[i])];
}

function integralOverShare(shape: ShapeTable, values: Float64Array): number {
  const { shares } = shape;
  let sum = shares[0] * values[0];
  for (let i = 0; i < shares.length - 1; i++) {
    const width = shares[i + 1] - shares[i];
    for (let g = 0; g < GAUSS_NODES.length; g++) {
      const share = shares[i] + (width * (1 + GAUSS_NODES[g])) / 2;
      sum += GAUSS_WEIGHTS[g] * width * valueAt(shape, values, share);
    }
  }
  return sum;
}

/** Straight lines between the nodes in their coordinate; constant below the first. */
function valueAt({ coordinates }: ShapeTable, values: Float64Array, share: number): number {
  const u = coordinate(share);
  if (u <= coordinates[0]) return values[0];
  const [i, weight] = position(coordinates, u);
  return values[i] + weight * (values[i + 1] - values[i]);
}

/** Rises with the share, 0 at the split, which is a node. */
function coordinate(share: number): number {
  if (share <= SPLIT_SHARE) return Math.log(share / SPLIT_SHARE);
  return Math.sqrt(1 - SPLIT_SHARE) - Math.sqrt(1 - share);
}

function shapeTable(): ShapeTable {
  if (!table) {
    const arrow = dataTable('bremsstrahlung-shape');
    const shares = Float64Array.from(JSON.parse(arrow.schema.metadata.get('photon_shares')!) as number[]);
    const rows = arrow.getChild('cross_section')!;
    const logShape = new Float64Array(rows.length * shares.length);
    for (let row = 0; row < rows.length; row++) {
      logShape.set(Float64Array.from(rows.get(row) as Iterable<number>, Math.log), row * shares.length);
    }
    table = {
      logZ: Float64Array.from(new Set(numberColumn(arrow, 'z')), Math.log),
      logEnergy: Float64Array.from(new Set(numberColumn(arrow, 'energy_keV')), Math.log),
      shares,
      coordinates: shares.map(coordinate),
      logShape,
    };
  }
  return table;
}
