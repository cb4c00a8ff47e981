/** The language of sweep files. */
import * as z from 'zod';
import {
  choice,
  field,
  list,
  quantity,
  share,
  text,
  trueOrFalse,
  wholeNumber,
  type Described,
} from '../setup/fields.js';
import { MAX_TEXT } from '../setup/limits.js';
import { untilSchema } from '../setup/schema-tally.js';
import { seedSchema } from '../setup-schema.js';

export const MAX_POINTS = 100_000;

/** A part that is taken as it is: what it may be is for the check of the setups to say. */
const asWritten = (described: Described) => field({ ...described }, (raw) => raw);

const rangeSchema = z
  .strictObject({
    from: asWritten({ description: 'First value.', examples: ['1 cm'] }),
    to: asWritten({ description: 'Last value.', examples: ['10 cm'] }),
    count: wholeNumber(1, MAX_POINTS, { description: 'Number of values.', examples: [10] }).optional(),
    spacing: choice('spacing', ['linear', 'log'], {
      description: 'Equal steps or equal ratios.',
      default: 'linear',
    }).optional(),
  })
  .meta({ description: 'Values from one to another.' });

const valuesSchema = z.union([
  list(asWritten({ description: 'A value as in a setup file.' }), 1, MAX_POINTS, {
    description: 'The values one by one.',
  }),
  rangeSchema,
]);

export const sweepSchema = z
  .strictObject({
    title: text(MAX_TEXT, { description: 'What the sweep is, in a few words.' }).optional(),
    seed: seedSchema.optional(),
    base: asWritten({
      description: 'A setup file in the folder of the sweep file or below it, or the setup itself.',
      examples: ['setup.yaml'],
    }),
    vary: z.record(z.string(), valuesSchema).meta({
      description: 'Paths into the setup, each with a list of values or a range.',
      examples: [{ 'stack.shield.thickness': { from: '1 cm', to: '10 cm', count: 10 } }],
    }),
    combine: choice('combination', ['grid', 'zip'], {
      description: 'grid: every value with every other; zip: first with first, second with second.',
      default: 'grid',
    }).optional(),
    samples: wholeNumber(1, MAX_POINTS, {
      description: 'So many points spread evenly over all ranges (Latin hypercube), in place of a grid.',
      examples: [200],
    }).optional(),
    precision: z
      .union([
        untilSchema,
        share(
          { moreThan: 0, lessThan: 1 },
          { description: 'Relative standard error at which a point is good enough.', examples: ['1 %'] },
        ),
      ])
      .optional(),
    time_limit: quantity(
      'time',
      { moreThan: 0, atMost: 1e8 },
      { description: 'Time for the whole sweep, spent where errors are largest.', examples: ['10 h'] },
    ).optional(),
    spectra: trueOrFalse({
      description: 'Writes the spectra of every point.',
      default: false,
    }).optional(),
  })
  .meta({ title: 'Thickset sweep file' });

/** A sweep file after every key has been read by itself. */
export type SweepKeys = z.output<typeof sweepSchema>;
export type RangeKeys = z.output<typeof rangeSchema>;

/** JSON Schema (draft 7, the one editors know best) of sweep files; what stands under base is not looked into. */
export function sweepJsonSchema(): Record<string, unknown> {
  return { ...z.toJSONSchema(sweepSchema, { io: 'input', target: 'draft-7' }) };
}
