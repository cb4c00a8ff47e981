/** `thickset material`: what a material is made of and how it attenuates a narrow beam. */
import { InvalidArgumentError, type Command } from 'commander';
import { MaterialError } from '../materials/index.js';
import { parseColumns } from './command-options.js';
import { Complaint, errors, type ThicksetError } from './errors.js';
import { DEFAULT_ENERGIES_KEV, materialFacts, type MaterialFacts } from './material-facts.js';
import { materialObject } from './material-json.js';
import { show } from './show.js';
import { prepareWidths } from './text/display-width.js';
import { materialLines } from './text/material-text.js';
import { makeStyle } from './text/style.js';
import { describeTerminal } from './text/terminal.js';
import { parseQuantity, type Dimension } from './units.js';

interface MaterialOptions {
  readonly energies: readonly number[];
  readonly density?: number;
  readonly width?: number;
  readonly json?: boolean;
}

const MOST_ENERGIES = 1000;

/** Adds `material` to the program. */
export function registerMaterialCommand(program: Command): void {
  program
    .command('material')
    .description('show composition, attenuation coefficients and narrow-beam thicknesses of a material')
    .argument('<name>', 'a named material, an element, or a chemical formula with --density')
    .option(
      '--energies <list>',
      'energies with units, as in "60 keV, 1.25 MeV"; default: a grid from 1 keV to 20 MeV',
      parseEnergies,
      DEFAULT_ENERGIES_KEV,
    )
    .option('--density <density>', 'with its unit, as in "2.35 g/cm3"; needed for a formula', parseDensity)
    .option('--width <columns>', 'width of the text; default: that of the terminal', parseColumns)
    .option('--json', 'print one JSON object instead')
    .action(async (name: string, options: MaterialOptions) => {
      await printFacts(lookUp(name, options), options);
    });
}

async function printFacts(facts: MaterialFacts, options: MaterialOptions): Promise<void> {
  if (options.json) {
    process.stdout.write(`${JSON.stringify(materialObject(facts), null, 2)}\n`);
    return;
  }
  const style = makeStyle(describeTerminal(process.stdout), options.width);
  await prepareWidths([facts.name]);
  process.stdout.write(`${materialLines(facts, style).join('\n')}\n`);
}

function lookUp(name: string, { density, energies }: MaterialOptions): MaterialFacts {
  try {
    return materialFacts(name, density, energies);
  } catch (cause) {
    throw cause instanceof MaterialError ? inWords(name, cause) : cause;
  }
}

/** What is wrong with the words on the command line. */
function inWords(name: string, { code, rule, value, suggestion }: MaterialError): ThicksetError {
  const meant = suggestion === null ? null : `did you mean ${suggestion}?`;
  if (code === 'unknown_material') return errors.unknownMaterial(name, suggestion);
  if (code === 'energy_out_of_range') return errors.usage(`--energies: ${rule}, got ${value}`);
  if (code === 'bad_density') return errors.usage(`--density: ${rule}, got ${value}`);
  if (code === 'no_density') {
    return errors.usage(`the formula ${show(name)} needs a density`, 'add one, as in --density "2.35 g/cm3"');
  }
  return errors.usage(`material ${show(name)}: ${rule}, got ${value}`, meant);
}

function parseDensity(text: string): number {
  return quantity(text, 'density');
}

/** Energies between commas, each with its unit. */
function parseEnergies(text: string): readonly number[] {
  const parts = text.split(',');
  if (parts.length > MOST_ENERGIES) {
    throw new InvalidArgumentError(`takes at most ${MOST_ENERGIES} energies.`);
  }
  return parts.map((part) => quantity(part, 'energy'));
}

function quantity(text: string, dimension: Dimension): number {
  const read = parseQuantity(text, [dimension]);
  if (!(read instanceof Complaint)) return read.value;
  const wayOut = read.wayOut === null ? '' : `; ${read.wayOut}`;
  throw new InvalidArgumentError(`${show(text.trim())} ${read.rule}${wayOut}.`);
}
