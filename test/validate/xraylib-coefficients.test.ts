/**
 * The coefficients against those of an independent library, xraylib, which interpolates the same XCOM tables in
 * its own way and ends at 800 keV. Needs the Debian package python3-xraylib; without it nothing is compared.
 */
import { execFileSync } from 'node:child_process';
import { existsSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import seedrandom from 'seedrandom';
import { describe, expect, it } from 'vitest';
import {
  absorptionEdges,
  materialCoefficients,
  namedMaterials,
  type NamedMaterial,
} from '../../materials/index.js';

const PYTHON = '/usr/bin/python3';
const PAIRS = 500;
const LAST_ENERGY_KEV = 800;
const TOLERANCE = 0.01;
/**
 * Nearer than this to an edge the two differ because they place the edge differently (1.305 and 1.303 keV for
 * magnesium) and because splines swing there; such pairs are counted, not compared.
 */
const NEAR_EDGE = 0.003;

function hasXraylib(): boolean {
  if (!existsSync(PYTHON)) return false;
  try {
    execFileSync(PYTHON, ['-c', 'import xraylib'], { stdio: 'ignore' });
    return true;
  } catch {
    return false;
  }
}

interface Pair {
  readonly material: NamedMaterial;
  readonly energyKeV: number;
}

function randomPairs(): Pair[] {
  const random = seedrandom.alea('coefficients against a second library');
  const materials = namedMaterials();
  return Array.from({ length: PAIRS }, () => ({
    material: materials[Math.floor(random() * materials.length)],
    energyKeV: LAST_ENERGY_KEV ** random(),
  }));
}

function isNearEdge({ material, energyKeV }: Pair): boolean {
  return material.constituents.some(({ z }) =>
    absorptionEdges(z).some((edge) => Math.abs(edge.energyKeV / energyKeV - 1) < NEAR_EDGE),
  );
}

function xraylibTotals(pairs: readonly Pair[]): number[] {
  const input = pairs.map(({ material, energyKeV }) => [
    energyKeV,
    material.constituents.map(({ z, massFraction }) => [z, massFraction]),
  ]);
  const script = fileURLToPath(new URL('./xraylib_totals.py', import.meta.url));
  return JSON.parse(execFileSync(PYTHON, [script], { input: JSON.stringify(input), encoding: 'utf8' }));
}

describe.skipIf(!hasXraylib())('total mass attenuation coefficients', () => {
  it('lie within 1 % of those of xraylib for 500 random materials and energies', () => {
    const pairs = randomPairs();
    const published = xraylibTotals(pairs);
    const deviations = pairs
      .map((pair, i) => ({
        name: pair.material.name,
        energyKeV: pair.energyKeV,
        nearEdge: isNearEdge(pair),
        deviation: materialCoefficients(pair.material, pair.energyKeV).total / published[i] - 1,
      }))
      .sort((a, b) => Math.abs(b.deviation) - Math.abs(a.deviation));
    const compared = deviations.filter(({ nearEdge }) => !nearEdge);
    const size = (at: number) => Math.abs(compared[Math.floor(at * (compared.length - 1))].deviation);
    console.log(
      `compared ${compared.length} of ${PAIRS} (the others lie at an edge); deviation: ` +
        `median ${size(0.5).toExponential(1)}, 99th of 100 ${size(0.01).toExponential(1)}, ` +
        `largest ${size(0).toExponential(1)}`,
    );
    console.table(deviations.slice(0, 10));
    expect(compared.length).toBeGreaterThan(0.85 * PAIRS);
    expect(compared.filter(({ deviation }) => !(Math.abs(deviation) <= TOLERANCE))).toEqual([]);
  });
});
