import { inverseOf } from '../numerics/smallCholesky.ts';
import { thinQrOfRows, dot } from '../numerics/gramSchmidt.ts';
import { TankhueError } from '../errors.ts';

/** Least-squares spectra of standards with known amounts, one solution for all wavelengths. */
export interface LinearSpectra {
  /** one per amount */
  readonly spectra: Float64Array[];
  /** measured − fitted, one per standard */
  readonly residuals: Float64Array[];
  /** (FᵀF)⁻¹, row-major */
  readonly inverse: Float64Array;
  /** leverage of each standard, 0…1 */
  readonly leverage: Float64Array;
}

/**
 * @param design amounts × path of each standard (rows of F)
 * @param measured absorbance of each standard
 * @throws TankhueError `compositions-dependent`
 */
export function fitLinearSpectra(design: readonly Float64Array[], measured: readonly Float64Array[]): LinearSpectra {
  const count = design[0]!.length;
  const columns = Array.from({ length: count }, (_, k) => Float64Array.from(design, (row) => row[k]!));
  const { q, r, dependent } = thinQrOfRows(columns);
  if (dependent.length > 0)
    throw new TankhueError(
      'compositions-dependent',
      `expected ${count} independent compositions; received ${count - dependent.length}`,
      'standards sheet',
      'add standards of other shares and other totals',
    );
  const length = measured[0]!.length;
  const projected = q.map((column) => {
    const row = new Float64Array(length);
    measured.forEach((absorbance, s) => {
      const weight = column[s]!;
      for (let l = 0; l < length; l++) row[l]! += weight * absorbance[l]!;
    });
    return row;
  });
  const spectra: Float64Array[] = Array.from({ length: count });
  for (let k = count - 1; k >= 0; k--) {
    const row = projected[k]!.slice();
    for (let j = k + 1; j < count; j++) for (let l = 0; l < length; l++) row[l]! -= r[k * count + j]! * spectra[j]![l]!;
    for (let l = 0; l < length; l++) row[l]! /= r[k * count + k]!;
    spectra[k] = row;
  }
  const residuals = measured.map((absorbance, s) => {
    const row = Float64Array.from(absorbance);
    for (let k = 0; k < count; k++) for (let l = 0; l < length; l++) row[l]! -= q[k]![s]! * projected[k]![l]!;
    return row;
  });
  const gram = new Float64Array(count * count);
  for (let i = 0; i < count; i++) for (let j = 0; j < count; j++) gram[i * count + j] = dot(columns[i]!, columns[j]!);
  const inverse = inverseOf(gram, count) ?? new Float64Array(count * count).fill(NaN);
  const leverage = Float64Array.from(design, (_, s) => q.reduce((sum, column) => sum + column[s]! ** 2, 0));
  return { spectra, residuals, inverse, leverage };
}
