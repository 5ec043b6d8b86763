// What        A straight line through points uncertain in both directions.
// Equation    minimise Σ W_i (y_i − a − b x_i)², W = 1/(u_y² + b²u_x² − 2b·ρ·u_x·u_y), by York's iteration.
// Why so      Least squares in y alone pulls the slope towards zero when x is uncertain. Two families of uncertainties are published and both are
//             here: of the adjusted points (York 2004, ISO/TS 28037), as of a linear fit at the solution; and by the sensitivity of the
//             estimate to each datum (Kalantar 1992), from the implicit function theorem. They differ by terms of the residuals, some per cent.
// Valid for   known uncertainties; χ² says whether they are right, and does not rescale them.
// Units       those of y, and of y over x.
// Source      D. York et al., Am. J. Phys. 2004, 72, 367; A. H. Kalantar, Meas. Sci. Technol. 1992, 3, 1113; ISO/TS 28037:2010, 7;
//             equal variance ratios: W. E. Deming, Statistical Adjustment of Data, 1943.
import { TankhueError } from '../errors.ts';
import { expectFinite, expectLength, expectPoints, expectPositive } from './expectations.ts';
import { fitLine, type Line } from './line.ts';
import { mean } from './meanAndDeviation.ts';

export interface UncertainPoints {
  readonly x: readonly number[];
  readonly y: readonly number[];
  /** standard uncertainties, 0 allowed in one of the two directions of a point */
  readonly uncertaintyX: readonly number[];
  readonly uncertaintyY: readonly number[];
  /** between the errors of one point's x and y; 0 without it */
  readonly correlation?: readonly number[];
}

export interface ErrorsInBothLine {
  /** variances of the adjusted points; usable wherever a `Line` is, with degrees of freedom Infinity */
  readonly line: Line;
  readonly chiSquare: number;
  /** of χ²: points − 2 */
  readonly chiSquareFreedom: number;
  /** the second family: from the sensitivity of the estimate to each datum */
  readonly bySensitivity: {
    readonly interceptVariance: number;
    readonly slopeVariance: number;
    readonly covariance: number;
  };
  readonly iterations: number;
}

const ROUNDS = 1000;
const SETTLED = 1e-13;

/** @throws TankhueError `points-missing`, `length-differs`, `not-finite`, `not-positive`, `correlation-range`, `not-settled`, `columns-dependent` */
export function fitLineWithErrorsInBoth(points: UncertainPoints): ErrorsInBothLine {
  expectPointsToBeUsable(points);
  const { x, y } = points;
  let slope = fitLine(x, y).slope;
  for (let iterations = 1; iterations <= ROUNDS; iterations++) {
    const state = stateAt(points, slope);
    const next = state.nextSlope;
    const deviation = Math.sqrt(state.slopeVariance);
    if (!Number.isFinite(next)) break;
    const isSettled = Math.abs(next - slope) <= SETTLED * (Math.abs(slope) + deviation);
    slope = next;
    if (isSettled) return described(points, slope, iterations);
  }
  throw new TankhueError(
    'not-settled',
    `expected the slope to settle within ${ROUNDS} rounds; received none that does`,
    'points',
    'exchange x and y if the line is steep, or check the uncertainties',
  );
}

/**
 * One ratio for all points, slope in closed form.
 * @param varianceRatio u_y²/u_x²; 1 minimises the distances to the line
 * @throws TankhueError `points-missing`, `length-differs`, `not-finite`, `not-positive`, `slope-undetermined`
 */
export function demingLine(
  x: readonly number[],
  y: readonly number[],
  varianceRatio: number,
): { intercept: number; slope: number } {
  expectPoints(x.length, 2, 'x');
  expectLength(y, x.length, 'y');
  expectFinite(x, 'x');
  expectFinite(y, 'y');
  expectPositive([varianceRatio], 'varianceRatio');
  const [meanX, meanY] = [mean(x), mean(y)];
  let [xx, xy, yy] = [0, 0, 0];
  x.forEach((value, i) => {
    const [dx, dy] = [value - meanX, y[i]! - meanY];
    xx += dx * dx;
    xy += dx * dy;
    yy += dy * dy;
  });
  if (xy === 0)
    throw new TankhueError(
      'slope-undetermined',
      'expected x and y to vary together; received points without covariance',
      'x, y',
      'take points further apart',
    );
  const excess = yy - varianceRatio * xx;
  const root = Math.hypot(excess, 2 * xy * Math.sqrt(varianceRatio));
  // Of the two forms of one root the one without a difference.
  const slope = excess > 0 ? (excess + root) / (2 * xy) : (2 * varianceRatio * xy) / (root - excess);
  return { intercept: meanY - slope * meanX, slope };
}

interface State {
  readonly weights: number[];
  readonly meanX: number;
  readonly meanY: number;
  readonly nextSlope: number;
  /** weighted mean of the adjusted x */
  readonly adjustedMean: number;
  readonly meanVariance: number;
  readonly slopeVariance: number;
}

const correlationOf = ({ correlation }: UncertainPoints, i: number): number => correlation?.[i] ?? 0;

