import { LuDecomposition, Matrix } from 'ml-matrix';
import { TankhueError } from '../errors.ts';

/**
 * Solves a square system by LU with partial pivoting. The library answers exactly singular systems with large numbers and no
 * error, so that is refused here.
 * @throws TankhueError `system-singular`
 */
export function solveSquare(matrix: readonly (readonly number[])[], right: readonly number[]): number[] {
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
