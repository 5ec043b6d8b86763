// What        A straight line through points, read forwards, backwards, at its zero and where it meets another.
// Equation    y = a + bx by weighted least squares; x₀ = (y₀ − a)/b, u² = (u²(y₀) + V_a + 2x₀C + x₀²V_b)/b²; intervals by Fieller.
// Why so      Fitted about the mean of x, where intercept and slope are independent, and moved to x = 0 afterwards: no digits lost for x far
//             from 0. The covariance goes with the line, because its loss is the usual mistake in reading backwards.
// Valid for   errors in y only (errorsInVariables.ts for both). Either the scatter about the line tells their size (`fitLine`), or they are
//             known (`fitLineOfKnownUncertainty`), and then the fit does not change them.
// Units       those of y, and of y over x.
// Source      GUM H.3; QUAM A5; ISO/TS 28037:2010, 6; E. C. Fieller, J. R. Stat. Soc. B 1954, 16, 175.
import { TankhueError } from '../errors.ts';
import { studentQuantile } from './distributions.ts';
import { expectFinite, expectLength, expectPoints, expectPositive } from './expectations.ts';
import { fiellerInterval, varianceOfRatio, type Ratio } from './fieller.ts';
import { solveLeastSquares, type LeastSquares } from './leastSquares.ts';

export interface Line {
  readonly intercept: number;
  readonly slope: number;
  readonly interceptVariance: number;
  readonly slopeVariance: number;
  /** between intercept and slope */
  readonly covariance: number;
  /** of one point of weight 1; NaN with two points, 1 where the uncertainties of the points are known */
  readonly residualDeviation: number;
  /** of the variances: points − 2, or Infinity where the uncertainties of the points are known */
  readonly degreesOfFreedom: number;
  /** Σ w r² */
  readonly residualSumOfSquares: number;
}

/** A value read off a line. */
export interface LineReading {
  readonly value: number;
  /** standard uncertainty, first order */
  readonly uncertainty: number;
  /** 95 %; null where the slope may be zero, so that no interval is bounded */
  readonly interval: [number, number] | null;
}

/**
 * Scatter about the line tells the uncertainty.
 * @param weights relative, one a point; without them all count alike
 * @throws TankhueError `points-missing` (three are needed), `columns-dependent` (x all alike), `length-differs`, `not-finite`, `not-positive`
 */
export function fitLine(x: readonly number[], y: readonly number[], weights?: readonly number[]): Line {
  expectPoints(x.length, 3, 'x');
  const { fit, centre } = fitAboutCentre(x, y, weights ?? x.map(() => 1));
  return lineFrom(fit, centre, fit.residualVariance, fit.degreesOfFreedom);
}

/**
 * Uncertainties of the points are known and are not rescaled by the fit; the residual sum of squares is χ² on n − 2 degrees of freedom.
 * @param uncertainties standard uncertainty of each y
 * @throws as `fitLine`; two points are enough
 */
export function fitLineOfKnownUncertainty(
  x: readonly number[],
  y: readonly number[],
  uncertainties: readonly number[],
): Line {
  expectPoints(x.length, 2, 'x');
  expectLength(uncertainties, x.length, 'uncertainties');
  expectPositive(uncertainties, 'uncertainties');
  const { fit, centre } = fitAboutCentre(
    x,
    y,
    uncertainties.map((u) => 1 / u ** 2),
  );
  return lineFrom(fit, centre, 1, Infinity);
}

/** Value of the line itself at x (a new reading there scatters more). @param uncertaintyOfX standard uncertainty, independent of the line */
export function lineAt(line: Line, x: number, uncertaintyOfX = 0): LineReading {
  expectFinite([x, uncertaintyOfX], 'x');
  const value = line.intercept + line.slope * x;
  const variance = varianceAt(line, x) + (line.slope * uncertaintyOfX) ** 2;
  const reach = quantileOf(line.degreesOfFreedom) * Math.sqrt(variance);
  return { value, uncertainty: Math.sqrt(variance), interval: [value - reach, value + reach] };
}

