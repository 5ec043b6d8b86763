// What        Smoothed values and derivatives of a curve by a polynomial fitted in a moving window.
// Equation    y(x) ≈ Σ c_k (x − x_i)^k over the 2h + 1 nearest places in order; smoothed value c_0, k-th derivative k! c_k.
// Why so      Keeps heights and areas of bands that a mean of the same width would flatten. At the ends the last whole window is used
//             off-centre, so nothing is padded and nothing is lost, but the noise of these points is larger: see `noiseGain`.
// Valid for   windows narrower than the narrowest band; degree below the number of points in a window.
// Units       those of y, over x to the power of the derivative.
// Source      A. Savitzky, M. J. E. Golay, Anal. Chem. 1964, 36, 1627; corrections: J. Steinier et al., Anal. Chem. 1972, 44, 1906;
//             ends: P. A. Gorry, Anal. Chem. 1990, 62, 570.
import { TankhueError } from '../errors.ts';
import { expectAscending, expectFinite, expectLength, expectPositive } from './expectations.ts';
import { thinQrOfRows } from './gramSchmidt.ts';
import { forwardSubstituted } from './triangle.ts';

export interface SmoothingWindow {
  /** points to either side: the window has 2·halfWidth + 1 */
  readonly halfWidth: number;
  readonly degree: number;
  /** 0 smooths, 1 and 2 are slopes and curvatures */
  readonly derivative?: number;
}

export interface Smoothed {
  readonly values: Float64Array;
  /** standard deviation of each value over that of the points, for independent noise */
  readonly noiseGain: Float64Array;
}

/**
 * Points at equal distances.
 * @param spacing distance of two neighbours, in units of x
 * @throws TankhueError `smoothing-window`, `not-finite`, `not-positive`
 */
export function smoothEquidistant(y: ArrayLike<number>, spacing: number, window: SmoothingWindow): Smoothed {
  expectFinite(y, 'y');
  expectPositive([spacing], 'spacing');
  expectWindow(window, y.length);
  const width = 2 * window.halfWidth + 1;
  // One set of weights for each place in the window; the middle one serves all points but those at the ends.
  const byPlace = Array.from({ length: width }, (_, place) =>
    weightsOf(
      Float64Array.from({ length: width }, (__, i) => (i - place) * spacing),
      window,
    ),
  );
  return convolved(y, window.halfWidth, (_, place) => byPlace[place]!);
}

/**
 * Points at any distances.
 * @param x strictly rising
 * @throws TankhueError `smoothing-window`, `axis-turns`, `length-differs`, `not-finite`
 */
export function smoothUnequal(x: ArrayLike<number>, y: ArrayLike<number>, window: SmoothingWindow): Smoothed {
  expectAscending(x, 'x');
  expectLength(y, x.length, 'y');
  expectFinite(y, 'y');
  expectWindow(window, x.length);
  const width = 2 * window.halfWidth + 1;
  return convolved(y, window.halfWidth, (first, place) =>
    weightsOf(
      Float64Array.from({ length: width }, (_, i) => x[first + i]! - x[first + place]!),
      window,
    ),
  );
}

function convolved(
  y: ArrayLike<number>,
  halfWidth: number,
  weightsAt: (first: number, place: number) => Float64Array,
): Smoothed {
  const values = new Float64Array(y.length);
  const noiseGain = new Float64Array(y.length);
  for (let i = 0; i < y.length; i++) {
    const first = Math.min(Math.max(0, i - halfWidth), y.length - 2 * halfWidth - 1);
    const weights = weightsAt(first, i - first);
    noiseGain[i] = Math.hypot(...weights);
    for (let k = 0; k < weights.length; k++) values[i]! += weights[k]! * y[first + k]!;
  }
  return { values, noiseGain };
}

/** w with Σ w_i y_i = d! c_d of the polynomial through offsets from the place asked for: row d of the pseudo-inverse. */
function weightsOf(offsets: Float64Array, { degree, derivative = 0 }: SmoothingWindow): Float64Array {
  const scale = offsets.reduce((most, offset) => Math.max(most, Math.abs(offset)), 0) || 1;
  const powers = Array.from({ length: degree + 1 }, (_, k) => offsets.map((offset) => (offset / scale) ** k));
  const { q, r } = thinQrOfRows(powers);
  const row = forwardSubstituted(
    r,
    powers.map((_, k) => (k === derivative ? 1 : 0)),
  );
  const factor = factorial(derivative) / scale ** derivative;
  return offsets.map((_, i) => factor * row.reduce((sum, value, j) => sum + value * q[j]![i]!, 0));
}

const factorial = (n: number): number => (n < 2 ? 1 : n * factorial(n - 1));

function expectWindow({ halfWidth, degree, derivative = 0 }: SmoothingWindow, points: number): void {
  const isWhole = [halfWidth, degree, derivative].every((value) => Number.isInteger(value) && value >= 0);
  const width = 2 * halfWidth + 1;
  if (!isWhole || degree >= width || derivative > degree || width > points)
    throw new TankhueError(
      'smoothing-window',
      `expected derivative ≤ degree < window ≤ points (${points}), whole numbers; received ${derivative}, ${degree}, ${width}`,
      'window',
      'widen the window or lower the degree',
    );
}