function stateAt(points: UncertainPoints, slope: number): State {
  const { x, y, uncertaintyX, uncertaintyY } = points;
  const weights = x.map((_, i) => 1 / varianceOfResidual(points, i, slope));
  const total = weights.reduce((sum, w) => sum + w, 0);
  const weighted = (values: readonly number[]): number =>
    values.reduce((sum, value, i) => sum + (weights[i]! / total) * value, 0);
  const [meanX, meanY] = [weighted(x), weighted(y)];
  const beta = x.map((value, i) => {
    const [u, v] = [value - meanX, y[i]! - meanY];
    const [ux, uy] = [uncertaintyX[i]!, uncertaintyY[i]!];
    return weights[i]! * (u * uy * uy + slope * v * ux * ux - (slope * u + v) * correlationOf(points, i) * ux * uy);
  });
  const along = (values: readonly number[], centre: number): number =>
    values.reduce((sum, value, i) => sum + weights[i]! * beta[i]! * (value - centre), 0);
  const centreOfBeta = weighted(beta);
  return {
    weights,
    meanX,
    meanY,
    nextSlope: along(y, meanY) / along(x, meanX),
    adjustedMean: meanX + centreOfBeta,
    meanVariance: 1 / total,
    slopeVariance: 1 / beta.reduce((sum, value, i) => sum + weights[i]! * (value - centreOfBeta) ** 2, 0),
  };
}

function varianceOfResidual(points: UncertainPoints, i: number, slope: number): number {
  const [ux, uy] = [points.uncertaintyX[i]!, points.uncertaintyY[i]!];
  return uy * uy + slope * slope * ux * ux - 2 * slope * correlationOf(points, i) * ux * uy;
}

function described(points: UncertainPoints, slope: number, iterations: number): ErrorsInBothLine {
  const state = stateAt(points, slope);
  const intercept = state.meanY - slope * state.meanX;
  const chiSquare = points.x.reduce(
    (sum, x, i) => sum + state.weights[i]! * (points.y[i]! - intercept - slope * x) ** 2,
    0,
  );
  return {
    line: {
      intercept,
      slope,
      interceptVariance: state.meanVariance + state.adjustedMean ** 2 * state.slopeVariance,
      slopeVariance: state.slopeVariance,
      covariance: -state.adjustedMean * state.slopeVariance,
      residualDeviation: 1,
      degreesOfFreedom: Infinity,
      residualSumOfSquares: chiSquare,
    },
    chiSquare,
    chiSquareFreedom: points.x.length - 2,
    bySensitivity: sensitivityCovariance(points, intercept, slope, state.weights),
    iterations,
  };
}

/** θ = (a, b) solves ∂F/∂θ = 0, so dθ/dz = −(∂²F/∂θ²)⁻¹ ∂²F/∂θ∂z for every datum z; F = ½Σ W r². */
function sensitivityCovariance(
  points: UncertainPoints,
  intercept: number,
  slope: number,
  weights: readonly number[],
): ErrorsInBothLine['bySensitivity'] {
  let [aa, ab, bb] = [0, 0, 0];
  const mixed = points.x.map((x, i) => {
    const [ux, uy] = [points.uncertaintyX[i]!, points.uncertaintyY[i]!];
    const rho = correlationOf(points, i);
    const w = weights[i]!;
    const r = points.y[i]! - intercept - slope * x;
    // D = u_y² + b²u_x² − 2bρu_xu_y; W = 1/D.
    const d1 = 2 * slope * ux * ux - 2 * rho * ux * uy;
    const w1 = -w * w * d1;
    const w2 = 2 * w ** 3 * d1 * d1 - 2 * w * w * ux * ux;
    aa += w;
    ab += w * x - w1 * r;
    bb += w * x * x - 2 * w1 * r * x + (w2 * r * r) / 2;
    return {
      ux,
      uy,
      rho,
      ay: -w,
      ax: w * slope,
      by: w1 * r - w * x,
      bx: -w1 * r * slope + w * slope * x - w * r,
    };
  });
  const determinant = aa * bb - ab * ab;
  let [interceptVariance, slopeVariance, covariance] = [0, 0, 0];
  for (const { ux, uy, rho, ay, ax, by, bx } of mixed) {
    const [aOfX, aOfY] = [-(bb * ax - ab * bx) / determinant, -(bb * ay - ab * by) / determinant];
    const [bOfX, bOfY] = [-(aa * bx - ab * ax) / determinant, -(aa * by - ab * ay) / determinant];
    const cross = rho * ux * uy;
    interceptVariance += aOfX ** 2 * ux * ux + aOfY ** 2 * uy * uy + 2 * aOfX * aOfY * cross;
    slopeVariance += bOfX ** 2 * ux * ux + bOfY ** 2 * uy * uy + 2 * bOfX * bOfY * cross;
    covariance += aOfX * bOfX * ux * ux + aOfY * bOfY * uy * uy + (aOfX * bOfY + aOfY * bOfX) * cross;
  }
  return { interceptVariance, slopeVariance, covariance };
}

function expectPointsToBeUsable(points: UncertainPoints): void {
  const { x, y, uncertaintyX, uncertaintyY, correlation } = points;
  expectPoints(x.length, 3, 'x');
  for (const [values, where] of [
    [y, 'y'],
    [uncertaintyX, 'uncertaintyX'],
    [uncertaintyY, 'uncertaintyY'],
    ...(correlation ? ([[correlation, 'correlation']] as const) : []),
  ] as const) {
    expectLength(values, x.length, where);
    expectFinite(values, where);
  }
  expectFinite(x, 'x');
  x.forEach((_, i) => {
    const [ux, uy, rho] = [uncertaintyX[i]!, uncertaintyY[i]!, correlationOf(points, i)];
    if (!(ux >= 0 && uy >= 0 && ux + uy > 0))
      throw new TankhueError(
        'not-positive',
        `expected uncertainties of 0 or more, not both 0; received ${ux} in x and ${uy} in y`,
        `point ${i + 1}`,
        'state how well the point is known',
      );
    if (!(Math.abs(rho) < 1))
      throw new TankhueError(
        'correlation-range',
        `expected a correlation between −1 and 1, both excluded; received ${rho}`,
        `correlation[${i}]`,
        'write 0 where x and y were measured apart',
      );
  });
}
