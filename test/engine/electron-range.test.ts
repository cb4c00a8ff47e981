import { describe, expect, it } from 'vitest';
import { electronRangeWarning, fastestElectron } from '../../engine/electron-range.js';
import { resolveMaterial } from '../../materials/index.js';
import { publishedRows } from '../published/csv.js';

describe('the fastest electron', () => {
  // Compton edges E − E / (1 + 2 E / m c²): 477.3 keV of Cs-137, 2381.8 keV of the 2614.5 keV line (closed form)
  it.each([
    { photonKeV: 661.657, expected: 477.3 },
    { photonKeV: 2614.511, expected: 2381.8 },
  ])('is at the Compton edge of $photonKeV keV photons', ({ photonKeV, expected }) => {
    const { energyKeV, origin } = fastestElectron(photonKeV, 0);
    expect(Math.abs(energyKeV - expected)).toBeLessThan(0.1);
    expect(origin).toBe('Compton edge');
  });

  it('is the photoelectron where photoelectric absorption is not rare', () => {
    expect(fastestElectron(661.657, 0.05)).toEqual({ energyKeV: 661.657, origin: 'photoelectron' });
  });
});

describe('the warning of long electron ranges', () => {
  const material = resolveMaterial('silicon');
  const question = { layer: 'diode', material, photonKeV: 1000, electron: fastestElectron(1000, 0.1) };

  it('has the CSDA range of ESTAR and its share of the thickness', () => {
    const row = publishedRows('estar-electrons').find(
      (r) => r.material === 'silicon' && Number(r.energy_MeV) === 1,
    )!;
    const published = Number(row.csda_range_g_cm2) / material.densityGPerCm3;
    const { rangeCm, share, warning } = electronRangeWarning({ ...question, thicknessCm: 0.05 });
    expect(Math.abs(rangeCm / published - 1)).toBeLessThan(0.005);
    expect(share).toBeCloseTo(rangeCm / 0.05, 12);
    expect(warning).toMatchInlineSnapshot(
      `"layer diode: electrons of 1000 keV (photoelectron of 1000 keV photons) have a range of 0.231 cm, 463 % of its 0.05 cm; they deposit on the spot here but would escape in part, so that its deposited energy and full-energy counts come out too high"`,
    );
  });

  it('is silent when the range is 10 % of the thickness or less', () => {
    const { rangeCm } = electronRangeWarning({ ...question, thicknessCm: 100 });
    expect(electronRangeWarning({ ...question, thicknessCm: rangeCm / 0.099 }).warning).toBeNull();
    expect(electronRangeWarning({ ...question, thicknessCm: rangeCm / 0.101 }).warning).toContain('10 %');
  });

  it('counts electrons below 1 keV as 1 keV', () => {
    const slow = { ...question, photonKeV: 1, electron: fastestElectron(1, 0), thicknessCm: 1 };
    expect(electronRangeWarning(slow).rangeCm).toBeGreaterThan(0);
  });
});
