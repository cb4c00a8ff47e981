/**
 * The language of setup files: every key with its form, its bounds and its description. The JSON Schema for editors
 * is made from this same definition. What one key demands of another is checked where the setup is put together.
 */
import * as z from 'zod';
import { complaints } from './errors.js';
import { field, readText, text } from './setup/fields.js';
import { DEFAULTS, MAX_TEXT } from './setup/limits.js';
import { extentSchema, materialsSchema, stackSchema } from './setup/schema-layer.js';
import { sourceSchema } from './setup/schema-source.js';
import { physicsSchema, runSchema, tallySchema } from './setup/schema-tally.js';

export const seedSchema = field(
  {
    type: ['string', 'integer'],
    description: 'Any text; the same seed gives the same results.',
    default: DEFAULTS.seed,
  },
  (raw) => {
    if (typeof raw !== 'number') return readText(raw, MAX_TEXT);
    return Number.isSafeInteger(raw) ? String(raw) : complaints.wrongType('a text', 'put it in quotes');
  },
);

export const setupSchema = z
  .strictObject({
    title: text(MAX_TEXT, { description: 'What the setup is, in a few words.' }).optional(),
    seed: seedSchema.optional(),
    source: sourceSchema,
    materials: materialsSchema.optional(),
    stack: stackSchema,
    extent: extentSchema.optional(),
    tally: tallySchema.optional(),
    physics: physicsSchema.optional(),
    run: runSchema.optional(),
  })
  .meta({ title: 'Thickset setup file' });

/** A setup file after every key has been read by itself. */
export type SetupKeys = z.output<typeof setupSchema>;

/** JSON Schema (draft 7, the one editors know best) of setup files. */
export function setupJsonSchema(): Record<string, unknown> {
  return { ...z.toJSONSchema(setupSchema, { io: 'input', target: 'draft-7' }) };
}
