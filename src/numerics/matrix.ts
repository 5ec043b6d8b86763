// What        Decompositions of small dense matrices: the one adapter on ml-matrix.
// Equation    A = LLᵀ; A = VΛVᵀ; A = QR; A = UΣVᵀ; A = LU.
// Why so      Traps of ml-matrix 6, each turned into a refusal or a stated order here and held by a test: `solve` on dependent columns
//             answers 4e15 without an error and `isFullRank` says true; Cholesky of an indefinite matrix goes on with wrong numbers unless
//             `isPositiveDefinite` is asked; LU of a singular matrix answers Infinity; the order of eigenvalues and of singular values of a
//             matrix wider than high is nowhere promised; NaN goes in and comes out unremarked.
// Valid for   up to some hundred rows; loops over spectra use smallCholesky.ts and gramSchmidt.ts, which allocate nothing.
// Units       those of the entries.
// Source      G. H. Golub, C. F. Van Loan, Matrix Computations; code by the library.
import {
  CholeskyDecomposition,
  EigenvalueDecomposition,
  LuDecomposition,
  Matrix,
  QrDecomposition,
  SingularValueDecomposition,
} from 'ml-matrix';
import { TankhueError } from '../errors.ts';
import { expectFinite, expectLength } from './expectations.ts';

/** Rows of a matrix. */
export type Rows = readonly (readonly number[])[];

/** Entries this far apart, relative to the largest, make a matrix unsymmetric. */
const SYMMETRY = 1e-10;

/**
 * @returns lower triangle L with A = LLᵀ
 * @throws TankhueError `not-symmetric`, `not-positive-definite`, `not-finite`, `length-differs`
 */
export function choleskyLower(matrix: Rows): number[][] {
  const decomposition = new CholeskyDecomposition(symmetric(matrix));
  if (!decomposition.isPositiveDefinite())
    throw new TankhueError(
      'not-positive-definite',
      'expected a covariance whose variances are all above 0 in every direction; received one that is not',
      'matrix',
      'leave out what the other entries already say, or correct a correlation beyond ±1',
    );
  return decomposition.lowerTriangularMatrix.to2DArray();
}

/** x with LLᵀx = right. @throws TankhueError `length-differs`, `not-finite` */
export function solveCholesky(lower: Rows, right: readonly number[]): number[] {
  expectLength(right, lower.length, 'right');
  expectFinite(right, 'right');
  const x = [...right];
  for (let i = 0; i < x.length; i++) {
    for (let k = 0; k < i; k++) x[i]! -= lower[i]![k]! * x[k]!;
    x[i]! /= lower[i]![i]!;
  }
  for (let i = x.length - 1; i >= 0; i--) {
    for (let k = i + 1; k < x.length; k++) x[i]! -= lower[k]![i]! * x[k]!;
    x[i]! /= lower[i]![i]!;
  }
  return x;
}

export interface Eigen {
  /** largest first */
  readonly values: number[];
  /** unit vectors, in the order of the values */
  readonly vectors: number[][];
}

/** @throws TankhueError `not-symmetric`, `not-finite`, `length-differs` */
export function symmetricEigen(matrix: Rows): Eigen {
  const { realEigenvalues, eigenvectorMatrix } = new EigenvalueDecomposition(symmetric(matrix), {
    assumeSymmetric: true,
  });
  const order = realEigenvalues.map((_, i) => i).sort((a, b) => realEigenvalues[b]! - realEigenvalues[a]!);
  return {
    values: order.map((i) => realEigenvalues[i]!),
    vectors: order.map((i) => eigenvectorMatrix.getColumn(i)),
  };
}

/**
 * @param matrix at least as many rows as columns
 * @returns q rows × columns with orthonormal columns, r columns × columns upper triangle
 * @throws TankhueError `points-missing`, `not-finite`, `length-differs`
 */
export function thinQr(matrix: Rows): { q: number[][]; r: number[][] } {
  const { rows, columns } = tall(matrix);
  const decomposition = new QrDecomposition(new Matrix(matrix as number[][]));
  return {
    q: decomposition.orthogonalMatrix.subMatrix(0, rows - 1, 0, columns - 1).to2DArray(),
    r: decomposition.upperTriangularMatrix.subMatrix(0, columns - 1, 0, columns - 1).to2DArray(),
  };
}

export interface SingularValues {
  /** largest first, as many as the matrix has columns */
  readonly values: number[];
  /** left unit vectors (length rows), in the order of the values */
  readonly left: number[][];
  /** right unit vectors (length columns), in the order of the values */
  readonly right: number[][];
}

/**
 * A = Σ value·left·rightᵀ.
 * @param matrix at least as many rows as columns
 * @throws TankhueError `points-missing`, `not-finite`, `length-differs`
 */
export function singularValueDecomposition(matrix: Rows): SingularValues {
  tall(matrix);
  const svd = new SingularValueDecomposition(new Matrix(matrix as number[][]));
  const values = svd.diagonal;
  const order = values.map((_, i) => i).sort((a, b) => values[b]! - values[a]!);
  return {
    values: order.map((i) => values[i]!),
    left: order.map((i) => svd.leftSingularVectors.getColumn(i)),
    right: order.map((i) => svd.rightSingularVectors.getColumn(i)),
  };
}

/** Largest first. @throws as `singularValueDecomposition` */
export const singularValues = (matrix: Rows): number[] => singularValueDecomposition(matrix).values;

/** x with Ax = right by LU with partial pivoting. @throws TankhueError `system-singular`, `not-finite`, `length-differs` */
export function solveSquare(matrix: Rows, right: readonly number[]): number[] {
  expectLength(matrix, right.length, 'system');
  rectangle(matrix, right.length);
  expectFinite(right, 'right');
  const factors = new LuDecomposition(new Matrix(matrix as number[][]));
  if (factors.isSingular())
    throw new TankhueError(
      'system-singular',
      `expected ${right.length} independent equations; received fewer`,
      'system',
      'say something that tells the unknowns apart',
    );
  return factors.solve(Matrix.columnVector(right as number[])).to1DArray();
}

function rectangle(matrix: Rows, columns: number): void {
  matrix.forEach((row, i) => {
    expectLength(row, columns, `matrix[${i}]`);
    expectFinite(row, `matrix[${i}]`);
  });
}

function tall(matrix: Rows): { rows: number; columns: number } {
  const columns = matrix[0]?.length ?? 0;
  rectangle(matrix, columns);
  if (columns === 0 || matrix.length < columns)
    throw new TankhueError(
      'points-missing',
      `expected at least one column and as many rows as columns (${columns}); received ${matrix.length} rows`,
      'matrix',
      'measure more points, or ask for fewer unknowns',
    );
  return { rows: matrix.length, columns };
}

/** The mean of the matrix and its transpose, where they differ by rounding only. */
function symmetric(matrix: Rows): Matrix {
  const size = matrix.length;
  rectangle(matrix, size);
  const largest = Math.max(...matrix.map((row) => Math.max(...row.map(Math.abs))));
  const mean = new Matrix(size, size);
  for (let i = 0; i < size; i++)
    for (let j = 0; j <= i; j++) {
      const [a, b] = [matrix[i]![j]!, matrix[j]![i]!];
      if (Math.abs(a - b) > SYMMETRY * largest)
        throw new TankhueError(
          'not-symmetric',
          `expected a symmetric matrix; received ${a} and ${b} across the diagonal`,
          `matrix[${i}][${j}]`,
          'write each covariance twice, the same',
        );
      mean.set(i, j, (a + b) / 2);
      mean.set(j, i, (a + b) / 2);
    }
  return mean;
}
