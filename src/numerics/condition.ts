import { EVD, Matrix } from 'ml-matrix';
import { dot } from './gramSchmidt.ts';

export interface Condition {
  /** s_max/s_min of the columns, each scaled to length 1 */
  readonly ratio: number;
  /** unit vector over the columns along which the rows say least */
  readonly weakest: number[];
}

/** Condition of a set of columns and its weak direction; Infinity where columns are dependent or empty. */
export function conditionOfColumns(columns: readonly Float64Array[]): Condition {
  const size = columns.length;
  const norms = columns.map((column) => Math.sqrt(dot(column, column)));
  const gram = new Matrix(size, size);
  for (let i = 0; i < size; i++)
    for (let j = 0; j < size; j++) gram.set(i, j, dot(columns[i]!, columns[j]!) / (norms[i]! * norms[j]! || 1));
  const { realEigenvalues, eigenvectorMatrix } = new EVD(gram, { assumeSymmetric: true });
  const least = realEigenvalues.indexOf(Math.min(...realEigenvalues));
  const largest = Math.max(...realEigenvalues);
  const smallest = realEigenvalues[least]!;
  return {
    ratio: smallest > 1e-15 * largest ? Math.sqrt(largest / smallest) : Infinity,
    weakest: eigenvectorMatrix.getColumn(least),
  };
}
