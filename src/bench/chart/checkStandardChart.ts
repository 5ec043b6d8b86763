// What        The control chart of a check standard: every point judged by run rules, moving average and cumulative sums at once.
// Equation    see `runRules.ts`, `movingAverage.ts`, `cumulativeSum.ts`, `runLength.ts`, `baseline.ts`, `cause.ts`.
// Why so      the three look for different things: a blunder, a slow drift, a lasting step. An alarm says which saw it, since when,
//             how large the shift is, and which part of the measurement moved with it.
// Valid for   one check standard, its lots included; lots that cannot be judged are said, not guessed.
// Units       deviations in standard deviations of the baseline; shifts in the log's unit.
// Source      as in the files named.
import type { Finding } from '../../finding.ts';
import { baselineOf, DEFAULT_BASELINE_COUNT, type Baseline } from './baseline.ts';
import { movedModes, type MovedMode } from './cause.ts';
import type { CheckLog } from './checkLog.ts';
import {
  cumulativeSums,
  DEFAULT_CUMULATIVE_SUM,
  type CumulativeSumDesign,
  type CumulativeSums,
} from './cumulativeSum.ts';
import {
  DEFAULT_MOVING_AVERAGE,
  movingAverage,
  movingAverageLimit,
  type MovingAverageDesign,
} from './movingAverage.ts';
import { runLengthOfCumulativeSums, runLengthOfMovingAverage, runLengthOfRunRules } from './runLength.ts';
import { ACTION_RULE, RUN_RULES, runRuleSignals } from './runRules.ts';

export interface ChartDesign {
  /** measured points from the start that make the baseline when no line is marked */
  readonly baselineCount: number;
  readonly movingAverage: MovingAverageDesign;
  readonly cumulativeSum: CumulativeSumDesign;
}

export const DEFAULT_CHART_DESIGN: ChartDesign = {
  baselineCount: DEFAULT_BASELINE_COUNT,
  movingAverage: DEFAULT_MOVING_AVERAGE,
  cumulativeSum: DEFAULT_CUMULATIVE_SUM,
};

export interface ChartPoint {
  at: string;
  /** hours since the first line */
  hours: number;
  lot: string;
  /** null = missing */
  value: number | null;
  /** in standard deviations; null where missing or where the lot cannot be judged */
  deviation: number | null;
  movingAverage: number | null;
  sumUp: number | null;
  sumDown: number | null;
  inBaseline: boolean;
  /** codes of the run rules completed, `moving-average`, `cumulative-sum` */
  signals: string[];
}

export interface ChartAlarm {
  /** first and last signalled point, as written on the sheet */
  from: string;
  to: string;
  /** where the change most likely began, at or before the first signal */
  since: string;
  direction: 'up' | 'down';
  signals: string[];
  /** mean since the change began minus the centre, in the log's unit */
  shift: { value: number; uncertainty: number };
  /** the strongest first; empty when none moved or none is logged */
  movedModes: MovedMode[];
  suggestion: string;
}

/** `past-warning`: a run rule or more than 2 standard deviations; `past-action`: action limit, moving average or cumulative sum. */
export type ChartState = 'in-control' | 'past-warning' | 'past-action';

export interface RunLengths {
  /** in standard deviations of single points */
  shift: number[];
  actionLimit: number[];
  runRules: number[];
  movingAverage: number[];
  cumulativeSum: number[];
  /** points between false alarms of all together: at least about this many */
  falseAlarmOfAll: number;
}

export interface CheckStandardChart {
  schema: 'tankhue/chart/1';
  quantity: string;
  unit: string;
  /** of the newest judged point */
  state: ChartState;
  latest: string;
  baseline: {
    from: string;
    to: string;
    points: number;
    standardDeviation: number;
    degreesOfFreedom: number;
    centres: Record<string, number>;
    bias: { value: number; uncertainty: number } | null;
  };
  limits: {
    warning: number;
    action: number;
    movingAverage: MovingAverageDesign & { halfWidth: number };
    cumulativeSum: CumulativeSumDesign;
  };
  averageRunLength: RunLengths;
  points: ChartPoint[];
  alarms: ChartAlarm[];
  /** lines without a value, as written on the sheet */
  missing: string[];
  findings: Finding[];
  assumed: string[];
  input: { file: string; sha256: string };
}

const WARNING = 2;
const SHIFTS = [0, 0.5, 1, 1.5, 2, 3];

