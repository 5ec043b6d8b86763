// What        Centre and spread of a check standard from the period in which all was well.
// Equation    deviation d = (value − centre of its lot) / s. Lots with an assigned value share one bias:
//             centre = assigned + mean(value − assigned); other lots have the mean of their own baseline points.
//             s² = Σ (value − centre)² / (n − number of means).
// Why so      a new lot with an assigned value continues the chart; one without starts only when it has a baseline of its own.
// Valid for   3 baseline points or more; the limits are honest from about 20.
// Units       those of the log; deviations in standard deviations.
// Source      ISO 7870-2; steadiness by J. von Neumann, Ann. Math. Stat. 1941, 12, 367; single strays by
//             F. E. Grubbs, Technometrics 1969, 11, 1. The handling of lots is ours.
import type { Finding } from '../../finding.ts';
import { TankhueError } from '../../errors.ts';
import { chiSquareQuantile, normalCdf, studentQuantile } from '../../numerics/distributions.ts';
import { mean, sumOfSquares } from '../../numerics/meanAndDeviation.ts';
import { grubbsLimit } from '../grubbs.ts';
import type { CheckLog, CheckPoint } from './checkLog.ts';

/** Number of points that make a baseline when the sheet marks none [common practice]. */
export const DEFAULT_BASELINE_COUNT = 20;

export interface Baseline {
  /** indices into the log's points */
  readonly points: readonly number[];
  readonly standardDeviation: number;
  readonly degreesOfFreedom: number;
  /** centre of each lot that can be judged, in the log's unit */
  readonly centres: ReadonlyMap<string, number>;
  /** mean of value − assigned over the baseline; null where no lot has an assigned value */
  readonly bias: { readonly value: number; readonly uncertainty: number } | null;
  readonly findings: readonly Finding[];
}

/**
 * @param count how many measured points from the start of the log make the baseline when no line is marked
 * @throws TankhueError `baseline-missing`, `baseline-constant`
 */
export function baselineOf(log: CheckLog, count: number = DEFAULT_BASELINE_COUNT): Baseline {
  const chosen = chooseBaselinePoints(log, count);
  if (chosen.length < 3)
    throw new TankhueError(
      'baseline-missing',
      `expected 3 measured baseline points or more; received ${chosen.length}`,
      log.origin.file,
      'measure the check standard on several days while all is well, or mark those lines with yes in the column baseline',
    );
  const groups = new Map<string, number[]>();
  for (const i of chosen) {
    const group = centreGroup(log.points[i]!);
    const members = groups.get(group);
    if (members) members.push(i);
    else groups.set(group, [i]);
  }
  const means = new Map(
    [...groups].map(([group, members]) => [group, mean(members.map((i) => aboveAssigned(log.points[i]!)))]),
  );
  const residuals = chosen.map((i) => aboveAssigned(log.points[i]!) - means.get(centreGroup(log.points[i]!))!);
  const degreesOfFreedom = chosen.length - groups.size;
  const standardDeviation = Math.sqrt(sumOfSquares(residuals) / degreesOfFreedom);
  if (!(degreesOfFreedom > 0 && standardDeviation > 0))
    throw new TankhueError(
      'baseline-constant',
      `expected a baseline that varies from day to day; received ${chosen.length} points without spread`,
      log.origin.file,
      'write the values with all their digits, and give each lot two baseline points or more',
    );
  const centres = new Map<string, number>();
  for (const point of log.points) {
    const centre = means.get(centreGroup(point));
    if (centre !== undefined) centres.set(point.lot, centre + (Number.isNaN(point.assigned) ? 0 : point.assigned));
  }
  const assigned = groups.get(SHARED_BIAS);
  const bias = assigned
    ? { value: means.get(SHARED_BIAS)!, uncertainty: standardDeviation / Math.sqrt(assigned.length) }
    : null;
  const baseline = { points: chosen, standardDeviation, degreesOfFreedom, centres, bias };
  const roughLots = [...groups].filter(([, members]) => members.length < LEAST_FOR_CENTRE && groups.size > 1);
  return {
    ...baseline,
    findings: [
      ...doubtsAbout(baseline, residuals, log.unit),
      ...roughLots.map(([lot, members]) => roughCentre(lot, members)),
    ],
  };
}

