// What        What a known disturbance of the spectrum does to the answer of an assay that does not know of it.
// Equation    error of a combination gᵀc of the concentrations = gᵀ M⁻¹ Σ_λ J δA/σ², M and J of `cuvetteDesign.ts`.
// Why so      the estimate already gives way to offsets, slopes and scatter; only what its modes cannot take up reaches the answer.
// Valid for   disturbances small enough to be linear.
// Units       absorbance in; share of the higher species 1 and relative total out, signed.
// Source      generalised least squares.
import { factorInPlace, solveInPlace } from '../../numerics/smallCholesky.ts';
import { dot } from '../../numerics/gramSchmidt.ts';
import type { CuvetteDesign } from './cuvetteDesign.ts';

/** Weights of the lower and the higher concentration in a quantity. */
export type Gradient = readonly [number, number];

/** Of the share of the higher species, and of the total relative to itself. */
export function gradientsAt(lower: number, higher: number): readonly [Gradient, Gradient] {
  const total = lower + higher;
  return [
    [-higher / total ** 2, lower / total ** 2],
    [1 / total, 1 / total],
  ];
}

/** M⁻¹g for each gradient; null where the wavelengths in use cannot tell the two species apart. */
export function pullsOf(design: CuvetteDesign, gradients: readonly Gradient[]): Float64Array[] | null {
  const { dimension: size, running } = design;
  const matrix = new Float64Array(size * size);
  let at = running.length - (size * (size + 1)) / 2;
  for (let p = 0; p < size; p++)
    for (let q = 0; q <= p; q++, at++) matrix[p * size + q] = running[at]! + (p === q && p < size - 2 ? 1 : 0);
  if (!factorInPlace(matrix, size)) return null;
  return gradients.map(([lower, higher]) => {
    const vector = new Float64Array(size);
    vector[size - 2] = lower;
    vector[size - 1] = higher;
    solveInPlace(matrix, size, vector);
    return vector;
  });
}

/** Weight of each wavelength in an answer: change of the answer per unit of absorbance; 0 where a wavelength is not used. */
function gainsOf(design: CuvetteDesign, pull: Float64Array): Float64Array {
  const columns = [...design.disturbances.map(({ shape }) => shape), design.byLower, design.byHigher];
  return design.variance.map((variance, i) => {
    if (!design.usable[i]) return 0;
    let sum = 0;
    for (let p = 0; p < columns.length; p++) sum += pull[p]! * columns[p]![i]!;
    return sum / variance;
  });
}

export interface Effect {
  /** of the higher species, 1 */
  readonly share: number;
  /** relative */
  readonly total: number;
}

/** @param disturbance absorbance on the model's wavelengths @returns signed effect; null where the species cannot be told apart */
export function disturbanceEffect(
  design: CuvetteDesign,
  lower: number,
  higher: number,
  disturbance: Float64Array,
): Effect | null {
  const pulls = pullsOf(design, gradientsAt(lower, higher));
  if (!pulls) return null;
  const [share, total] = pulls.map((pull) => dot(gainsOf(design, pull), disturbance)) as [number, number];
  return { share, total };
}

/** @param variance of independent noise on each of the model's wavelengths @returns standard deviations */
export function noiseEffect(
  design: CuvetteDesign,
  lower: number,
  higher: number,
  variance: Float64Array,
): Effect | null {
  const pulls = pullsOf(design, gradientsAt(lower, higher));
  if (!pulls) return null;
  const [share, total] = pulls.map((pull) => {
    const squares = gainsOf(design, pull).map((gain) => gain * gain);
    return Math.sqrt(dot(squares, variance));
  }) as [number, number];
  return { share, total };
}
