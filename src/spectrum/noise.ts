// What        Noise of one reading of a spectrum at its native pitch, from the spectrum alone.
// Equation    r_i = y_i − (y between the two neighbours), scaled by 1/√(1 + w² + (1 − w)²), w the share of the lower neighbour;
//             σ = median |r_i| / 0.6745.
// Why so      Against a straight line through its neighbours a smooth curve leaves h²/2 of its second derivative, which at a pitch of 0.2 to
//             1 nm is far below the noise of any photometer. The median is not moved by spikes, steps of a filter change or a lamp line.
// Valid for   pitch ≤ 1 nm, bands wider than 50 nm, readings whose errors are independent from point to point: software that smooths or
//             interpolates before export makes it too small. Above 2 nm curvature adds about 0.1 % of the absorbance.
// Units       nm, absorbance.
// Source      pseudo-residuals: T. Gasser, L. Sroka, C. Jennen-Steinmetz, Biometrika 1986, 73, 625 (from memory); 0.6745 is the third
//             quartile of the normal distribution; the median in place of the mean square is ours.
import { TankhueError } from '../errors.ts';
import type { Spectrum } from './spectrum.ts';

const THIRD_QUARTILE = 0.6744897501960817;
const FEWEST_RESIDUALS = 10;

/**
 * @param from nm @param to nm, both included
 * @returns standard deviation of one reading, absorbance
 * @throws TankhueError `points-missing` where fewer than ten points with both neighbours lie in the range
 */
export function readingNoise(spectrum: Spectrum, from = -Infinity, to = Infinity): number {
  const { wavelength: x, absorbance: y } = spectrum;
  const residuals: number[] = [];
  for (let i = 1; i < x.length - 1; i++) {
    if (x[i - 1]! < from || x[i + 1]! > to) continue;
    const lower = (x[i + 1]! - x[i]!) / (x[i + 1]! - x[i - 1]!);
    const residual = y[i]! - lower * y[i - 1]! - (1 - lower) * y[i + 1]!;
    if (!Number.isNaN(residual)) residuals.push(Math.abs(residual) / Math.sqrt(1 + lower ** 2 + (1 - lower) ** 2));
  }
  if (residuals.length < FEWEST_RESIDUALS)
    throw new TankhueError(
      'points-missing',
      `expected ${FEWEST_RESIDUALS} points or more with both neighbours; received ${residuals.length}`,
      `spectrum ${spectrum.name}`,
      'widen the range, or scan at a finer pitch',
    );
  residuals.sort((a, b) => a - b);
  const middle = residuals.length >> 1;
  const median = residuals.length % 2 === 1 ? residuals[middle]! : (residuals[middle - 1]! + residuals[middle]!) / 2;
  return median / THIRD_QUARTILE;
}
