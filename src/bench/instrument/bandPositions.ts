// What        Where an instrument sees a narrow absorption band: the maximum of a cubic through the points around it.
// Equation    A = c₀ + c₁x + c₂x² + c₃x³ about the present guess; maximum at x = (−c₂ − √(c₂² − 3c₁c₃)) / (3c₃), → −c₁/(2c₂).
// Why so      a cubic follows the lean of a band that a parabola would read as a shift; its covariance says how sure the place is.
// Valid for   bands wider than the fit's half width; 6 points or more within it.
// Units       nm.
// Source      ours.
import { fitLinear } from '../../numerics/leastSquares.ts';
import type { Spectrum } from '../../spectrum/spectrum.ts';

export interface BandPosition {
  readonly position: number;
  /** from the scatter about the cubic */
  readonly uncertainty: number;
}

/** nm either side of the maximum that the cubic runs over; widened to three points for coarse scans. */
const HALF_WIDTH = 1.5;

/** @returns null when there is no maximum within `reach` nm of `expected`, or too few points */
export function bandPosition(spectrum: Spectrum, expected: number, reach: number): BandPosition | null {
  const { wavelength, absorbance } = spectrum;
  const near = [...wavelength.keys()].filter(
    (i) => Math.abs(wavelength[i]! - expected) <= reach && Number.isFinite(absorbance[i]),
  );
  if (near.length < 3) return null;
  const pitch = (wavelength[near[near.length - 1]!]! - wavelength[near[0]!]!) / (near.length - 1);
  const half = Math.max(HALF_WIDTH, 3.01 * pitch);
  let guess = wavelength[near.reduce((top, i) => (absorbance[i]! > absorbance[top]! ? i : top))]!;
  for (let step = 0; step < 20; step++) {
    const fitted = maximumOfCubic(spectrum, guess, half);
    if (!fitted || Math.abs(fitted.position - expected) > reach) return null;
    if (Math.abs(fitted.position - guess) < pitch / 100) return fitted;
    guess = (guess + fitted.position) / 2;
  }
  return null;
}

function maximumOfCubic({ wavelength, absorbance }: Spectrum, centre: number, half: number): BandPosition | null {
  const points = [...wavelength.keys()].filter(
    (i) => Math.abs(wavelength[i]! - centre) <= half && Number.isFinite(absorbance[i]),
  );
  if (points.length < 6) return null;
  const x = Float64Array.from(points, (i) => (wavelength[i]! - centre) / half);
  const y = Float64Array.from(points, (i) => absorbance[i]!);
  const fit = fitLinear([x.map(() => 1), x, x.map((v) => v * v), x.map((v) => v ** 3)], y);
  const [, c1, c2, c3] = fit.coefficients as unknown as [number, number, number, number];
  const root = Math.sqrt(c2 * c2 - 3 * c1 * c3);
  // The form without cancellation: the other root of the derivative is the minimum.
  const at = c1 / (root - c2);
  const curvature = 2 * c2 + 6 * c3 * at;
  if (!(curvature < 0) || Math.abs(at) > 1) return null;
  // Implicit: the maximum moves by −(δc₁ + 2xδc₂ + 3x²δc₃)/curvature.
  const gradient = [0, 1, 2 * at, 3 * at * at];
  let variance = 0;
  for (let i = 1; i < 4; i++)
    for (let j = 1; j < 4; j++) variance += gradient[i]! * gradient[j]! * fit.covariance[i * 4 + j]!;
  return { position: centre + half * at, uncertainty: (half * Math.sqrt(variance)) / -curvature };
}