/**
 * The x at which the line has a value y that was read independently of it.
 * @param uncertaintyOfY of the mean of the readings: `line.residualDeviation / √readings` where they scatter like the points
 * @throws TankhueError `not-finite`, `slope-zero`
 */
export function inversePrediction(line: Line, y: number, uncertaintyOfY: number): LineReading {
  expectFinite([y, uncertaintyOfY], 'y');
  expectSlope(line.slope);
  return readingOf(
    {
      numerator: y - line.intercept,
      denominator: line.slope,
      numeratorVariance: uncertaintyOfY ** 2 + line.interceptVariance,
      denominatorVariance: line.slopeVariance,
      covariance: -line.covariance,
    },
    line.degreesOfFreedom,
  );
}

/** Where the line is zero. @throws TankhueError `slope-zero` */
export const xIntercept = (line: Line): LineReading => inversePrediction(line, 0, 0);

/** The x at which two independent lines meet. @throws TankhueError `slope-zero` where they are parallel */
export function intersectLines(one: Line, other: Line): LineReading {
  const denominator = other.slope - one.slope;
  expectSlope(denominator);
  const at = (one.intercept - other.intercept) / denominator;
  const [v, w] = [varianceAt(one, at), varianceAt(other, at)];
  // Welch-Satterthwaite at the meeting point.
  const degreesOfFreedom =
    v + w > 0 ? (v + w) ** 2 / (v ** 2 / one.degreesOfFreedom + w ** 2 / other.degreesOfFreedom) : Infinity;
  return readingOf(
    {
      numerator: one.intercept - other.intercept,
      denominator,
      numeratorVariance: one.interceptVariance + other.interceptVariance,
      denominatorVariance: one.slopeVariance + other.slopeVariance,
      covariance: -one.covariance - other.covariance,
    },
    degreesOfFreedom,
  );
}

/** Variance of the line's own value at x. */
export const varianceAt = (line: Line, x: number): number =>
  Math.max(0, line.interceptVariance + 2 * x * line.covariance + x * x * line.slopeVariance);

function readingOf(ratio: Ratio, degreesOfFreedom: number): LineReading {
  return {
    value: ratio.numerator / ratio.denominator,
    uncertainty: Math.sqrt(varianceOfRatio(ratio)),
    interval: fiellerInterval(ratio, quantileOf(degreesOfFreedom)),
  };
}

const quantileOf = (degreesOfFreedom: number): number => studentQuantile(0.975, degreesOfFreedom);

function fitAboutCentre(
  x: readonly number[],
  y: readonly number[],
  weights: readonly number[],
): { fit: LeastSquares; centre: number } {
  expectLength(y, x.length, 'y');
  expectLength(weights, x.length, 'weights');
  expectFinite(x, 'x');
  expectFinite(y, 'y');
  expectPositive(weights, 'weights');
  const total = weights.reduce((sum, w) => sum + w, 0);
  const centre = x.reduce((sum, value, i) => sum + (weights[i]! / total) * value, 0);
  const rows = x.map((value) => [1, value - centre]);
  return { fit: solveLeastSquares(rows, y, { weights }), centre };
}

function lineFrom(fit: LeastSquares, centre: number, variance: number, degreesOfFreedom: number): Line {
  const [mean, slope] = fit.coefficients as [number, number];
  const [meanVariance, cross, slopeVariance] = [
    fit.unscaledCovariance[0]![0]! * variance,
    fit.unscaledCovariance[0]![1]! * variance,
    fit.unscaledCovariance[1]![1]! * variance,
  ];
  return {
    intercept: mean - slope * centre,
    slope,
    interceptVariance: meanVariance - 2 * centre * cross + centre * centre * slopeVariance,
    slopeVariance,
    covariance: cross - centre * slopeVariance,
    residualDeviation: Math.sqrt(variance),
    degreesOfFreedom,
    residualSumOfSquares: fit.residualSumOfSquares,
  };
}

function expectSlope(slope: number): void {
  if (slope === 0 || !Number.isFinite(slope))
    throw new TankhueError(
      'slope-zero',
      `expected a line that is not level against the other; received a slope of ${slope}`,
      'line',
      'take points further apart',
    );
}
