/** The `materials`, `stack` and `extent` sections: what stands in the way of the photons. */
import * as z from 'zod';
import { MAX_LAYERS } from '../../engine/setup.js';
import { Complaint, complaints } from '../errors.js';
import {
  parseNumber,
  parseQuantity,
  quantityPattern,
  unitExample,
  type Dimension,
  type Quantity,
} from '../units.js';
import { field, list, quantity, rangeComplaint, share, text, type Range } from './fields.js';
import {
  DENSITY,
  ENERGY,
  MAX_LENGTH_CM,
  MIN_LENGTH_CM,
  MAX_MATERIALS,
  MAX_NAME,
  MAX_TEXT,
  MAX_WINDOWS,
  SIZE,
} from './limits.js';

/** A width that is known at one energy. */
export interface WidthAtEnergy {
  readonly fwhmKeV: number;
  readonly atKeV: number;
}

const materialSchema = z
  .strictObject({
    formula: text(MAX_TEXT, { description: 'Chemical formula.', examples: ['Cd0.9Zn0.1Te'] }).optional(),
    mass_fractions: z
      .record(
        z.string(),
        share({ atLeast: 0, atMost: 1 }, { description: 'Share of the mass.', examples: [0.7, '70 %'] }),
      )
      .meta({
        description: 'Mass fraction of each part (element, formula or named material); they add up to 1.',
      })
      .optional(),
    density: quantity('density', DENSITY, { description: 'Density.' }),
  })
  .meta({ oneOf: [{ required: ['formula'] }, { required: ['mass_fractions'] }] });

export const materialsSchema = z.record(z.string(), materialSchema).meta({
  description: `Own materials, at most ${MAX_MATERIALS}; they go before known materials of the same name.`,
});

/** Widths above the photon energies of any setup are slips of the pen. */
const WIDTH: Range = { moreThan: 0, atMost: 20_000 };

const energyOrPercent: readonly Dimension[] = ['energy', 'percent'];

function readWidth(raw: unknown): Quantity | Complaint {
  const width = parseQuantity(raw, energyOrPercent);
  if (width instanceof Complaint) return width;
  return rangeComplaint(width.value, WIDTH, width.dimension === 'energy' ? 'keV' : '%') ?? width;
}

/** A width in keV from an energy, or from a percentage of the energy it belongs to. */
export function widthKeV(width: Quantity, energyKeV: number): number {
  return width.dimension === 'energy' ? width.value : (width.value * energyKeV) / 100;
}

function readWidthAtEnergy(raw: unknown): WidthAtEnergy | Complaint {
  const halves = typeof raw === 'string' ? raw.split(/\s+at\s+/) : [];
  if (halves.length !== 2) return complaints.widthForm();
  const width = readWidth(halves[0]);
  if (width instanceof Complaint) return width;
  const energy = parseQuantity(halves[1], ['energy']);
  if (energy instanceof Complaint) return energy;
  const broken = rangeComplaint(energy.value, ENERGY, 'keV');
  return broken ?? { fwhmKeV: widthKeV(width, energy.value), atKeV: energy.value };
}

/** A coefficient of the width formula: a bare number is in units of keV, which is what E and FWHM are in. */
function coefficient(dimension: Dimension, range: Range, description: string) {
  const meta = {
    anyOf: [{ type: 'number' }, { type: 'string', pattern: quantityPattern([dimension]) }],
    description,
    examples: [unitExample([dimension])],
  };
  return field(meta, (raw) => {
    const plain = parseNumber(raw);
    if (!Number.isNaN(plain)) return rangeComplaint(plain, range, '') ?? plain;
    const parsed = typeof raw === 'number' ? complaints.notFinite() : parseQuantity(raw, [dimension]);
    if (parsed instanceof Complaint) return parsed;
    return rangeComplaint(parsed.value, range, '') ?? parsed.value;
  });
}

const formulaSchema = z
  .strictObject({
    a: coefficient('energy', { atLeast: -1000, atMost: 1000 }, 'a in keV.'),
    b: coefficient('root_energy', { atLeast: 0, atMost: 1000 }, 'b in square roots of keV.'),
    c: coefficient('per_energy', { atLeast: 0, atMost: 1000 }, 'c in 1/keV.'),
  })
  .meta({ description: 'FWHM = a + b √(E + c E²), with FWHM and E in keV.' });

