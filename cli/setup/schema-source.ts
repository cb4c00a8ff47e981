/** The `source` section: where photons start, in which direction, and with what energies. */
import * as z from 'zod';
import { choice, list, quantity, share, text, wholeNumber } from './fields.js';
import { DISTANCE, ENERGY, MAX_GRID_ENERGIES, MAX_LINES, MAX_NAME, MAX_TEXT, SIZE } from './limits.js';

/** The keys of which a source has exactly one. */
export const EMISSION_KEYS = ['energy', 'lines', 'spectrum', 'nuclide', 'energies'] as const;
export const NUCLIDE_KEYS = ['minimum_yield', 'minimum_energy'] as const;

const lineSchema = z.strictObject({
  energy: quantity('energy', ENERGY, { description: 'Energy of the line.' }),
  per_decay: share(
    { moreThan: 0, atMost: 1e6 },
    { description: 'Photons per decay, or a relative weight.', examples: [0.9985, '85.1 %'] },
  ),
});

const energiesSchema = z
  .strictObject({
    from: quantity('energy', ENERGY, { description: 'Lowest energy.', examples: ['30 keV'] }),
    to: quantity('energy', ENERGY, { description: 'Highest energy.', examples: ['3 MeV'] }),
    count: wholeNumber(2, MAX_GRID_ENERGIES, { description: 'Number of energies.', examples: [40] }),
    spacing: choice('spacing', ['linear', 'log'], {
      description: 'Equal steps or equal ratios.',
      default: 'log',
    }).optional(),
  })
  .meta({ description: 'Many single energies, each run by itself: an efficiency curve.' });

const emission = {
  energy: quantity('energy', ENERGY, { description: 'One energy for all photons.' }).optional(),
  lines: list(lineSchema, 1, MAX_LINES, { description: 'Several energies with their weights.' }).optional(),
  spectrum: text(MAX_TEXT, {
    description:
      'CSV file with the columns energy_kev and relative photons, in the folder of the setup file or below it.',
    examples: ['tube.csv'],
  }).optional(),
  nuclide: text(MAX_NAME, { description: 'Lines of a nuclide.', examples: ['Cs-137', 'Co-60'] }).optional(),
  minimum_yield: share(
    { atLeast: 0, lessThan: 10 },
    { description: 'Leaves out lines of the nuclide with fewer photons per decay.', examples: ['1 %', 0.01] },
  ).optional(),
  minimum_energy: quantity('energy', ENERGY, {
    description: 'Leaves out lines of the nuclide with less energy.',
    examples: ['30 keV'],
  }).optional(),
  energies: energiesSchema.optional(),
  activity: quantity(
    'activity',
    { moreThan: 0, atMost: 1e21 },
    {
      description:
        'Decays per second (photons per second where no decay is meant); adds counts and dose rates to the results.',
    },
  ).optional(),
  live_time: quantity(
    'time',
    { moreThan: 0, atMost: 1e10 },
    {
      description: 'Counting time for counts in a measurement; needs an activity.',
      examples: ['300 s', '1 h'],
    },
  ).optional(),
};

const oneEmission = { oneOf: EMISSION_KEYS.map((key) => ({ required: [key] })) };

function shape<const K extends string, S extends z.ZodRawShape>(kind: K, description: string, keys: S) {
  return z
    .strictObject({ kind: z.literal(kind), ...keys, ...emission })
    .meta({ description, ...oneEmission });
}

export const sourceSchema = z
  .discriminatedUnion('kind', [
    shape('beam', 'Parallel photons onto the front face.', {
      angle: quantity(
        'angle',
        { atLeast: 0, lessThan: 90 },
        { description: 'Angle from the normal of the front face.', default: '0 deg' },
      ).optional(),
      diameter: quantity('length', DISTANCE, {
        description:
          'Diameter of the beam; without it all photons run along one line that meets the axis at the front face.',
        examples: ['5 mm'],
      }).optional(),
    }),
    shape('diffuse', 'Photons from the whole half space in front.', {
      law: choice('law', ['isotropic', 'uniform_solid_angle'], {
        description:
          'isotropic: constant radiance, so that the current goes with the cosine; uniform_solid_angle: all directions alike.',
        default: 'isotropic',
      }).optional(),
    }),
    shape('point', 'A point in front of the stack that emits in all directions.', {
      distance: quantity('length', DISTANCE, { description: 'From the front face.', examples: ['25 cm'] }),
      offset: quantity('length', DISTANCE, {
        description: 'Away from the axis.',
        default: '0 cm',
      }).optional(),
    }),
    shape('disc', 'A disc around the axis, parallel to the front face, that emits in all directions.', {
      distance: quantity('length', DISTANCE, { description: 'From the front face.', examples: ['10 cm'] }),
      radius: quantity('length', SIZE, { description: 'Radius of the disc.', examples: ['2.5 cm'] }),
    }),
    shape('embedded', 'Uniform in a layer, in all directions.', {
      layer: text(MAX_NAME, { description: 'Name of the layer.', examples: ['soil'] }),
    }),
  ])
  .meta({
    description: 'Where photons start and with what energies.',
    examples: [{ kind: 'beam', energy: '661.7 keV' }],
  });
