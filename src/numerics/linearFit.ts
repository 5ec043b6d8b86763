// What        Ordinary least squares on a few columns, with the covariance of the coefficients.
// Equation    y = Σ_j β_j x_j, X = QR, β = R⁻¹Qᵀy; covariance = s² R⁻¹R⁻ᵀ, s² = RSS/(n − p).
// Why so      QR keeps the digits that normal equations lose. Weights: scale row i of every column and of y by 1/σ_i.
// Valid for   more rows than columns; dependent columns are refused, never answered.
// Units       those of y over those of the column.
// Source      any text on linear models; NIST StRD checks it.
import { TankhueError } from '../errors.ts';
import { dot, thinQrOfRows, type ThinQr } from './gramSchmidt.ts';
import { invertUpper } from './triangle.ts';

export interface LinearFit {
  readonly coefficients: Float64Array;
  /** row-major p × p */
  readonly covariance: Float64Array;
  /** row-major p × p, R⁻¹R⁻ᵀ: the covariance where rows were scaled by deviations that are known */
  readonly unscaledCovariance: Float64Array;
  readonly standardErrors: Float64Array;
  readonly residualSumOfSquares: number;
  readonly degreesOfFreedom: number;
}

/** @throws TankhueError `columns-dependent`, `points-missing` */
export function fitLinear(columns: readonly Float64Array[], y: Float64Array): LinearFit {
  const count = columns.length;
  const degreesOfFreedom = y.length - count;
  if (degreesOfFreedom < 1)
    throw new TankhueError(
      'points-missing',
      `expected more than ${count} points for ${count} coefficients; received ${y.length}`,
      'fit',
      'measure more points',
    );
  const { coefficients, unscaledCovariance, residuals } = fitByQr(thinQrOfRows(columns), y);
  const residualSumOfSquares = dot(residuals, residuals);
  const variance = residualSumOfSquares / degreesOfFreedom;
  const covariance = unscaledCovariance.map((value) => variance * value);
  return {
    coefficients,
    covariance,
    unscaledCovariance,
    standardErrors: Float64Array.from({ length: count }, (_, i) => Math.sqrt(covariance[i * count + i]!)),
    residualSumOfSquares,
    degreesOfFreedom,
  };
}

/** @throws TankhueError `columns-dependent` */
export function fitByQr(
  { q, r, dependent }: ThinQr,
  y: Float64Array,
): { coefficients: Float64Array; unscaledCovariance: Float64Array; residuals: Float64Array } {
  if (dependent.length > 0) throw columnsDependent(dependent.length);
  const count = q.length;
  const inverse = invertUpper(r, count);
  const projections = q.map((row) => dot(row, y));
  const coefficients = new Float64Array(count);
  for (let i = 0; i < count; i++)
    for (let j = i; j < count; j++) coefficients[i]! += inverse[i * count + j]! * projections[j]!;
  const residuals = Float64Array.from(y);
  for (let j = 0; j < count; j++) for (let l = 0; l < y.length; l++) residuals[l]! -= projections[j]! * q[j]![l]!;
  const unscaledCovariance = new Float64Array(count * count);
  for (let i = 0; i < count; i++)
    for (let j = 0; j < count; j++)
      for (let k = Math.max(i, j); k < count; k++)
        unscaledCovariance[i * count + j]! += inverse[i * count + k]! * inverse[j * count + k]!;
  return { coefficients, unscaledCovariance, residuals };
}

export const columnsDependent = (count: number): TankhueError =>
  new TankhueError(
    'columns-dependent',
    `expected independent columns; received ${count} that the others make up`,
    'fit',
    'leave out a column, or vary it',
  );
