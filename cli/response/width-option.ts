/** `--fwhm`: widths of peaks on the command line, in the form they have in setup files. */
import type { Resolution } from '../../engine/setup.js';
import { nearestWord } from '../../materials/index.js';
import { errors, formatPath, SetupError, type ThicksetError } from '../errors.js';
import type { ManifestLayer } from '../result/manifest.js';
import { ProblemList } from '../setup/problem-list.js';
import { readKeys } from '../setup/read-keys.js';
import { fwhmSchema } from '../setup/schema-layer.js';
import { makeResolution } from '../setup/stack.js';
import { readYaml } from '../setup/yaml-source.js';
import { listOr, show } from '../show.js';
import type { WidthChoice } from './respond.js';

/** What makes a detector one without broadening. */
const NONE = 'none';

/**
 * The widths of `WIDTH` (all detectors) and `LAYER=WIDTH`, the later ones before the earlier.
 *
 * @throws ThicksetError usage
 */
export function readWidths(texts: readonly string[], stack: readonly ManifestLayer[]): WidthChoice {
  const detectors = stack.filter(({ detector }) => detector).map(({ name }) => name);
  if (detectors.length === 0) throw errors.usage('--fwhm: the run has no detector');
  const widths = new Map<string, Resolution | null>();
  for (const text of texts) {
    const at = text.lastIndexOf('=');
    const layer = at < 0 ? null : text.slice(0, at).trim();
    if (layer !== null && !detectors.includes(layer)) throw unknownDetector(layer, detectors);
    const width = readWidth(text.slice(at + 1).trim());
    for (const name of layer === null ? detectors : [layer]) widths.set(name, width);
  }
  return widths;
}

function unknownDetector(layer: string, detectors: readonly string[]): ThicksetError {
  const nearest = nearestWord(layer, detectors);
  const way = nearest === null ? `detectors here: ${listOr(detectors)}` : `did you mean ${nearest}?`;
  return errors.usage(`--fwhm: no detector ${show(layer)}`, way);
}

function readWidth(text: string): Resolution | null {
  if (text === NONE) return null;
  const problems = new ProblemList('--fwhm');
  // A mapping or a list as in a setup file; anything else is a width at an energy.
  const raw = /^[{[]/.test(text) ? readYaml(text, problems) : text;
  const keys = raw === undefined ? undefined : readKeys(fwhmSchema, raw, problems);
  const resolution = keys === undefined ? null : makeResolution(keys, [], problems);
  try {
    problems.throwIfAny();
  } catch (cause) {
    if (!(cause instanceof SetupError)) throw cause;
    const [{ path, rule, got, wayOut }] = cause.problems;
    const where = path.length === 0 ? '--fwhm' : `--fwhm: ${formatPath(path)}`;
    throw errors.usage(`${where} ${rule}${got === null ? '' : `, got ${got}`}`, wayOut);
  }
  return resolution;
}
