/** An efficiency curve on one screen: a table, a plot and the fitted polynomials of each detector. */
import type { CurveRow, FittedQuantity } from '../efficiency/curve-rows.js';
import type { CurveFit } from '../efficiency/fit-curve.js';
import type { StoredResult } from '../result/stored-result.js';
import { clip } from '../show.js';
import { displayWidth } from './display-width.js';
import { formatFigure, formatNumber, formatPercent, relativeError } from './figure-format.js';
import { plotLogLog } from './log-plot.js';
import type { Style } from './style.js';
import { alignFigures, alignRight, renderTable, wrap } from './text-table.js';

const NAMES: Readonly<Record<FittedQuantity, string>> = { full_energy: 'full energy', interacting: 'total' };

/** The sections of all detectors. */
export function curveSections({ efficiency }: StoredResult, style: Style): string[] {
  const { rows = [], fits = [] } = efficiency ?? {};
  const layers = [...new Set(rows.map(({ layer }) => layer))];
  return layers.flatMap((layer) => {
    const own = rows.filter((row) => row.layer === layer);
    return [
      '',
      style.heading(`Efficiency, ${clip(layer)}`),
      ...tableLines(own, style),
      ...plotLines(own, style),
      ...fitLines(
        fits.filter((fit) => fit.layer === layer),
        style,
      ),
    ];
  });
}

/** The last ones of the table. */
const INTRINSIC_COLUMNS = 2;

/** Efficiencies per photon emitted with their errors; where there is room, per photon that strikes the front face. */
function tableLines(rows: readonly CurveRow[], style: Style): string[] {
  const figures = (quantity: FittedQuantity): string[] =>
    alignFigures(
      rows.map((row) => ({ ...formatFigure(row[quantity].mean, row[quantity].stdError), unit: '' })),
      style.plusMinus,
    );
  const errors = (quantity: FittedQuantity): string[] =>
    alignRight(
      rows.map((row) => {
        const error = relativeError(row[quantity].mean, row[quantity].stdError);
        return error === null ? '' : formatPercent(error);
      }),
    );
  const plain = (quantity: 'intrinsic_full_energy' | 'intrinsic_interacting'): string[] =>
    rows.map(({ [quantity]: { mean } }) => (mean === null ? '' : formatNumber(mean)));
  const columns = [
    alignRight(rows.map(({ energyKeV }) => formatNumber(energyKeV, 5))),
    figures('full_energy'),
    errors('full_energy'),
    figures('interacting'),
    errors('interacting'),
    plain('intrinsic_full_energy'),
    plain('intrinsic_interacting'),
  ];
  const table = (shown: number): string[] =>
    renderTable(
      [
        ['', 'per photon emitted', '', '', '', 'incident', ''],
        ['keV', 'full energy', 'error', 'total', 'error', 'full', 'total'],
        ...rows.map((_, at) => columns.map((column) => column[at])),
      ].map((cells) => cells.slice(0, shown)),
    );
  const whole = table(columns.length);
  const fits = whole.every((line) => displayWidth(line) <= style.width);
  const [first, second, ...lines] = fits ? whole : table(columns.length - INTRINSIC_COLUMNS);
  return [style.note(first), style.note(second), ...lines];
}

function plotLines(rows: readonly CurveRow[], style: Style): string[] {
  const [full, total] = style.unicode ? ['●', '○'] : ['o', '+'];
  const points = (quantity: FittedQuantity) =>
    rows.map((row) => ({ x: row.energyKeV, y: row[quantity].mean ?? 0 }));
  const lines = plotLogLog(
    [
      { mark: full, points: points('full_energy') },
      { mark: total, points: points('interacting') },
    ],
    'keV',
    style,
  );
  if (lines.length === 0) return [];
  const caption = `(per photon emitted; ${full} full energy, ${total} total)`;
  return [
    '',
    `${style.heading('Efficiency against energy')} ${style.note(caption)}`,
    ...lines.map(style.drawing),
  ];
}

/** Coefficients with their errors; covariances stand in the files. */
function fitLines(fits: readonly CurveFit[], style: Style): string[] {
  if (fits.length === 0) return [];
  const said =
    'ln(efficiency) = a0 + a1 x + a2 x^2 + ..., x = ln(E / 1 MeV); covariances in efficiency_fit.arrow';
  return [
    '',
    style.heading('Fitted polynomials'),
    ...wrap(said, style.width - 2).map((line) => style.note(`  ${line}`)),
    ...fits.flatMap((fit) => oneFit(fit, style)),
  ];
}

function oneFit(fit: CurveFit, style: Style): string[] {
  const { energyLowKeV, energyHighKeV, chiSquare, degreesOfFreedom, worstDeviation } = fit;
  const range = `${formatNumber(energyLowKeV, 5)} to ${formatNumber(energyHighKeV, 5)} keV`;
  const quality =
    `chi-square ${formatNumber(chiSquare, 3)} for ${degreesOfFreedom} degrees of freedom, ` +
    `off by ${formatPercent(worstDeviation)} at most`;
  const figures = alignFigures(
    fit.coefficients.map((value, k) => ({
      ...formatFigure(value, Math.sqrt(fit.covariance[k][k])),
      unit: '',
    })),
    style.plusMinus,
  );
  return [
    ...wrap(`${NAMES[fit.quantity]}, ${range}: ${quality}`, style.width - 2).map((line) => `  ${line}`),
    ...renderTable(
      figures.map((figure, k) => [`a${k}`, figure]),
      4,
    ),
  ];
}
