// What        The end points of one curve with all that speaks for and against them.
// Equation    combined: fitBranches. Student's t for its interval. A method is apart by (v_method − v)/√(u²_method + u²_burette).
// Why so      the methods are listed beside their combination, so that a person sees whether they tell one story.
// Valid for   curves that reach past the last step that is needed; what does not is withheld, never extrapolated.
// Units       mL, mV.
// Source      JCGM 100, 6 and G.3; limits of findings are common practice unless said.

import { stateOf, type Finding } from '../../finding.ts';
import { studentQuantile } from '../../numerics/distributions.ts';
import { exactly, measured, sumOf, type Measured } from '../../numerics/measured.ts';
import { factorInPlace } from '../../numerics/smallCholesky.ts';
import { fitBranches, zerosOf, type BranchFit } from './branchFit.ts';
import type { Course } from './course.ts';
import { findJumps, type Jump } from './jumps.ts';
import type { EndPoint, EndPointByMethod, TitrationRunResult } from './titrationResult.ts';
import type { TitrationRun } from './titrationRun.ts';
import { missingSteps } from './missingSteps.ts';

export interface EndPointsOfRun {
  /** mL, one a step; null where the curve does not show them */
  readonly volumes: readonly number[] | null;
  /** row-major, mL² */
  readonly covariance: Float64Array;
  readonly degreesOfFreedom: number;
  readonly result: TitrationRunResult;
}

export function endPointsOf(run: TitrationRun, course: Course): EndPointsOfRun {
  const jumps = findJumps(run.curve, course.direction);
  const findings: Finding[] = [...buretteFindings(run)];
  const record = (endPoints: EndPoint[], fit: BranchFit | null): TitrationRunResult => ({
    run: run.run,
    sample: run.task === 'sample' ? run.sample : '',
    task: run.task,
    course: course.name,
    titrant: run.titrant,
    state: stateOf(findings),
    endPoints,
    electrode:
      fit && fit.gran.length > 0
        ? {
            scatter: fit.scatter.potential,
            drift: { value: fit.drift.value, uncertainty: fit.drift.uncertainty },
            slopeError: { value: fit.slopeError.value, uncertainty: fit.slopeError.uncertainty },
          }
        : null,
    findings,
    assumed: [...run.assumed],
    curve: { volume: [...run.curve.volume], potential: [...run.curve.potential] },
    input: { file: run.origin.file, sha256: run.origin.sha256 },
  });
  const missing = missingSteps(run.curve, course, run.titrant, jumps);
  if (missing) {
    findings.push(missing);
    return { volumes: null, covariance: new Float64Array(), degreesOfFreedom: 1, result: record([], null) };
  }
  const fit = fitBranches(run.curve, course, jumps, run.cell);
  const endPoints = course.steps.map((step, j) => endPointOf(step, j, course, fit, jumps[j]!, run.buretteUncertainty));
  findings.push(
    ...spacingFindings(endPoints, jumps, run),
    ...disagreementFindings(endPoints),
    ...electrodeFindings(fit, run),
  );
  return {
    volumes: fit.endPoints,
    covariance: fit.covariance,
    degreesOfFreedom: fit.degreesOfFreedom,
    result: record(endPoints, fit),
  };
}

/** End points with what each owes to the readings and to the burette, mL. */
export function measuredVolumes(run: TitrationRun, { volumes, covariance }: EndPointsOfRun): Measured[] {
  const count = volumes!.length;
  const factor = Float64Array.from(covariance);
  factorInPlace(factor, count);
  return volumes!.map((volume, j) =>
    sumOf(
      exactly(volume),
      ...Array.from({ length: j + 1 }, (_, k) => measured(0, factor[j * count + k]!, `end points:${run.run} ${k + 1}`)),
      // Read from the same burette at about the same mark, replicates share its error; a sample and a standardisation need not.
      measured(0, run.buretteUncertainty, `burette:${run.task} step ${j + 1}`),
    ),
  );
}

function endPointOf(step: string, j: number, course: Course, fit: BranchFit, jump: Jump, burette: number): EndPoint {
  const volume = fit.endPoints[j]!;
  const uncertainty = Math.sqrt(fit.covariance[j * fit.endPoints.length + j]!);
  const reach = studentQuantile(0.975, Math.min(1e6, fit.degreesOfFreedom)) * uncertainty;
  const methods: EndPointByMethod[] = [
    {
      method: 'second derivative',
      volume: jump.volume,
      uncertainty: jump.uncertainty,
      // 95 % of a rectangular distribution of this standard deviation
      interval: [
        jump.volume - 0.95 * Math.sqrt(3) * jump.uncertainty,
        jump.volume + 0.95 * Math.sqrt(3) * jump.uncertainty,
      ],
      apart: (jump.volume - volume) / Math.hypot(jump.uncertainty, burette),
    },
    ...zerosOf(course, fit.gran, j).map(({ side, zero }): EndPointByMethod => ({
      method: side === 'before' ? 'Gran, before' : 'Gran, after',
      volume: zero.volume,
      uncertainty: zero.uncertainty,
      interval: zero.interval && [zero.interval[0], zero.interval[1]],
      apart: (zero.volume - volume) / Math.hypot(zero.uncertainty, burette),
    })),
  ];
  return { step, volume, uncertainty, interval: [volume - reach, volume + reach], potential: jump.potential, methods };
}