/** Points that fix a lot's centre to a quarter of a standard deviation. */
const LEAST_FOR_CENTRE = 16;

function roughCentre(lot: string, members: readonly number[]): Finding {
  return {
    code: 'lot-centre-rough',
    severity: 'note',
    message: `expected ${LEAST_FOR_CENTRE} baseline points or more for the centre of ${lot === SHARED_BIAS ? 'the lots with assigned values' : `lot ${lot}`}; received ${members.length}: it is known to ${(1 / Math.sqrt(members.length)).toFixed(2)} standard deviations, and the sums may take that for a shift`,
    hint: 'measure the new lot beside the old one for longer, or write its assigned value',
  };
}

/** All lots with an assigned value stand under one name; no lot can be called so, because sheets are trimmed. */
const SHARED_BIAS = ' ';

const centreGroup = (point: CheckPoint): string => (Number.isNaN(point.assigned) ? point.lot : SHARED_BIAS);

const aboveAssigned = (point: CheckPoint): number => point.value - (Number.isNaN(point.assigned) ? 0 : point.assigned);

function chooseBaselinePoints(log: CheckLog, count: number): number[] {
  const measured = [...log.points.keys()].filter((i) => !Number.isNaN(log.points[i]!.value));
  const marked = measured.filter((i) => log.points[i]!.inBaseline === true);
  return marked.length > 0 ? marked : measured.filter((i) => log.points[i]!.inBaseline === null).slice(0, count);
}

function doubtsAbout(
  { standardDeviation, degreesOfFreedom, bias }: Omit<Baseline, 'findings'>,
  residuals: readonly number[],
  unit: string,
): Finding[] {
  const findings: Finding[] = [];
  const say = (code: string, severity: Finding['severity'], message: string, hint: string) =>
    findings.push({ code, severity, message, hint });
  const show = (value: number) => `${Number(value.toPrecision(3))}${unit && ` ${unit}`}`;
  const count = residuals.length;

  if (count < DEFAULT_BASELINE_COUNT) {
    const range = [0.975, 0.025].map((p) =>
      show(standardDeviation * Math.sqrt(degreesOfFreedom / chiSquareQuantile(p, degreesOfFreedom))),
    );
    say(
      'baseline-short',
      'caution',
      `expected ${DEFAULT_BASELINE_COUNT} baseline points or more; received ${count}: the true standard deviation lies between ${range.join(' and ')} (95 %), so false alarms may be more frequent than stated`,
      'lengthen the baseline while all is well, then draw the limits again',
    );
  }

  const steps = residuals.slice(1).map((residual, i) => residual - residuals[i]!);
  const ratio = sumOfSquares(steps) / sumOfSquares(residuals);
  const steadiness = (ratio - 2) / Math.sqrt((4 * (count - 2)) / (count * count - 1));
  if (normalCdf(steadiness) < 0.01)
    say(
      'baseline-not-steady',
      'caution',
      `expected baseline points that scatter independently (von Neumann ratio near 2); received ${ratio.toFixed(2)}: the baseline drifts or wanders, so the limits are too wide for a shift and false alarms come in groups`,
      'choose a period without drift, or mend the drift first',
    );

  const largest = Math.max(...residuals.map(Math.abs)) / standardDeviation;
  if (largest > grubbsLimit(count, 0.05))
    say(
      'baseline-outlier',
      'caution',
      `expected no baseline point more than ${grubbsLimit(count, 0.05).toFixed(2)} standard deviations off (Grubbs, 95 %); received ${largest.toFixed(2)}: one point widens the limits of all others`,
      'find out what happened that day; if there is a cause write no for it in the column baseline',
    );

  if (bias && Math.abs(bias.value) > studentQuantile(0.975, degreesOfFreedom) * bias.uncertainty)
    say(
      'baseline-biased',
      'note',
      `expected the baseline to agree with the assigned values; received a mean difference of ${show(bias.value)} ± ${show(bias.uncertainty)} (k = 1); the chart is centred on the baseline and watches for change, not for this`,
      'compare the calibration and the certificate of the check standard',
    );
  return findings;
}
