import { describe, expect, it } from 'vitest';
import { absorptionEdges } from '../../materials/cross-sections.js';
import { relaxation } from '../../materials/relaxation.js';
import { SUBSHELL_COUNT, subshellShares } from '../../materials/subshell-shares.js';
import { publishedRows } from '../published/csv.js';

const ALL_Z = Array.from({ length: 100 }, (_, i) => i + 1);
const SHELLS = ['K', 'L1', 'L2', 'L3'];

describe('subshell shares', () => {
  it.each(ALL_Z)('of Z = %i add up to 1 and open each shell exactly at its absorption edge', (z) => {
    for (let energy = 1; energy <= 20_000; energy *= 1.07) {
      const shares = subshellShares(z, energy);
      expect(shares.reduce((sum, share) => sum + share, 0)).toBeCloseTo(1, 12);
      for (const share of shares) expect(share).toBeGreaterThanOrEqual(0);
    }
    for (const { shell, energyKeV } of absorptionEdges(z)) {
      const index = SHELLS.indexOf(shell);
      if (index < 0) continue;
      expect(subshellShares(z, energyKeV * (1 - 1e-9))[index], `${shell} below its edge`).toBe(0);
      expect(subshellShares(z, energyKeV)[index], `${shell} at its edge`).toBeGreaterThan(0.02);
    }
  });

  it.each(
    publishedRows('subshell-shares').map((row) => [Number(row.z), Number(row.energy_keV), row] as const),
  )('of Z = %i at %f keV are those of the published table within 0.001', (z, energyKeV, row) => {
    const shares = subshellShares(z, energyKeV);
    ['k', 'l1', 'l2', 'l3', 'others'].forEach((name, i) => {
      expect(Math.abs(shares[i] - Number(row[name])), name).toBeLessThan(1e-3);
    });
  });

  it.each(publishedRows('k-shell').map((row) => [row.element, Number(row.Z), row] as const))(
    'of %s (Z = %i) at the K edge agree with the published jump ratio within 0.5 %%',
    (_, z, row) => {
      const share = subshellShares(z, relaxation(z).shells[0].bindingKeV)[0];
      expect(Math.abs(share / Number(row.K_fraction_at_edge) - 1)).toBeLessThan(0.005);
    },
  );

  it('stay constant above the end of the table, near 500 keV', () => {
    expect([...subshellShares(82, 20_000)]).toEqual([...subshellShares(82, 510)]);
  });

  it('are written into the given array', () => {
    const out = new Float64Array(SUBSHELL_COUNT);
    expect(subshellShares(53, 100, out)).toBe(out);
    expect(out[0]).toBeGreaterThan(0.8);
  });
});