/** Limits of findings [practice]. */
const LIMIT = {
  /** width of the steepest interval over the volume delivered */
  coarse: 0.02,
  apart: 3.5,
  /** in prior standard deviations */
  effect: 3,
  stray: 5,
  lag: 0.5,
} as const;

function buretteFindings({ curve, buretteVolume }: TitrationRun): Finding[] {
  const delivered = curve.volume.at(-1)!;
  if (buretteVolume === null || delivered <= buretteVolume) return [];
  return [
    {
      code: 'burette-refilled',
      severity: 'caution',
      message: `${delivered} mL came out of a burette of ${buretteVolume} mL: each refill adds two readings`,
      hint: 'use a larger burette, a smaller aliquot or a stronger titrant',
    },
  ];
}

function spacingFindings(endPoints: readonly EndPoint[], jumps: readonly Jump[], { curve }: TitrationRun): Finding[] {
  return endPoints.flatMap(({ step, uncertainty }, j): Finding[] => {
    const [low, high] = jumps[j]!.interval;
    const share = (high - low) / curve.volume.at(-1)!;
    if (share < LIMIT.coarse) return [];
    return [
      {
        code: 'coarse-steps',
        severity: 'caution',
        message: `the jump of ${step} lies between readings at ${low.toFixed(3)} and ${high.toFixed(3)} mL; the end point is known to ${uncertainty.toFixed(3)} mL only through the readings beside it`,
        hint: 'add 0.05 to 0.1 mL at a time within 0.5 mL of the jump',
      },
    ];
  });
}

function disagreementFindings(endPoints: readonly EndPoint[]): Finding[] {
  return endPoints.flatMap(({ step, volume, methods }): Finding[] => {
    const far = methods.filter(({ apart }) => Math.abs(apart) > LIMIT.apart);
    if (far.length === 0) return [];
    const worst = far.reduce((a, b) => (Math.abs(b.apart) > Math.abs(a.apart) ? b : a));
    return [
      {
        code: 'end-points-disagree',
        severity: 'caution',
        message: `${step}: ${worst.method} says ${worst.volume.toFixed(3)} mL, all together ${volume.toFixed(3)} mL, ${Math.abs(worst.apart).toFixed(1)} times their uncertainty apart`,
        hint: 'wait for steady readings, and titrate again with smaller additions',
      },
    ];
  });
}

function electrodeFindings(fit: BranchFit, { curve }: TitrationRun): Finding[] {
  const findings: Finding[] = [];
  const range = curve.volume.at(-1)! - curve.volume[0]!;
  const significant = ({ value, uncertainty, inPriorUnits }: BranchFit['drift']): boolean =>
    Math.abs(inPriorUnits) > LIMIT.effect && Math.abs(value) > LIMIT.effect * uncertainty;
  if (significant(fit.drift))
    findings.push({
      code: 'electrode-drift',
      severity: 'caution',
      message: `the potential drifted by ${(fit.drift.value * range).toFixed(1)} mV over the titration beside what the reaction explains; the end points are corrected for it`,
      hint: 'read the same solution before and after (check_before_mV, check_after_mV); clean the electrode, refill the reference',
    });
  if (significant(fit.slopeError))
    findings.push({
      code: 'electrode-slope',
      severity: 'caution',
      message: `the electrode shows ${(100 * (1 + fit.slopeError.value)).toFixed(1)} % of Nernst's slope (± ${(100 * fit.slopeError.uncertainty).toFixed(1)})`,
      hint: 'check the temperature on the sheet; clean the electrode',
    });
  if (fit.worst && Math.abs(fit.worst.inUnits) > LIMIT.stray)
    findings.push({
      code: 'stray-reading',
      severity: 'caution',
      message: `the reading at ${curve.volume[fit.worst.index]} mL (${curve.potential[fit.worst.index]!.toFixed(1)} mV) lies ${Math.abs(fit.worst.inUnits).toFixed(1)} standard deviations from its branch`,
      hint: 'look for a slip of the pen or an unsteady reading; delete it if it is one',
    });
  if (fit.lagCorrelation > LIMIT.lag)
    findings.push({
      code: 'poor-match',
      severity: 'caution',
      message: `neighbouring readings depart from Nernst's curve together (correlation ${fit.lagCorrelation.toFixed(2)}); uncertainties are widened for it`,
      hint: 'wait longer after each addition; permanganate near the last step needs 60 to 80 °C',
    });
  return findings;
}
