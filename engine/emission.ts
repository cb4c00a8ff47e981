/** What energy a source photon gets: one of the lines, or a place in a continuous spectrum. */
import { nextUniform, type StreamState } from './random.js';
import type { Emission } from './setup.js';

/** Cumulative choice of a line or bin. A line has equal bounds. */
export interface EmissionTable {
  readonly cumulative: Float64Array;
  readonly lowKeV: Float64Array;
  readonly highKeV: Float64Array;
}

/** Compiles an emission; its weights need not be normalised. */
export function makeEmissionTable(emission: Emission): EmissionTable {
  const entries =
    emission.lines.length > 0
      ? emission.lines.map((line) => ({ low: line.energyKeV, high: line.energyKeV, weight: line.perDecay }))
      : emission.continuum.map((bin) => ({
          low: bin.energyLowKeV,
          high: bin.energyHighKeV,
          weight: bin.relativePhotons,
        }));
  const total = entries.reduce((sum, entry) => sum + entry.weight, 0);
  let sum = 0;
  const cumulative = Float64Array.from(entries, (entry) => (sum += entry.weight) / total);
  cumulative[cumulative.length - 1] = 1;
  return {
    cumulative,
    lowKeV: Float64Array.from(entries, (entry) => entry.low),
    highKeV: Float64Array.from(entries, (entry) => entry.high),
  };
}

/** Highest energy the source can emit, keV. */
export function topEnergyKeV(table: EmissionTable): number {
  return table.highKeV.reduce((top, energy) => Math.max(top, energy), 0);
}

/** Index of the line or bin of the next photon. */
export function pickLine(table: EmissionTable, random: StreamState): number {
  const { cumulative } = table;
  if (cumulative.length === 1) return 0;
  const u = nextUniform(random);
  let low = 0;
  let high = cumulative.length - 1;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (cumulative[middle] > u) high = middle;
    else low = middle + 1;
  }
  return low;
}

/** Energy of a photon of that line or bin, uniform inside a bin. */
export function lineEnergyKeV(table: EmissionTable, line: number, random: StreamState): number {
  const low = table.lowKeV[line];
  const width = table.highKeV[line] - low;
  return width === 0 ? low : low + width * nextUniform(random);
}
