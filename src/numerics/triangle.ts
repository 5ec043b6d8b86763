/** Upper triangles R, row-major count × count, as a thin QR leaves them. */

/** Solves Rx = right; 0 where the triangle has a zero on its diagonal. */
export function backSubstituted(r: Float64Array, right: readonly number[]): number[] {
  const count = right.length;
  const x = right.map(() => 0);
  for (let i = count - 1; i >= 0; i--) {
    let sum = right[i]!;
    for (let j = i + 1; j < count; j++) sum -= r[i * count + j]! * x[j]!;
    x[i] = r[i * count + i] === 0 ? 0 : sum / r[i * count + i]!;
  }
  return x;
}

/** Solves Rᵀx = right; 0 where the triangle has a zero on its diagonal. */
export function forwardSubstituted(r: Float64Array, right: readonly number[]): number[] {
  const x = right.map(() => 0);
  for (let i = 0; i < right.length; i++) {
    let sum = right[i]!;
    for (let j = 0; j < i; j++) sum -= r[j * right.length + i]! * x[j]!;
    x[i] = r[i * right.length + i] === 0 ? 0 : sum / r[i * right.length + i]!;
  }
  return x;
}

/** Inverse of a row-major upper triangle. */
export function invertUpper(r: Float64Array, count: number): Float64Array {
  const inverse = new Float64Array(count * count);
  for (let j = 0; j < count; j++) {
    inverse[j * count + j] = 1 / r[j * count + j]!;
    for (let i = j - 1; i >= 0; i--) {
      let sum = 0;
      for (let k = i + 1; k <= j; k++) sum += r[i * count + k]! * inverse[k * count + j]!;
      inverse[i * count + j] = -sum / r[i * count + i]!;
    }
  }
  return inverse;
}
