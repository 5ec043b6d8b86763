import { EVD, Matrix } from 'ml-matrix';
import { dot } from './gramSchmidt.ts';

/**
 * Principal directions of residual rows, largest first, each scaled to one standard deviation on `freedom` degrees of freedom:
 * Σ_j g_j g_jᵀ is the best approximation of RᵀR/freedom by `count` of them. Through the small Gram matrix R Rᵀ, so that the number of
 * wavelengths costs nothing.
 */
export function principalDirections(rows: readonly Float64Array[], freedom: number, count: number): Float64Array[] {
  const m = rows.length;
  const gram = new Matrix(m, m);
  for (let i = 0; i < m; i++)
    for (let j = 0; j <= i; j++) {
      const value = dot(rows[i]!, rows[j]!);
      gram.set(i, j, value);
      gram.set(j, i, value);
    }
  const decomposition = new EVD(gram, { assumeSymmetric: true });
  const vectors = decomposition.eigenvectorMatrix;
  const order = decomposition.realEigenvalues
    .map((value, index) => ({ value, index }))
    .sort((a, b) => b.value - a.value)
    .slice(0, count);
  const largest = order[0]?.value ?? 0;
  return order
    .filter(({ value }) => value > 1e-12 * largest && value > 0)
    .map(({ index }) => {
      const direction = new Float64Array(rows[0]!.length);
      for (let i = 0; i < m; i++) {
        const weight = vectors.get(i, index) / Math.sqrt(freedom);
        for (let l = 0; l < direction.length; l++) direction[l]! += weight * rows[i]![l]!;
      }
      return direction;
    });
}
