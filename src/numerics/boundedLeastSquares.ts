// What        Least squares within limits where many answers are equally good: the one with small unknowns.
// Equation    minimise |Ax − b|² + r²|x|², low ≤ x ≤ high, r = 1e-7 of the largest column.
// Why so      Blends have more stocks than conditions; the weight r picks one recipe without moving it by more than a millionth, and an answer
//             uses no more unknowns between their limits than there are equations, which on the bench means few pipettings.
// Valid for   some ten unknowns.
// Units       those of b over those of A.
// Source      limits: nonNegativeLeastSquares.ts; the weight is ours.
import { dot } from './gramSchmidt.ts';
import { solveBoundedLeastSquares } from './nonNegativeLeastSquares.ts';

const RIDGE = 1e-7;

/** @param columns of A @param high may be Infinity @returns x and b − Ax */
export function boundedLeastSquares(
  columns: readonly Float64Array[],
  b: Float64Array,
  low: readonly number[],
  high: readonly number[],
): { x: number[]; residual: Float64Array } {
  const ridge = RIDGE * (Math.max(...columns.map((column) => Math.sqrt(dot(column, column)))) || 1);
  const equations = Array.from(b, (_, i) => columns.map((column) => column[i]!));
  const small = columns.map((_, j) => columns.map((__, k) => (j === k ? ridge : 0)));
  const { x, residuals } = solveBoundedLeastSquares(
    [...equations, ...small],
    [...b, ...columns.map(() => 0)],
    low,
    high,
  );
  return { x, residual: Float64Array.from(residuals.slice(0, b.length)) };
}
