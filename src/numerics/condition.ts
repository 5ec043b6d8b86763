// What        How well a set of columns tells its unknowns apart, and the direction it says least about.
// Equation    columns scaled to length 1, then s_max/s_min and the right singular vector of s_min, from the triangle of a thin QR.
// Why so      Scaling takes the units out. Singular values of the triangle keep twice the digits that eigenvalues of the Gram matrix have.
// Valid for   as many columns as there are rows, or fewer.
// Units       none.
// Source      D. A. Belsley, E. Kuh, R. E. Welsch, Regression Diagnostics, 1980, ch. 3.
import { dot, thinQrOfRows, type ThinQr } from './gramSchmidt.ts';
import { singularValueDecomposition } from './matrix.ts';

export interface Condition {
  /** s_max/s_min of the columns, each scaled to length 1; Infinity where they are dependent */
  readonly ratio: number;
  /** unit vector over the scaled columns along which the rows say least */
  readonly weakest: number[];
}

/** From here on a linear combination of columns is said to be weak (Belsley, Kuh, Welsch: 30 and more is a strong near dependency). */
export const WEAK_CONDITION = 30;

const DEPENDENT = 1e-15;

/** Condition of a set of columns and its weak direction; Infinity where columns are dependent or empty. */
export const conditionOfColumns = (columns: readonly Float64Array[]): Condition =>
  conditionOfTriangle(thinQrOfRows(columns.map(scaledToLengthOne)));

/** The same from a thin QR of columns that were scaled to length 1. */
export function conditionOfTriangle({ r, q }: ThinQr): Condition {
  const size = q.length;
  const triangle = Array.from({ length: size }, (_, i) => Array.from(r.subarray(i * size, (i + 1) * size)));
  const { values, right } = singularValueDecomposition(triangle);
  const [largest, least] = [values[0]!, values[size - 1]!];
  return { ratio: least > DEPENDENT * largest ? largest / least : Infinity, weakest: right[size - 1]! };
}

function scaledToLengthOne(column: Float64Array): Float64Array {
  const length = Math.sqrt(dot(column, column));
  return length > 0 ? column.map((value) => value / length) : column;
}
