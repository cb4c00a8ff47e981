/** The `tally`, `physics` and `run` sections: what is scored, which physics is on, and when to stop. */
import * as z from 'zod';
import { choice, list, quantity, share, text, trueOrFalse, wholeNumber } from './fields.js';
import * as limits from './limits.js';

export const DOSE_QUANTITIES = ['air_kerma', 'ambient_dose', 'effective_dose_ap'] as const;
/** The keys of which `energy_bins` has exactly one. */
export const BIN_KEYS = ['width', 'count', 'edges'] as const;

/** Bins finer than 1 eV are below any effect that is simulated. */
const BIN_ENERGY = { moreThan: 0, atLeast: 1e-3, atMost: 40_000 };

const energyBinsSchema = z
  .strictObject({
    width: quantity('energy', BIN_ENERGY, {
      description: 'Width of every bin.',
      examples: ['1 keV'],
    }).optional(),
    count: wholeNumber(3, limits.MAX_BINS, { description: 'Number of bins.', examples: [1024] }).optional(),
    spacing: choice('spacing', ['linear', 'log'], {
      description:
        'With count: bins of equal width, or of equal ratio above the cutoff (the first bin then reaches from 0 to the cutoff).',
      default: 'linear',
    }).optional(),
    to: quantity('energy', BIN_ENERGY, {
      description: 'With width or count: upper end; default: just above the highest source energy.',
      examples: ['3 MeV'],
    }).optional(),
    edges: list(
      quantity('energy', { atLeast: 0, atMost: 40_000 }, { description: 'Edge of a bin.' }),
      2,
      limits.MAX_BINS,
      { description: 'All edges, ascending, from 0 keV to above the highest source energy.' },
    ).optional(),
  })
  .meta({
    description: 'Energy bins of all spectra. Default: 1 keV (0.1 keV below 100 keV, 10 keV above 5 MeV).',
    oneOf: BIN_KEYS.map((key) => ({ required: [key] })),
  });

const dosePointSchema = z
  .strictObject({
    name: text(limits.MAX_NAME, {
      description: 'Name in the results; default: "point-1" and so on.',
    }).optional(),
    behind: quantity('length', limits.SIZE, {
      description: 'Behind the far face.',
      examples: ['30 cm'],
    }).optional(),
    in_front: quantity('length', limits.SIZE, {
      description: 'In front of the front face.',
      examples: ['1 m'],
    }).optional(),
    offset: quantity('length', limits.DISTANCE, {
      description: 'Away from the axis.',
      default: '0 cm',
    }).optional(),
  })
  .meta({ oneOf: [{ required: ['behind'] }, { required: ['in_front'] }] });

export const tallySchema = z
  .strictObject({
    energy_bins: energyBinsSchema.optional(),
    dose: list(
      choice('dose quantity', DOSE_QUANTITIES, { description: 'A dose quantity.' }),
      0,
      DOSE_QUANTITIES.length,
      { description: 'Dose quantities at the far face and at the dose points.', uniqueItems: true },
    ).optional(),
    dose_points: list(dosePointSchema, 1, limits.MAX_DOSE_POINTS, {
      description: 'Places outside the stack.',
    }).optional(),
    depth_profile: z
      .strictObject({
        layer: text(limits.MAX_NAME, { description: 'Name of the layer.', examples: ['wall'] }),
        bins: wholeNumber(1, limits.MAX_DEPTH_BINS, {
          description: 'Number of slices.',
          default: limits.DEFAULTS.depthBins,
        }).optional(),
      })
      .meta({ description: 'Dose and energy against depth in one layer.' })
      .optional(),
    coincidence: trueOrFalse({
      description:
        'Tells pulses of a detector that come alone from those that come with one of another detector, and adds all up; needs two detectors.',
      default: false,
    }).optional(),
  })
  .meta({ description: 'What is scored.' });

const on = (description: string) => trueOrFalse({ description, default: true }).optional();

export const physicsSchema = z
  .strictObject({
    coherent: on('Coherent scattering.'),
    bound_incoherent: on('Binding of the electrons in incoherent scattering.'),
    doppler: on('Doppler broadening of incoherent scattering; needs bound_incoherent.'),
    fluorescence: on('X-rays after a photoelectric absorption.'),
    pair: on('Pair and triplet production.'),
    bremsstrahlung: on('Bremsstrahlung of electrons and positrons.'),
    cutoff: quantity(
      'energy',
      { atLeast: 1, atMost: 1000, words: 'between 1 keV and 1 MeV' },
      { description: 'Photons of less energy deposit on the spot.', default: '1 keV' },
    ).optional(),
  })
  .meta({ description: 'Everything is on unless switched off.' });

/** Names of section "quantities" of the results, with what a setup must have for them. */
export const QUANTITIES = {
  incident: 'whole',
  transmitted: 'whole',
  transmitted_energy: 'whole',
  uncollided: 'whole',
  reflected: 'whole',
  reflected_energy: 'whole',
  side_escape: 'side',
  side_escape_energy: 'side',
  deposited_energy: 'layer',
  interacting: 'layer',
  full_energy: 'detector',
  peak_to_total: 'detector',
  intrinsic_interacting: 'detector_total',
  anticoincidence: 'coincidence',
  coincidence: 'coincidence',
  anticoincidence_full_energy: 'coincidence',
  air_kerma: 'dose',
  ambient_dose: 'dose',
  effective_dose_ap: 'dose',
  dose_transmission: 'any_dose',
  buildup: 'any_dose',
} as const;

export type QuantityName = keyof typeof QUANTITIES;

export const untilSchema = z
  .strictObject({
    quantity: choice('quantity', Object.keys(QUANTITIES) as QuantityName[], {
      description: 'Figure to watch.',
      examples: ['transmitted'],
    }),
    layer: text(limits.MAX_NAME, {
      description: 'Layer or dose point of the figure; default: the first that has it.',
    }).optional(),
    relative_error: share(
      { moreThan: 0, lessThan: 1 },
      { description: 'Relative standard error that is good enough.', examples: ['0.5 %'] },
    ),
  })
  .meta({ description: 'Stops the run when a figure is precise enough.' });

export const runSchema = z
  .strictObject({
    histories: wholeNumber(1, limits.MAX_HISTORIES, {
      description: 'Source photons followed at most.',
      default: limits.DEFAULTS.histories,
      examples: ['1e6'],
    }).optional(),
    until: untilSchema.optional(),
    time_limit: quantity(
      'time',
      { moreThan: 0, atMost: 1e8 },
      { description: 'Stops the run after this time.', examples: ['10 min'] },
    ).optional(),
    transport: choice('transport', ['auto', 'analog', 'deep'], {
      description:
        'analog: every photon as in nature; deep: for thick shields, without pulse heights; auto: what suits the setup.',
      default: 'auto',
    }).optional(),
  })
  .meta({ description: 'How long the run takes.' });
