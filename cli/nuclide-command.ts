/** `thickset nuclide`: the photons a nuclide emits and where the data come from; without a name, all nuclides. */
import { InvalidArgumentError, type Command } from 'commander';
import { findNuclide, nearestNuclideName, nuclideLines, nuclides, type Nuclide } from '../materials/index.js';
import { parseColumns } from './command-options.js';
import { Complaint, errors } from './errors.js';
import { nuclideObject } from './nuclide-json.js';
import { show } from './show.js';
import { nuclideListLines, nuclideTextLines } from './text/nuclide-text.js';
import { makeStyle } from './text/style.js';
import { describeTerminal } from './text/terminal.js';
import { parseNumber, parseQuantity } from './units.js';

interface NuclideOptions {
  readonly minimumYield?: number;
  readonly minimumEnergy?: number;
  readonly width?: number;
  readonly json?: boolean;
}

/** Adds `nuclide` to the program. */
export function registerNuclideCommand(program: Command): void {
  program
    .command('nuclide')
    .description('show half-life, gamma, X-ray and annihilation lines of a nuclide; without a name, list all')
    .argument('[name]', 'Cs-137, 137Cs, cs137, caesium-137; with a plus a chain in equilibrium: Ra-226+')
    .option(
      '--minimum-yield <share>',
      'leave out lines with fewer photons per decay: "1 %" or 0.01',
      parseYield,
    )
    .option('--minimum-energy <energy>', 'leave out lines with less energy, as in "30 keV"', parseEnergy)
    .option('--width <columns>', 'width of the text; default: that of the terminal', parseColumns)
    .option('--json', 'print one JSON object instead')
    .action((name: string | undefined, options: NuclideOptions) => {
      if (name === undefined) printList(options);
      else printNuclide(lookUp(name), options);
    });
}

function lookUp(name: string): Nuclide {
  const nuclide = findNuclide(name);
  if (nuclide === undefined) throw errors.unknownNuclide(name, nearestNuclideName(name) ?? null);
  return nuclide;
}

function printNuclide(nuclide: Nuclide, options: NuclideOptions): void {
  const lines = nuclideLines(nuclide, {
    minimumYield: options.minimumYield,
    minimumEnergyKeV: options.minimumEnergy,
  });
  if (options.json) {
    printJson(nuclideObject(nuclide, lines));
    return;
  }
  printText(nuclideTextLines(nuclide, lines, style(options)));
}

function printList(options: NuclideOptions): void {
  const rows = nuclides().map((nuclide) => {
    const lines = nuclideLines(nuclide, {
      minimumYield: options.minimumYield,
      minimumEnergyKeV: options.minimumEnergy,
    });
    return { ...nuclide, lines };
  });
  if (options.json) printJson({ nuclides: rows.map((row) => nuclideObject(row, row.lines)) });
  else printText(nuclideListLines(rows, style(options)));
}

const style = (options: NuclideOptions) => makeStyle(describeTerminal(process.stdout), options.width);

function printText(lines: readonly string[]): void {
  process.stdout.write(`${lines.join('\n')}\n`);
}

function printJson(value: object): void {
  process.stdout.write(`${JSON.stringify(value, null, 2)}\n`);
}

function parseYield(text: string): number {
  const share = parseNumber(text);
  const percent = Number.isNaN(share) ? parseQuantity(text, ['percent']) : null;
  const value = percent === null || percent instanceof Complaint ? share : percent.value / 100;
  if (value >= 0 && value < Infinity) return value;
  throw new InvalidArgumentError(`must be photons per decay, as in 0.01 or "1 %", got ${show(text)}.`);
}

function parseEnergy(text: string): number {
  const read = parseQuantity(text, ['energy']);
  if (!(read instanceof Complaint)) return read.value;
  throw new InvalidArgumentError(
    `${show(text.trim())} ${read.rule}${read.wayOut === null ? '' : `; ${read.wayOut}`}.`,
  );
}
