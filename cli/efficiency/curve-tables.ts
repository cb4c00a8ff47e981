/** efficiency.arrow and efficiency_fit.arrow: columns, and how rows turn into them and back. */
import {
  decodeTable,
  encodeTable,
  type ColumnContent,
  type ColumnLabel,
  type TextColumn,
} from '../result/arrow-file.js';
import {
  CURVE_QUANTITIES,
  HIGHEST_DEGREE,
  type CurveQuantity,
  type CurveRow,
  type CurveValue,
} from './curve-rows.js';
import type { CurveFit } from './fit-curve.js';

const MEANINGS: Readonly<Record<CurveQuantity, string>> = {
  full_energy: 'Full-energy peak efficiency, per photon emitted',
  interacting: 'Total efficiency, per photon emitted',
  intrinsic_full_energy: 'Full-energy peak efficiency, per photon that strikes the front face',
  intrinsic_interacting: 'Total efficiency, per photon that strikes the front face',
  peak_to_total: 'Full-energy over total efficiency',
  incident: 'Photons that strike the front face, per photon emitted',
};

const label = (name: string, unit: string, description: string): ColumnLabel => ({ name, unit, description });

const ENERGY = label('energy_keV', 'keV', 'Energy of the photons');
const LAYER = label('layer', '', 'Detector');
const HISTORIES = label('histories', '1', 'Photons followed at this energy');

function textColumn(texts: readonly string[]): TextColumn {
  const words = [...new Set(texts)];
  return { words, codes: Int32Array.from(texts, (text) => words.indexOf(text)) };
}

function numbers(values: readonly (number | null)[]): Float64Array {
  return Float64Array.from(values, (value) => value ?? NaN);
}

export function encodeCurve(rows: readonly CurveRow[]): Uint8Array {
  const columns: ColumnContent[] = [
    { ...ENERGY, values: numbers(rows.map(({ energyKeV }) => energyKeV)) },
    { ...LAYER, values: textColumn(rows.map(({ layer }) => layer)) },
    { ...HISTORIES, values: numbers(rows.map(({ histories }) => histories)) },
    ...CURVE_QUANTITIES.flatMap((quantity) => [
      { ...label(quantity, '1', MEANINGS[quantity]), values: numbers(rows.map((row) => row[quantity].mean)) },
      {
        ...label(`${quantity}_std_error`, '1', `Standard error of ${quantity}; null: unknown`),
        values: numbers(rows.map((row) => row[quantity].stdError)),
      },
    ]),
  ];
  return encodeTable('Efficiency of detectors against energy', columns);
}

type Columns = ReturnType<typeof decodeTable>;

function numbersOf(columns: Columns, name: string): Float64Array {
  const column = columns.get(name);
  if (!(column instanceof Float64Array)) throw new Error(`column ${name} of numbers is missing`);
  return column;
}

function textsOf(columns: Columns, name: string): string[] {
  const column = columns.get(name);
  if (column === undefined || column instanceof Float64Array)
    throw new Error(`column ${name} of text is missing`);
  return Array.from(column.codes, (code) => column.words[code]);
}

const known = (value: number): number | null => (Number.isNaN(value) ? null : value);

/** @throws Error when the bytes are no such table */
export function decodeCurve(bytes: Uint8Array): CurveRow[] {
  const columns = decodeTable(bytes);
  const energies = numbersOf(columns, ENERGY.name);
  const layers = textsOf(columns, LAYER.name);
  const histories = numbersOf(columns, HISTORIES.name);
  const values = CURVE_QUANTITIES.map((quantity) => ({
    quantity,
    mean: numbersOf(columns, quantity),
    stdError: numbersOf(columns, `${quantity}_std_error`),
  }));
  return Array.from(energies, (energyKeV, row) => ({
    energyKeV,
    layer: layers[row],
    histories: histories[row],
    ...(Object.fromEntries(
      values.map(({ quantity, mean, stdError }) => [
        quantity,
        { mean: known(mean[row]), stdError: known(stdError[row]) },
      ]),
    ) as Record<CurveQuantity, CurveValue>),
  }));
}