/** @throws TankhueError `baseline-missing`, `baseline-constant` */
export function checkStandardChart(log: CheckLog, design: ChartDesign = DEFAULT_CHART_DESIGN): CheckStandardChart {
  const baseline = baselineOf(log, design.baselineCount);
  const deviations = Float64Array.from(
    log.points,
    (point) => (point.value - (baseline.centres.get(point.lot) ?? NaN)) / baseline.standardDeviation,
  );
  const average = movingAverage(deviations, design.movingAverage.weight);
  const halfWidth = movingAverageLimit(design.movingAverage);
  const sums = cumulativeSums(deviations, design.cumulativeSum.slack);
  const signals = runRuleSignals(deviations);
  deviations.forEach((_, i) => {
    if (Math.abs(average[i]!) > halfWidth) signals[i]!.push('moving-average');
    if (Math.max(sums.up[i]!, sums.down[i]!) > design.cumulativeSum.limit) signals[i]!.push('cumulative-sum');
  });
  const inBaseline = new Set(baseline.points);
  const points = log.points.map((point, i): ChartPoint => ({
    at: point.at,
    hours: point.hours,
    lot: point.lot,
    value: orNull(point.value),
    deviation: orNull(deviations[i]!),
    movingAverage: orNull(average[i]!),
    sumUp: orNull(sums.up[i]!),
    sumDown: orNull(sums.down[i]!),
    inBaseline: inBaseline.has(i),
    signals: signals[i]!,
  }));
  const judged = points.filter((point) => point.deviation !== null);
  const latest = judged[judged.length - 1]!;
  const first = log.points[baseline.points[0]!]!;
  const last = log.points[baseline.points[baseline.points.length - 1]!]!;
  return {
    schema: 'tankhue/chart/1',
    quantity: log.quantity,
    unit: log.unit,
    state: stateOf(latest),
    latest: latest.at,
    baseline: {
      from: first.at,
      to: last.at,
      points: baseline.points.length,
      standardDeviation: baseline.standardDeviation,
      degreesOfFreedom: baseline.degreesOfFreedom,
      centres: Object.fromEntries(baseline.centres),
      bias: baseline.bias,
    },
    limits: {
      warning: WARNING,
      action: ACTION_RULE.beyond,
      movingAverage: { ...design.movingAverage, halfWidth },
      cumulativeSum: design.cumulativeSum,
    },
    averageRunLength: runLengths(design),
    points,
    alarms: alarmsOf(log, baseline, deviations, signals, average, sums),
    missing: log.points.filter((point) => Number.isNaN(point.value)).map((point) => point.at),
    findings: [...baseline.findings, ...doubtsAboutLots(log, baseline)],
    assumed: assumptions(log, baseline),
    input: { file: log.origin.file, sha256: log.origin.sha256 },
  };
}

function stateOf(point: ChartPoint): ChartState {
  const action: string[] = [ACTION_RULE.code, 'moving-average', 'cumulative-sum'];
  if (point.signals.some((signal) => action.includes(signal))) return 'past-action';
  return point.signals.length > 0 || Math.abs(point.deviation!) > WARNING ? 'past-warning' : 'in-control';
}

function runLengths(design: ChartDesign): RunLengths {
  const actionLimit = SHIFTS.map((shift) => runLengthOfRunRules([ACTION_RULE], shift));
  const runRules = SHIFTS.map((shift) => runLengthOfRunRules(RUN_RULES, shift));
  const movingAverages = SHIFTS.map((shift) => runLengthOfMovingAverage(design.movingAverage, shift));
  const cumulativeSum = SHIFTS.map((shift) => runLengthOfCumulativeSums(design.cumulativeSum, shift));
  const falseAlarmOfAll = 1 / (1 / runRules[0]! + 1 / movingAverages[0]! + 1 / cumulativeSum[0]!);
  return { shift: SHIFTS, actionLimit, runRules, movingAverage: movingAverages, cumulativeSum, falseAlarmOfAll };
}

/**
 * Neighbouring signalled points on the same side are one alarm; a missing point between them does not part them, a quiet one
 * does. The side of a point past the action limit is its own, that of every other signal the moving average's.
 */
