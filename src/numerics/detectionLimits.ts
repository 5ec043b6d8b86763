// What        From which value on a straight-line calibration can say "there is some", "it would be found", and "so much, to a third".
// Equation    critical x_c = t₁₋α √(s²/m + V_a)/b; detection x_d = x_c + t₁₋β √(s²/m + V_a)/b, which is 2 x_c for α = β;
//             quantification x_q = k t₁₋α/₂ √(s²/m + V(x_q))/b. s residual deviation, m readings of the sample, V variance of the line.
// Why so      V_a = s²(1/n + x̄²/S_xx), so the line's own covariance says the same as the standards' formulas, with weights too.
//             x_q is the root of a quadratic; the standards print the first step from 3 x_c instead, which is also given.
// Valid for   scatter that is the same at 0 as over the calibration. t stands for the non-central t of ISO 11843-2 (a few per cent
//             for 4 degrees of freedom and more).
// Units       those of x; the critical response those of y.
// Source      ISO 11843-2:2000, 5.2-5.3; DIN 32645:1994 (2008), whose worked example checks it.
import { studentQuantile } from './distributions.ts';
import { TankhueError } from '../errors.ts';
import { expectPoints, expectPositive, expectProbability } from './expectations.ts';
import { varianceAt, type Line } from './line.ts';

export interface DetectionOptions {
  /** probability to find what is not there */
  readonly alpha?: number;
  /** probability to miss what is there at the detection limit */
  readonly beta?: number;
  /** readings of the sample whose mean is judged */
  readonly readings?: number;
  /** 1/k: half interval of 1 − α over value at the quantification limit */
  readonly relativeHalfInterval?: number;
}

export interface DetectionLimits {
  /** y above which something is said to be there */
  readonly criticalResponse: number;
  readonly critical: number;
  readonly detection: number;
  /** null where the slope is so uncertain that no value reaches that relative interval */
  readonly quantification: number | null;
  /** the standards' closed form: the first step from 3 x_c */
  readonly quantificationFirstStep: number;
}

/** @throws TankhueError `slope-zero`, `points-missing` (a line whose residual scatter is unknown), `probability-range`, `not-positive` */
export function detectionLimits(
  line: Line,
  { alpha = 0.05, beta = 0.05, readings = 1, relativeHalfInterval = 1 / 3 }: DetectionOptions = {},
): DetectionLimits {
  expectProbability(alpha, 'alpha');
  expectProbability(beta, 'beta');
  expectPositive([readings], 'readings');
  expectPositive([relativeHalfInterval], 'relativeHalfInterval');
  expectPoints(line.degreesOfFreedom, 1, 'line');
  const slope = Math.abs(line.slope);
  if (!(slope > 0))
    throw new TankhueError(
      'slope-zero',
      `expected a calibration line that rises or falls; received a slope of ${line.slope}`,
      'line',
      'calibrate over a wider range',
    );
  const freedom = line.degreesOfFreedom;
  const ofReadings = line.residualDeviation ** 2 / readings;
  const atZero = Math.sqrt(ofReadings + line.interceptVariance);
  const t = studentQuantile(1 - alpha, freedom);
  const critical = (t * atZero) / slope;
  const reach = studentQuantile(1 - alpha / 2, freedom) / relativeHalfInterval;
  // b²x² = K²(s²/m + V_a + 2Cx + V_b x²)
  const square = reach * reach;
  const a = slope * slope - square * line.slopeVariance;
  const half = square * line.covariance;
  return {
    criticalResponse: line.intercept + Math.sign(line.slope) * t * atZero,
    critical,
    detection: critical + (studentQuantile(1 - beta, freedom) * atZero) / slope,
    quantification: a > 0 ? (half + Math.sqrt(half * half + a * square * atZero * atZero)) / a : null,
    quantificationFirstStep: (reach * Math.sqrt(ofReadings + varianceAt(line, 3 * critical))) / slope,
  };
}