const FIT = {
  quantity: label('quantity', '', 'Efficiency that is fitted, a column of efficiency.arrow'),
  layer: LAYER,
  low: label('energy_low_keV', 'keV', 'Lowest energy fitted'),
  high: label('energy_high_keV', 'keV', 'Highest energy fitted'),
  points: label('points', '1', 'Energies fitted'),
  chiSquare: label('chi_square', '1', 'Sum of squared residuals over variances'),
  degreesOfFreedom: label('degrees_of_freedom', '1', 'Points less coefficients'),
  worst: label('worst_deviation', '1', 'Largest |efficiency / fit - 1| of the points'),
  power: label('power', '1', 'Power of ln(E / 1 MeV) in ln(efficiency)'),
  coefficient: label('coefficient', '1', 'Factor of this power'),
  stdError: label('std_error', '1', 'Standard error of the coefficient'),
} satisfies Record<string, ColumnLabel>;

const covarianceName = (power: number) => `covariance_${power}`;

/** One row for each coefficient of each fit; the covariance matrix is spread over columns. */
export function encodeFits(fits: readonly CurveFit[]): Uint8Array {
  const rows = fits.flatMap((fit) =>
    fit.coefficients.map((coefficient, power) => ({ fit, coefficient, power })),
  );
  const column = (of: ColumnLabel, value: (row: (typeof rows)[number]) => number | null): ColumnContent => ({
    ...of,
    values: numbers(rows.map(value)),
  });
  return encodeTable('Polynomials ln(efficiency) = sum of coefficient ln(E / 1 MeV)^power', [
    { ...FIT.quantity, values: textColumn(rows.map(({ fit }) => fit.quantity)) },
    { ...FIT.layer, values: textColumn(rows.map(({ fit }) => fit.layer)) },
    column(FIT.low, ({ fit }) => fit.energyLowKeV),
    column(FIT.high, ({ fit }) => fit.energyHighKeV),
    column(FIT.points, ({ fit }) => fit.points),
    column(FIT.chiSquare, ({ fit }) => fit.chiSquare),
    column(FIT.degreesOfFreedom, ({ fit }) => fit.degreesOfFreedom),
    column(FIT.worst, ({ fit }) => fit.worstDeviation),
    column(FIT.power, ({ power }) => power),
    column(FIT.coefficient, ({ coefficient }) => coefficient),
    column(FIT.stdError, ({ fit, power }) => Math.sqrt(fit.covariance[power][power])),
    ...Array.from({ length: HIGHEST_DEGREE + 1 }, (_, other) =>
      column(
        label(
          covarianceName(other),
          '1',
          `Covariance with the coefficient of power ${other}; null: there is none`,
        ),
        ({ fit, power }) => fit.covariance[power][other] ?? null,
      ),
    ),
  ]);
}

/** @throws Error when the bytes are no such table */
export function decodeFits(bytes: Uint8Array): CurveFit[] {
  const columns = decodeTable(bytes);
  const value = (name: string) => numbersOf(columns, name);
  const [quantities, layers] = [textsOf(columns, FIT.quantity.name), textsOf(columns, FIT.layer.name)];
  const power = value(FIT.power.name);
  const starts = [...power.keys()].filter((row) => power[row] === 0);
  return starts.map((start, i) => {
    const rows = Array.from({ length: (starts[i + 1] ?? power.length) - start }, (_, k) => start + k);
    return {
      quantity: quantities[start] as CurveFit['quantity'],
      layer: layers[start],
      energyLowKeV: value(FIT.low.name)[start],
      energyHighKeV: value(FIT.high.name)[start],
      points: value(FIT.points.name)[start],
      coefficients: rows.map((row) => value(FIT.coefficient.name)[row]),
      covariance: rows.map((row) => rows.map((_, other) => value(covarianceName(other))[row])),
      chiSquare: value(FIT.chiSquare.name)[start],
      degreesOfFreedom: value(FIT.degreesOfFreedom.name)[start],
      worstDeviation: value(FIT.worst.name)[start],
    };
  });
}