function alarmsOf(
  log: CheckLog,
  baseline: Baseline,
  deviations: Float64Array,
  signals: readonly string[][],
  average: Float64Array,
  sums: CumulativeSums,
): ChartAlarm[] {
  const sideOf = (i: number): number =>
    signals[i]!.length === 0 ? 0 : Math.sign(signals[i]!.includes(ACTION_RULE.code) ? deviations[i]! : average[i]!);
  const judged = [...deviations.keys()].filter((i) => !Number.isNaN(deviations[i]));
  const baselinePoints = baseline.points.map((i) => log.points[i]!);
  const alarms: ChartAlarm[] = [];
  let end = 0;
  for (let start = 0; start < judged.length; start = end) {
    const first = judged[start]!;
    const side = sideOf(first);
    end = start + 1;
    if (side === 0) continue;
    while (end < judged.length && sideOf(judged[end]!) === side) end += 1;
    const direction = side > 0 ? 'up' : 'down';
    const sinceStart = beginningOf(judged, deviations, start, (side > 0 ? sums.upSince : sums.downSince)[first]!);
    const shifted = judged.slice(sinceStart, end);
    const meanDeviation = shifted.reduce((sum, i) => sum + deviations[i]!, 0) / shifted.length;
    const moved = movedModes(
      log.modeNames,
      baselinePoints,
      shifted.map((i) => log.points[i]!),
    );
    alarms.push({
      from: log.points[first]!.at,
      to: log.points[judged[end - 1]!]!.at,
      since: log.points[shifted[0]!]!.at,
      direction,
      signals: [...new Set(judged.slice(start, end).flatMap((i) => signals[i]!))],
      shift: {
        value: meanDeviation * baseline.standardDeviation,
        uncertainty: baseline.standardDeviation / Math.sqrt(shifted.length),
      },
      movedModes: moved,
      suggestion: suggestionFor(log, newLotNear(log, judged, sinceStart), moved),
    });
  }
  return alarms;
}

/**
 * Where the step that ends in a signal most likely began: the start s that makes (Σ_{s…signal} d)²/count largest, none before the
 * cumulative sum last stood at zero (maximum likelihood for a lasting step; D. V. Hinkley, Biometrika 1970, 57, 1).
 */
function beginningOf(judged: readonly number[], deviations: Float64Array, signal: number, lastZero: number): number {
  let best = signal;
  let largest = -1;
  let sum = 0;
  for (let s = signal; s >= 0 && (s === signal || judged[s]! >= lastZero); s--) {
    sum += deviations[judged[s]!]!;
    const gain = (sum * sum) / (signal - s + 1);
    if (gain > largest) [best, largest] = [s, gain];
  }
  return best;
}

/** Points by which the beginning of a change is uncertain at the least. */
const NEAR = 2;

/** The lot that was new within a few points of where a change began; null where the lot stayed. */
function newLotNear(log: CheckLog, judged: readonly number[], beginning: number): string | null {
  for (let s = Math.max(1, beginning - NEAR); s <= Math.min(judged.length - 1, beginning + NEAR); s++) {
    const lot = log.points[judged[s]!]!.lot;
    if (lot !== log.points[judged[s - 1]!]!.lot) return lot;
  }
  return null;
}

function suggestionFor(log: CheckLog, newLot: string | null, moved: readonly MovedMode[]): string {
  if (moved.length > 0)
    return `${moved[0]!.mode} moved with it (${moved[0]!.z.toFixed(1)} standard errors): ${moved[0]!.likelyCause}`;
  if (newLot !== null) return `it began with lot ${newLot}: its assigned value or the way it was made comes first`;
  if (log.modeNames.length === 0)
    return 'no fitted modes are logged, so no cause can be suggested: add columns such as mode_offset, mode_fine_scatter, mode_wavelength, mode_path';
  return 'no fitted mode moved: look at the check standard itself (air, age, evaporation), its dilution and the label';
}

function doubtsAboutLots(log: CheckLog, baseline: Baseline): Finding[] {
  const unjudged = [...new Set(log.points.map((point) => point.lot))].filter((lot) => !baseline.centres.has(lot));
  return unjudged.map((lot) => ({
    code: 'lot-without-centre',
    severity: 'caution',
    message: `expected an assigned value or baseline points for lot ${lot}; received neither: its points are shown, not judged`,
    hint: 'write the assigned value of the lot, or mark its first lines, measured beside the old lot, with yes in the column baseline',
  }));
}

function assumptions(log: CheckLog, baseline: Baseline): string[] {
  const marked = log.points.some((point) => point.inBaseline === true);
  return [
    ...(marked
      ? []
      : [`the first ${baseline.points.length} measured points are the baseline, because no line is marked`]),
    ...(log.wasReordered ? ['lines were put in the order of their times'] : []),
    'points are independent and normal about a known centre; run lengths are stated for that',
    'missing points are passed over: nothing is filled in, and the sums stand still',
  ];
}

const orNull = (value: number): number | null => (Number.isNaN(value) ? null : value);
