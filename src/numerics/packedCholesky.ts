/** Cholesky of a symmetric 4 × 4 matrix, lower triangle packed row by row, written out: inside a loop over millions of spectra. */

/**
 * @param from array that holds the ten numbers from `offset` on
 * @param factor receives the factor, its diagonal inverted
 * @param stretch the diagonal is multiplied by it
 * @returns false where the matrix is not positive definite
 */
export function factorPacked(from: Float64Array, offset: number, stretch: number, factor: Float64Array): boolean {
  const d0 = from[offset]! * stretch;
  if (!(d0 > 0)) return false;
  const i0 = 1 / Math.sqrt(d0);
  const l10 = from[offset + 1]! * i0;
  const d1 = from[offset + 2]! * stretch - l10 * l10;
  if (!(d1 > 0)) return false;
  const i1 = 1 / Math.sqrt(d1);
  const l20 = from[offset + 3]! * i0;
  const l21 = (from[offset + 4]! - l20 * l10) * i1;
  const d2 = from[offset + 5]! * stretch - l20 * l20 - l21 * l21;
  if (!(d2 > 0)) return false;
  const i2 = 1 / Math.sqrt(d2);
  const l30 = from[offset + 6]! * i0;
  const l31 = (from[offset + 7]! - l30 * l10) * i1;
  const l32 = (from[offset + 8]! - l30 * l20 - l31 * l21) * i2;
  const d3 = from[offset + 9]! * stretch - l30 * l30 - l31 * l31 - l32 * l32;
  if (!(d3 > 0)) return false;
  factor[0] = i0;
  factor[1] = l10;
  factor[2] = i1;
  factor[3] = l20;
  factor[4] = l21;
  factor[5] = i2;
  factor[6] = l30;
  factor[7] = l31;
  factor[8] = l32;
  factor[9] = 1 / Math.sqrt(d3);
  return true;
}

/** Solves in place for a factor of `factorPacked`. */
export function solvePacked(factor: Float64Array, vector: Float64Array): void {
  const l10 = factor[1]!;
  const l20 = factor[3]!;
  const l21 = factor[4]!;
  const l30 = factor[6]!;
  const l31 = factor[7]!;
  const l32 = factor[8]!;
  const v0 = vector[0]! * factor[0]!;
  const v1 = (vector[1]! - l10 * v0) * factor[2]!;
  const v2 = (vector[2]! - l20 * v0 - l21 * v1) * factor[5]!;
  const v3 = (vector[3]! - l30 * v0 - l31 * v1 - l32 * v2) * factor[9]!;
  const x3 = v3 * factor[9]!;
  const x2 = (v2 - l32 * x3) * factor[5]!;
  const x1 = (v1 - l21 * x2 - l31 * x3) * factor[2]!;
  vector[0] = (v0 - l10 * x1 - l20 * x2 - l30 * x3) * factor[0]!;
  vector[1] = x1;
  vector[2] = x2;
  vector[3] = x3;
}
