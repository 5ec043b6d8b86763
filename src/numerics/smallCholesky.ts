/** Cholesky for the 2 × 2 … 6 × 6 systems inside an estimate: row-major, in place, nothing allocated. */

/** Overwrites the lower triangle of the row-major `size` × `size` matrix by its factor. @returns false where it is not positive definite */
export function factorInPlace(matrix: Float64Array, size: number): boolean {
  for (let i = 0; i < size; i++)
    for (let j = 0; j <= i; j++) {
      let sum = matrix[i * size + j]!;
      for (let k = 0; k < j; k++) sum -= matrix[i * size + k]! * matrix[j * size + k]!;
      if (i !== j) matrix[i * size + j] = sum / matrix[j * size + j]!;
      else if (sum > 0) matrix[i * size + i] = Math.sqrt(sum);
      else return false;
    }
  return true;
}

/** Solves L Lᵀ x = vector in place, for a factor made by `factorInPlace`. */
export function solveInPlace(factor: Float64Array, size: number, vector: Float64Array): void {
  for (let i = 0; i < size; i++) {
    let sum = vector[i]!;
    for (let k = 0; k < i; k++) sum -= factor[i * size + k]! * vector[k]!;
    vector[i] = sum / factor[i * size + i]!;
  }
  for (let i = size - 1; i >= 0; i--) {
    let sum = vector[i]!;
    for (let k = i + 1; k < size; k++) sum -= factor[k * size + i]! * vector[k]!;
    vector[i] = sum / factor[i * size + i]!;
  }
}

/** Inverse of a symmetric positive definite row-major matrix; null where it is not positive definite. */
export function inverseOf(matrix: Float64Array, size: number): Float64Array | null {
  const factor = Float64Array.from(matrix);
  if (!factorInPlace(factor, size)) return null;
  const inverse = new Float64Array(size * size);
  const column = new Float64Array(size);
  for (let j = 0; j < size; j++) {
    column.fill(0);
    column[j] = 1;
    solveInPlace(factor, size, column);
    for (let i = 0; i < size; i++) inverse[i * size + j] = column[i]!;
  }
  return inverse;
}