const widthRowSchema = z.strictObject({
  energy: quantity('energy', ENERGY, { description: 'Energy.' }),
  fwhm: field(
    {
      type: 'string',
      pattern: quantityPattern(energyOrPercent),
      description: 'Width at this energy.',
      examples: ['46 keV', '7 %'],
    },
    readWidth,
  ),
});

const windowSchema = z.strictObject({
  name: text(MAX_NAME, { description: 'Name of the window in the results.' }),
  from: quantity('energy', { atLeast: 0, atMost: 20_000 }, { description: 'Lower edge.' }),
  to: quantity('energy', { moreThan: 0, atMost: 20_000 }, { description: 'Upper edge.' }),
});

/** A width at an energy, a formula or a table. */
export const fwhmSchema = z
  .union([
    field(
      {
        type: 'string',
        description: 'Width at one energy; it grows with the square root of the energy.',
        examples: ['7 % at 661.7 keV', '1.8 keV at 1332.5 keV'],
      },
      readWidthAtEnergy,
    ),
    formulaSchema,
    list(widthRowSchema, 2, 1000, { description: 'Widths at several energies.' }),
  ])
  .meta({
    description: 'Full width at half maximum of a peak; without it the spectrum is not broadened.',
  });

const detectorSchema = z
  .strictObject({
    fwhm: fwhmSchema.optional(),
    threshold: quantity(
      'energy',
      { atLeast: 0, atMost: 20_000 },
      { description: 'Smaller pulses are not registered.', examples: ['10 keV'] },
    ).optional(),
    windows: list(windowSchema, 1, MAX_WINDOWS, {
      description: 'Named energy windows in which counts are given.',
    }).optional(),
  })
  .meta({
    description: 'Makes the layer a detector, with a pulse-height spectrum. {} is one without broadening.',
  });

/** Bounds of a thickness in cm. */
export const THICKNESS_CM: Range = { moreThan: 0, atLeast: MIN_LENGTH_CM, atMost: MAX_LENGTH_CM };
const THICKNESS: readonly Dimension[] = ['length', 'mass_per_area'];

const layerSchema = z.strictObject({
  name: text(MAX_NAME, {
    description: 'Name in the results; default: material and position, as in "lead-2".',
  }).optional(),
  material: text(MAX_NAME, {
    description: 'A known material, an own one, or vacuum.',
    examples: ['NaI', 'lead', 'dry air', 'vacuum'],
  }),
  thickness: field(
    {
      type: 'string',
      pattern: quantityPattern(THICKNESS),
      description: 'Thickness, or mass per area.',
      examples: ['7.62 cm', '0.5 mm', '2 g/cm2'],
    },
    (raw) => {
      const parsed = parseQuantity(raw, THICKNESS);
      if (parsed instanceof Complaint) return parsed;
      // What a mass per area comes to is known when the density is.
      return (
        rangeComplaint(parsed.value, parsed.dimension === 'length' ? THICKNESS_CM : { moreThan: 0 }, 'cm') ??
        parsed
      );
    },
  ),
  density: quantity(
    'density',
    { ...DENSITY, moreThan: undefined, atLeast: 0 },
    { description: 'Replaces the density of the material; 0 g/cm3 makes a vacuum.', examples: ['1.2 g/cm3'] },
  ).optional(),
  radius: quantity('length', SIZE, {
    description: 'Own radius of the layer; outside it is vacuum. Default: that of the extent.',
    examples: ['3.81 cm'],
  }).optional(),
  detector: detectorSchema.optional(),
});

export const stackSchema = list(layerSchema, 1, MAX_LAYERS, {
  description: 'Layers from the source side outwards.',
  examples: [[{ material: 'lead', thickness: '5 cm' }]],
});

export const extentSchema = z
  .strictObject({
    radius: quantity('length', SIZE, {
      description: 'Radius of the layers.',
      examples: ['3.81 cm'],
    }).optional(),
    width: quantity('length', SIZE, { description: 'Width of the layers.', examples: ['10 cm'] }).optional(),
    height: quantity('length', SIZE, {
      description: 'Height of the layers.',
      examples: ['10 cm'],
    }).optional(),
  })
  .meta({
    description: 'Lateral size: a radius, or width and height. Without it the layers have no edge.',
    oneOf: [{ required: ['radius'] }, { required: ['width', 'height'] }],
  });
