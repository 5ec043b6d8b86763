import { dot } from './gramSchmidt.ts';
import { symmetricEigen } from './matrix.ts';

/**
 * Principal directions of residual rows, largest first, each scaled to one standard deviation on `freedom` degrees of freedom:
 * Σ_j g_j g_jᵀ is the best approximation of RᵀR/freedom by `count` of them. Through the small Gram matrix R Rᵀ, so that the number of
 * wavelengths costs nothing.
 */
export function principalDirections(rows: readonly Float64Array[], freedom: number, count: number): Float64Array[] {
  if (rows.length === 0) return [];
  const { values, vectors } = symmetricEigen(rows.map((a) => rows.map((b) => dot(a, b))));
  const largest = values[0]!;
  return values
    .slice(0, count)
    .filter((value) => value > 1e-12 * largest && value > 0)
    .map((_, k) => {
      const direction = new Float64Array(rows[0]!.length);
      rows.forEach((row, i) => {
        const weight = vectors[k]![i]! / Math.sqrt(freedom);
        for (let l = 0; l < direction.length; l++) direction[l]! += weight * row[l]!;
      });
      return direction;
    });
}
