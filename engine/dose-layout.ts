/** Where the figures of dose, of depth profiles and of their reliability stand, behind those of every run. */
import type { Setup } from './setup.js';
import { FIGURE } from './tally-layout.js';

export interface DoseLayout {
  /** Numbers of dose quantities, of dose points, of slices of the depth profile. */
  readonly doses: number;
  readonly points: number;
  readonly depthBins: number;
  /** Layer of the depth profile, −1: none. */
  readonly depthLayer: number;

  /** Energy in − deposited − out of a history, which weights let differ from 0. */
  readonly gapFigure: number;
  /** Dose at the far face and at the front face, with what of it is uncollided, and without the stack; by quantity. */
  readonly farFigure: number;
  readonly farUncollidedFigure: number;
  readonly farFreeFigure: number;
  readonly frontFigure: number;
  /** The same at the points, by point and quantity. */
  readonly pointFigure: number;
  readonly pointUncollidedFigure: number;
  readonly pointFreeFigure: number;
  /** In the profile, by slice and quantity: mean dose inside, dose behind the slice if the stack ended there. */
  readonly insideFigure: number;
  readonly behindFigure: number;
  readonly behindUncollidedFigure: number;
  /** Energy left in each slice. */
  readonly depthDepositFigure: number;

  /** Figures whose higher moments are kept, and the place of the first one's. */
  readonly leading: Int32Array;
  readonly momentFigure: number;
  readonly end: number;
}

/**
 * Places for the moments of one figure x over histories: in the sums Σ1 (histories with a score), Σx², Σx⁴, in the
 * squares Σx, Σx³.
 */
export const MOMENT_PLACES = 3;

/** Lays out the figures of a setup from `first` on. */
export function makeDoseLayout({ tally, stack }: Setup, first: number): DoseLayout {
  const doses = tally.dose.length;
  const points = doses > 0 ? tally.dosePoints.length : 0;
  const profile = tally.depthProfile;
  const depthBins = profile === null ? 0 : profile.bins;
  let next = first;
  const place = (count: number) => (next += count) - count;
  const gapFigure = place(1);
  const farFigure = place(doses);
  const farUncollidedFigure = place(doses);
  const farFreeFigure = place(doses);
  const frontFigure = place(doses);
  const pointFigure = place(points * doses);
  const pointUncollidedFigure = place(points * doses);
  const pointFreeFigure = place(points * doses);
  const insideFigure = place(depthBins * doses);
  const behindFigure = place(depthBins * doses);
  const behindUncollidedFigure = place(depthBins * doses);
  const depthDepositFigure = place(depthBins);
  const leading = Int32Array.from([
    FIGURE.transmitted,
    FIGURE.transmittedEnergy,
    FIGURE.reflected,
    FIGURE.reflectedEnergy,
    ...Array.from({ length: doses }, (_, d) => farFigure + d),
    ...Array.from({ length: doses }, (_, d) => frontFigure + d),
    ...Array.from({ length: points * doses }, (_, d) => pointFigure + d),
  ]);
  const momentFigure = place(MOMENT_PLACES * leading.length);
  return {
    doses,
    points,
    depthBins,
    depthLayer: profile === null ? -1 : stack.findIndex(({ name }) => name === profile.layer),
    gapFigure,
    farFigure,
    farUncollidedFigure,
    farFreeFigure,
    frontFigure,
    pointFigure,
    pointUncollidedFigure,
    pointFreeFigure,
    insideFigure,
    behindFigure,
    behindUncollidedFigure,
    depthDepositFigure,
    leading,
    momentFigure,
    end: next,
  };
}
