/** A nuclide on one screen, and the list of all nuclides. */
import type { Nuclide, NuclideLine } from '../../materials/index.js';
import { displayWidth } from './display-width.js';
import { formatFigure, formatNumber } from './figure-format.js';
import type { Style } from './style.js';
import { alignFigures, renderTable, wrap } from './text-table.js';

const LABEL_WIDTH = 13;
const KIND_NAMES = { gamma: 'gamma', x_ray: 'X ray', annihilation: 'annihilation' } as const;
const LIMITS =
  'Lines from 5 keV and 0.5 photons per 100 decays up are known; X rays of one shell may stand as one line at their ' +
  'mean energy. Annihilation quanta suppose that the source stops its positrons.';

// Year of 365.2422 d (tropical year, as the evaluations use it).
const SPANS: readonly (readonly [number, string])[] = [
  [31_556_926, 'a'],
  [86_400, 'd'],
  [3600, 'h'],
  [60, 'min'],
  [1, 's'],
];

/** A half-life in the largest unit of which it holds at least two: 30.02 a, 8.023 d, 66 s. */
export function formatHalfLife(seconds: number): string {
  const [span, unit] = SPANS.find(([size]) => seconds >= 2 * size) ?? [1, 's'];
  return `${formatNumber(seconds / span)} ${unit}`;
}

/** All lines of the screen of one nuclide; `lines` are those of its lines that are shown. */
export function nuclideTextLines(nuclide: Nuclide, lines: readonly NuclideLine[], style: Style): string[] {
  const chain = nuclide.members.length > 1;
  return [
    style.heading(nuclide.name),
    ...labelled('half-life', formatHalfLife(nuclide.halfLifeS), style),
    ...labelled('also called', nuclide.aliases.join(', '), style),
    ...labelled('holds', chain ? membersText(nuclide) : '', style),
    ...labelled('note', nuclide.note ?? '', style),
    ...nuclide.evaluations.flatMap((evaluation, i) => labelled(i === 0 ? 'source' : '', evaluation, style)),
    '',
    style.heading(
      chain ? `Photons per 100 decays of ${nuclide.members[0].nuclide}` : 'Photons per 100 decays',
    ),
    ...lineTable(nuclide, lines, style),
    '',
    ...wrap(LIMITS, style.width).map(style.note),
  ];
}

/** The list of all nuclides with half-life, number and sum of lines, and the strongest line. */
export function nuclideListLines(nuclides: readonly Nuclide[], style: Style): string[] {
  const rows = nuclides.map((nuclide) => {
    const strongest = nuclide.lines.reduce<NuclideLine | null>(
      (best, line) => (best === null || line.perDecay > best.perDecay ? line : best),
      null,
    );
    return [
      nuclide.name,
      formatHalfLife(nuclide.halfLifeS),
      String(nuclide.lines.length),
      formatNumber(100 * sumPerDecay(nuclide.lines)),
      strongest === null ? '' : `${formatNumber(strongest.energyKeV, 6)} keV`,
      nuclide.members.length > 1 ? 'chain' : '',
    ];
  });
  return [
    style.heading('Nuclides'),
    ...renderTable([['name', 'half-life', 'lines', 'per 100 decays', 'strongest', ''], ...rows]),
    '',
    ...wrap('thickset nuclide NAME shows the lines and their sources.', style.width).map(style.note),
  ];
}

function lineTable(nuclide: Nuclide, lines: readonly NuclideLine[], style: Style): string[] {
  if (lines.length === 0) return ['  none'];
  const energies = lines.map(({ energyKeV, energyUncertaintyKeV }) => ({
    ...formatFigure(energyKeV, energyUncertaintyKeV),
    value:
      energyUncertaintyKeV === null
        ? formatNumber(energyKeV, 7)
        : formatFigure(energyKeV, energyUncertaintyKeV).value,
    unit: '',
  }));
  const yields = lines.map(({ perDecay, perDecayUncertainty }) => ({
    ...formatFigure(100 * perDecay, perDecayUncertainty === null ? null : 100 * perDecayUncertainty),
    unit: '',
  }));
  const [energyCells, yieldCells] = [energies, yields].map((cells) => alignFigures(cells, style.plusMinus));
  const emitters = nuclide.members.length > 1;
  const rows = lines.map((line, i) => [
    energyCells[i],
    yieldCells[i],
    KIND_NAMES[line.kind],
    line.kind === 'x_ray' ? line.transition.replace(/^X/, '') : '',
    emitters ? line.emitter : '',
  ]);
  const total = formatNumber(100 * sumPerDecay(lines));
  return [
    ...renderTable([['energy, keV', 'per 100', 'kind', '', emitters ? 'decay of' : ''], ...rows]),
    `  ${lines.length === 1 ? '1 line' : `${lines.length} lines`}, ${total} photons per 100 decays`,
  ];
}

function membersText(nuclide: Nuclide): string {
  return nuclide.members
    .map(({ nuclide: name, perDecay }) =>
      perDecay === 1 ? name : `${name} (${formatNumber(perDecay)} per decay)`,
    )
    .join(', ');
}

function sumPerDecay(lines: readonly NuclideLine[]): number {
  return lines.reduce((sum, { perDecay }) => sum + perDecay, 0);
}

/** A label with a text that goes on under itself; nothing for an empty text. */
function labelled(label: string, text: string, style: Style): string[] {
  if (text === '') return [];
  return wrap(text, style.width - LABEL_WIDTH - 2).map((line, i) => {
    const shown = i === 0 ? label : '';
    return `  ${style.note(shown)}${' '.repeat(LABEL_WIDTH - displayWidth(shown))}${line}`;
  });
}
