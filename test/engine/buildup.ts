/** Published buildup factors of a point source, and what a plane source makes of them. */
import { compile } from '../../engine/compile.js';
import { attenuationPerCm } from '../../engine/deep/grid.js';
import { exponentialIntegral } from '../../engine/exponential-integrals.js';
import { publishedRows } from '../published/csv.js';
import { deepSetup, playDeep } from './deep-run.js';
import { integrate } from './goodness.js';
import { ALL } from './slab-run.js';

/** As the published factors: neither coherent scattering nor binding nor bremsstrahlung. */
const PHYSICS = { ...ALL, coherent: false, boundIncoherent: false, doppler: false, bremsstrahlung: false };
/** Matter behind the source, mean free paths, and slices to a mean free path. */
const BACKING = 8;
const PER_PATH = 5;

export interface BuildupRun {
  readonly medium: string;
  readonly energyKeV: number;
  /** Thickness in front of the source, mean free paths. */
  readonly depth: number;
  readonly seed: string;
  readonly histories: number;
}

/** Plays a plane isotropic source deep in matter: air kerma buildup, with its standard error, so many mean free paths away. */
export function playBuildup({ medium, energyKeV, depth, seed, histories }: BuildupRun) {
  const probe = compile(deepSetup({ stack: [[medium, 1]], energyKeV, physics: PHYSICS, seed }, 1, 'analog'));
  const pathCm = 1 / attenuationPerCm(probe, 0, energyKeV);
  const played = playDeep(
    {
      stack: [
        [medium, BACKING * pathCm],
        [medium, 1e-3 * pathCm],
        [medium, depth * pathCm],
      ],
      energyKeV,
      physics: PHYSICS,
      shape: { kind: 'embedded', layer: 'l1' },
      depth: { layer: 'l2', bins: depth * PER_PATH },
      seed,
    },
    histories,
  );
  const rows = (quantity: string) => played.depth.filter((row) => row.quantity === quantity);
  const [whole, uncollided] = [rows('air_kerma'), rows('air_kerma_behind_uncollided')];
  return (paths: number): { mean: number; stdError: number } => {
    const bins = [paths * PER_PATH - 1, paths * PER_PATH];
    const sum = (values: (number | null)[]) => bins.reduce((total, bin) => total + (values[bin] ?? 0), 0);
    const divisor = sum(uncollided.map(({ mean }) => mean));
    return {
      mean: sum(whole.map(({ mean }) => mean)) / divisor,
      stdError: sum(whole.map(({ stdError }) => stdError)) / divisor,
    };
  };
}

/** Buildup by mean free paths, from the rows of one source: a cubic spline of ln B, 1 at 0. */
export function publishedBuildup(
  source: string,
  medium: string,
  energyMeV: number,
): (paths: number) => number {
  const rows = publishedRows('buildup-factors').filter(
    (row) => row.source.startsWith(source) && row.medium === medium && Number(row.energy_MeV) === energyMeV,
  );
  const x = [0, ...rows.map((row) => Number(row.mean_free_paths))];
  const y = [0, ...rows.map((row) => Math.log(Number(row.exposure_buildup)))];
  const curvature = naturalSpline(x, y);
  const last = x.length - 1;
  return (paths) => {
    if (paths > x[last])
      return Math.exp(y[last] + ((y[last] - y[last - 1]) / (x[last] - x[last - 1])) * (paths - x[last]));
    let i = 0;
    while (i < last - 1 && x[i + 1] < paths) i++;
    const h = x[i + 1] - x[i];
    const [a, b] = [(x[i + 1] - paths) / h, (paths - x[i]) / h];
    const bend = (((a ** 3 - a) * curvature[i] + (b ** 3 - b) * curvature[i + 1]) * (h * h)) / 6;
    return Math.exp(a * y[i] + b * y[i + 1] + bend);
  };
}

/** Second derivatives of the natural cubic spline through points. */
function naturalSpline(x: readonly number[], y: readonly number[]): number[] {
  const n = x.length;
  const second = new Array<number>(n).fill(0);
  const u = new Array<number>(n).fill(0);
  for (let i = 1; i < n - 1; i++) {
    const share = (x[i] - x[i - 1]) / (x[i + 1] - x[i - 1]);
    const p = share * second[i - 1] + 2;
    second[i] = (share - 1) / p;
    const slopes = (y[i + 1] - y[i]) / (x[i + 1] - x[i]) - (y[i] - y[i - 1]) / (x[i] - x[i - 1]);
    u[i] = ((6 * slopes) / (x[i + 1] - x[i - 1]) - share * u[i - 1]) / p;
  }
  for (let i = n - 2; i >= 0; i--) second[i] = second[i] * second[i + 1] + u[i];
  return second;
}

/** Buildup of a plane isotropic source: that of points, weighed by exp(−τ)/τ from the distance on. */
export function planeBuildup(point: (paths: number) => number, paths: number): number {
  const weighed = integrate((tau) => (point(tau) * Math.exp(-tau)) / tau, paths, paths + 40, 800);
  return weighed / exponentialIntegral(1, paths);
}
