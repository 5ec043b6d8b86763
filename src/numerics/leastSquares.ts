// What        Weighted linear least squares with everything a report needs: estimates, covariance, residuals, condition, weak direction.
// Equation    minimise Σ w (y − Xβ)². Rows scaled by √w, columns to length 1, thin QR; covariance = s² (XᵀWX)⁻¹, s² = Σ w r²/(n − p).
// Why so      Column scaling takes the units out of the condition and with them most of the loss: on the hardest published set (Filip, condition
//             1e15 raw, 5e9 scaled) seven digits remain. Dependent columns are refused: the library's own solver answers them with 4e15.
// Valid for   n ≥ p; with n = p the residual variance and what it scales are NaN, because nothing is left to tell it.
//             Rank limit: s_min/s_max of the scaled columns above 1e-12.
// Units       coefficients: response over column. Weights: 1/variance, or relative; `unscaledCovariance` holds where they are 1/variance.
// Source      any text on linear models; NIST StRD (Filip, Longley, Wampler, …) checks it.
import { TankhueError } from '../errors.ts';
import { conditionOfTriangle, WEAK_CONDITION } from './condition.ts';
import { expectFinite, expectLength, expectPoints, expectPositive } from './expectations.ts';
import { dot, thinQrOfRows } from './gramSchmidt.ts';
import { columnsDependent, fitByQr } from './linearFit.ts';
import type { Rows } from './matrix.ts';

export interface LeastSquaresOptions {
  /** one a point, above 0; without them all count alike */
  readonly weights?: readonly number[];
}

export interface LeastSquares {
  readonly coefficients: number[];
  /** scaled by the residual variance */
  readonly covariance: number[][];
  /** (XᵀWX)⁻¹: the covariance where weights are 1/variance */
  readonly unscaledCovariance: number[][];
  /** roots of the diagonal of `covariance` */
  readonly standardDeviations: number[];
  /** response − fitted, not weighted */
  readonly residuals: number[];
  /** Σ w r² */
  readonly residualSumOfSquares: number;
  /** NaN without degrees of freedom */
  readonly residualVariance: number;
  readonly degreesOfFreedom: number;
  /** s_max/s_min of the weighted columns, each scaled to length 1 */
  readonly condition: number;
  /** unit vector over the scaled columns that the rows say least about; null where the condition is below 30 */
  readonly weakDirection: number[] | null;
}

const RANK_LIMIT = 1e-12;

/**
 * @param design one row a point
 * @throws TankhueError `columns-dependent`, `points-missing`, `length-differs`, `not-finite`, `not-positive`
 */
export function solveLeastSquares(
  design: Rows,
  response: readonly number[],
  { weights }: LeastSquaresOptions = {},
): LeastSquares {
  const rows = design.length;
  const count = design[0]?.length ?? 0;
  if (count === 0)
    throw new TankhueError(
      'points-missing',
      `expected one column or more; received ${rows} rows of none`,
      'design',
      'say what is to be fitted',
    );
  expectPoints(rows, count, 'design');
  expectLength(response, rows, 'response');
  expectFinite(response, 'response');
  design.forEach((row, i) => {
    expectLength(row, count, `design[${i}]`);
    expectFinite(row, `design[${i}]`);
  });
  if (weights) {
    expectLength(weights, rows, 'weights');
    expectPositive(weights, 'weights');
  }
  const root = Float64Array.from({ length: rows }, (_, i) => Math.sqrt(weights?.[i] ?? 1));
  const columns = Array.from({ length: count }, (_, j) => root.map((w, i) => w * design[i]![j]!));
  const lengths = columns.map((column) => Math.sqrt(dot(column, column)));
  const empty = lengths.filter((length) => length === 0).length;
  if (empty > 0) throw columnsDependent(empty);
  const qr = thinQrOfRows(columns.map((column, j) => column.map((value) => value / lengths[j]!)));
  const { ratio, weakest } = conditionOfTriangle(qr);
  if (qr.dependent.length === 0 && !(ratio < 1 / RANK_LIMIT)) throw columnsDependent(1);
  const fit = fitByQr(
    qr,
    root.map((w, i) => w * response[i]!),
  );
  const degreesOfFreedom = rows - count;
  const residualSumOfSquares = dot(fit.residuals, fit.residuals);
  const residualVariance = degreesOfFreedom > 0 ? residualSumOfSquares / degreesOfFreedom : NaN;
  const unscaledCovariance = lengths.map((a, i) =>
    lengths.map((b, j) => fit.unscaledCovariance[i * count + j]! / a / b),
  );
  const covariance = unscaledCovariance.map((row) => row.map((value) => value * residualVariance));
  return {
    coefficients: lengths.map((length, j) => fit.coefficients[j]! / length),
    covariance,
    unscaledCovariance,
    standardDeviations: covariance.map((row, i) => Math.sqrt(row[i]!)),
    residuals: Array.from(fit.residuals, (value, i) => value / root[i]!),
    residualSumOfSquares,
    residualVariance,
    degreesOfFreedom,
    condition: ratio,
    weakDirection: ratio < WEAK_CONDITION ? null : weakest,
  };
}
