import type { ChartAlarm, CheckStandardChart } from '../bench/chart/checkStandardChart.ts';
import { RUN_RULES } from '../bench/chart/runRules.ts';
import { findingText } from './assayText.ts';
import { quantityText, wrapped } from './quantityText.ts';

const WIDTH = 80;
/** Alarms shown, newest first; JSON has all. */
const SHOWN = 5;
const LABEL = 10;

const STATE = {
  'in-control': 'nothing has changed since the baseline',
  'past-warning': 'past a warning: measure the check standard again before the next assay',
  'past-action': 'past action: mend first, then assay',
} as const;

/** A check standard's chart for a terminal: where it stands, alarms with their likely cause, limits, how often it cries wolf. */
export function chartText(chart: CheckStandardChart): string {
  const { baseline, alarms, limits } = chart;
  const unit = chart.unit && ` ${chart.unit}`;
  const deviation = baseline.standardDeviation;
  const centres = Object.entries(baseline.centres).map(
    ([lot, centre]) => `${lot && `lot ${lot} `}${quantityText(centre, deviation).split(' ')[0]}${unit}`,
  );
  const row = (label: string, text: string) =>
    `${label.padEnd(LABEL)}${wrapped(text, WIDTH - LABEL, ' '.repeat(LABEL))}`;
  return [
    wrapped(
      `check standard, ${chart.quantity}, ${chart.latest} — ${chart.state.toUpperCase()}: ${STATE[chart.state]}`,
      WIDTH,
      '  ',
    ),
    ...chart.findings.filter(({ severity }) => severity !== 'note').map(findingText),
    '',
    ...(alarms.length === 0
      ? ['no alarms']
      : [...alarms]
          .reverse()
          .slice(0, SHOWN)
          .map((alarm) => alarmText(alarm, unit))),
    ...(alarms.length > SHOWN ? [`${alarms.length - SHOWN} earlier alarms are in --format json`] : []),
    '',
    row('centre', centres.join(', ')),
    row('s', `${deviation.toPrecision(2)}${unit}, from ${baseline.points} points, ${baseline.from} to ${baseline.to}`),
    row(
      'limits',
      `warning ${limits.warning} s, action ${limits.action} s; moving average of weight ${limits.movingAverage.weight} ± ${limits.movingAverage.halfWidth.toFixed(3)} s; cumulative sums beyond ${limits.cumulativeSum.slack} s up to ${limits.cumulativeSum.limit} s`,
    ),
    ...(chart.missing.length > 0 ? [row('missing', missingText(chart.missing))] : []),
    '',
    ...runLengthTable(chart),
    ...chart.findings.filter(({ severity }) => severity === 'note').map(findingText),
    row('assumed', chart.assumed.join('; ')),
    '',
  ].join('\n');
}

const SIGNAL_IN_WORDS: Readonly<Record<string, string>> = {
  ...Object.fromEntries(RUN_RULES.map(({ code, text }) => [code, text])),
  'moving-average': 'the moving average past its limit',
  'cumulative-sum': 'the cumulative sum past its limit',
};

function alarmText(alarm: ChartAlarm, unit: string): string {
  const when = alarm.from === alarm.to ? alarm.from : `${alarm.from} to ${alarm.to}`;
  const size = quantityText(Math.abs(alarm.shift.value), alarm.shift.uncertainty);
  const seen = alarm.signals.map((signal) => SIGNAL_IN_WORDS[signal] ?? signal).join('; ');
  return [
    `${when}: ${size}${unit} too ${alarm.direction === 'up' ? 'high' : 'low'}, since about ${alarm.since}`,
    `  seen by ${wrapped(seen, WIDTH - LABEL, ' '.repeat(LABEL))}`,
    `  do      ${wrapped(alarm.suggestion, WIDTH - LABEL, ' '.repeat(LABEL))}`,
  ].join('\n');
}

const missingText = (missing: readonly string[]): string =>
  `${missing.length}, left open: ${missing.slice(0, 6).join(', ')}${missing.length > 6 ? ', …' : ''}`;

function runLengthTable({ averageRunLength: lengths }: CheckStandardChart): string[] {
  const rows: [string, readonly number[]][] = [
    ['after a shift of, s', lengths.shift],
    ['action limit', lengths.actionLimit],
    ['run rules', lengths.runRules],
    ['moving average', lengths.movingAverage],
    ['cumulative sums', lengths.cumulativeSum],
  ];
  return [
    'points until a signal, on average (shift 0: until a false alarm)',
    ...rows.map(([label, values]) => `  ${label.padEnd(21)}${values.map((v) => figure(v).padStart(8)).join('')}`),
    `  all together: a false alarm every ${Math.floor(lengths.falseAlarmOfAll)} points or more`,
  ];
}

const figure = (value: number): string => (value >= 100 ? value.toFixed(0) : String(Number(value.toPrecision(3))));
