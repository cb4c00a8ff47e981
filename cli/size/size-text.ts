/** The answer of `thickset size` in words. */
import type { Thickness } from './size-words.js';
import type { EqualDosePair } from '../../engine/index.js';
import { readableRate } from '../dose-rates.js';
import { clip } from '../show.js';
import { CAUTION } from '../text/caution.js';
import { formatDuration, formatFigure, formatNumber } from '../text/figure-format.js';
import type { Style } from '../text/style.js';
import { alignRight, renderTable, wrap } from '../text/text-table.js';
import { goalUnit, type NamedGoal } from './size-goals.js';
import { massPerArea, namedStates, verdictOf, type NamedState, type SizeReport } from './size-json.js';
import { lengthText } from './size-words.js';

/** The lines of the answer. */
export function sizeLines(report: SizeReport, style: Style): string[] {
  const { layer, answer, task, wallS } = report;
  const runs = answer.trials.length + answer.confirmations.length;
  return [
    ...wrap(style.heading(`Thickness of ${clip(layer)}`), style.width),
    ...(task.usualPoint
      ? wrap(
          `No dose point is given: judged ${clip(task.setup.tally.dosePoints[0].name)}, on the axis.`,
          style.width,
        )
      : []),
    '',
    ...verdictLines(report, style),
    ...tradeOffLines(report, style),
    '',
    style.note(`${runs === 1 ? '1 run' : `${runs} runs`} in ${formatDuration(wallS)}`),
    ...wrap(`Photons that pass beside a shield of finite size are not counted. ${CAUTION}`, style.width).map(
      style.note,
    ),
  ];
}

function verdictLines({ answer, task, layer, stepCm }: SizeReport, style: Style): string[] {
  const { found, intervalCm, roundedCm, confirmations } = answer;
  switch (found.verdict) {
    case 'none_needed':
      return [
        ...wrap(`None is needed: without ${clip(layer)} every limit is met.`, style.width),
        ...stateLines(namedStates(answer.trials[0].states, task), style),
      ];
    case 'impossible':
      return [
        ...wrap(
          `No thickness meets the limits: at ${lengthText(found.last.thicknessCm)} the dose falls no further. It ` +
            `comes from elsewhere: past the layer, from in front of it, or from layers behind it.`,
          style.width,
        ).map(style.alert),
        ...stateLines(namedStates(found.last.states, task), style),
      ];
    case 'found': {
      const [low, high] = intervalCm as readonly [number, number];
      const last = confirmations[confirmations.length - 1];
      const lines = [
        `${thicknessText({ mean: found.thicknessCm, stdError: found.stdErrorCm }, style)} just meets the limits ` +
          `(95 % interval ${lengthText(low)} to ${lengthText(high)})`,
        style.heading(`${lengthText(roundedCm as number)} rounded up to a step of ${lengthText(stepCm)}`),
      ];
      const verdict = last.isMet
        ? `Confirmed by an independent run (seed ${clip(last.seed)}):`
        : 'Not confirmed: the upper 95 % limit of the last independent run does not meet the limits.';
      return [
        ...lines.flatMap((line) => wrap(line, style.width)),
        '',
        ...wrap(verdict, style.width).map(last.isMet ? (line) => line : style.alert),
        ...stateLines(namedStates(last.states, task), style),
        ...(confirmations.length > 1 && verdictOf(answer) === 'found'
          ? wrap(`It took ${confirmations.length} confirmations, each a step thicker.`, style.width)
          : []),
      ];
    }
  }
}

function thicknessText({ mean, stdError }: Thickness, style: Style): string {
  const { value, error } = formatFigure(mean, stdError);
  return `${value}${error === '' ? '' : ` ${style.plusMinus} ${error}`} cm`;
}

function stateLines(states: readonly NamedState[], style: Style): string[] {
  const rows = states.map(({ named, state }) => [
    named.goal.kind === 'dose' ? named.goal.quantity : `dose_transmission of ${named.goal.quantity}`,
    named.goal.place === null ? 'far face' : clip(named.goal.place),
    rateText(named, state.value, state.stdError, style),
    `at most ${rateText(named, Number.isFinite(state.upper95) ? state.upper95 : null, null, style)} with 95 %`,
    `limit ${rateText(named, named.goal.limit, null, style)}`,
    state.isReliable ? '' : '?',
  ]);
  return renderTable(rows);
}

function rateText(named: NamedGoal, value: number | null, stdError: number | null, style: Style): string {
  const unit = goalUnit(named);
  if (value === null) return 'unknown';
  const factor = named.perMicroPerHour ?? 1;
  const scaled =
    unit === '1'
      ? { mean: value, stdError, unit: '' }
      : readableRate({ mean: value * factor, stdError: stdError === null ? null : stdError * factor, unit });
  const figure = formatFigure(scaled.mean, scaled.stdError);
  const error = figure.error === '' ? '' : ` ${style.plusMinus} ${figure.error}`;
  return `${figure.value}${error}${scaled.unit === '' ? '' : ` ${scaled.unit}`}`;
}

function tradeOffLines({ tradeOff, task, layer }: SizeReport, style: Style): string[] {
  if (tradeOff === null) return [];
  const cell = ({ found }: EqualDosePair) => {
    if (found.verdict === 'none_needed') return '0 cm';
    if (found.verdict === 'impossible') return 'no thickness';
    return thicknessText({ mean: found.thicknessCm, stdError: found.stdErrorCm }, style);
  };
  const mass = (pair: EqualDosePair) => massPerArea(pair, task.setup, layer, tradeOff.layer);
  const masses = tradeOff.pairs.map((pair) => {
    const value = mass(pair);
    return value === null ? '' : `${formatNumber(value)} g/cm2`;
  });
  const rows = [
    [clip(tradeOff.layer), clip(layer), 'together'],
    ...tradeOff.pairs.map((pair, i) => [lengthText(pair.otherCm), cell(pair), alignRight(masses)[i]]),
  ];
  return ['', style.heading('Pairs of equal dose (not rounded, not confirmed)'), ...renderTable(rows)];
}
