// What        A curve on another axis: means over a stated width where the curve is finer, interpolation where it is coarser, one rule for both.
// Equation    each native point stands for the stretch up to the midpoints to its neighbours, with the straight line y_i + s_i (x − x_i)
//             over it, s_i = (y_{i+1} − y_{i−1})/(x_{i+1} − x_{i−1}); the result is the mean of these lines over [t − d, t + d],
//             d = min(width/2, distance of t to the outer edge of the nearer end's stretch).
// Why so      The mean of the points that happen to fall inside a window sits at their centre, not at t: with a pitch of 4 nm and a width
//             of 5 nm a band moves by up to 2 nm, at the ends of a scan by half the width. This mean is exact for every straight curve on
//             any pitch, keeps points that are means over their own pitch (a curve on its own axis comes back as it was), and shrinks
//             towards the ends, so that nothing is extrapolated.
// Valid for   native points in rising order. A value that needs a point without value has none: leaving out points that went over range
//             would pull the mean down.
// Units       nm, absorbance.
// Source      piecewise linear reconstruction: B. van Leer, J. Comput. Phys. 1979, 32, 101 (from memory); use ours.
import type { Spectrum } from './spectrum.ts';

export interface Resampled {
  /** NaN where the spectrum does not reach or a point needed has no value */
  readonly absorbance: Float64Array;
  /**
   * native points that a value is worth: independent noise of variance σ² in each of them leaves σ²/points in the value;
   * NaN where there is no value
   */
  readonly points: Float64Array;
}

/** Weights below are rounding: the point is not needed, and may be without value. */
const NO_WEIGHT = 1e-12;

/**
 * @param target nm, rising
 * @param width nm, 0 for the value at each target itself
 */
export function resample(spectrum: Spectrum, target: Float64Array, width: number): Resampled {
  const { wavelength: x, absorbance: y } = spectrum;
  const last = x.length - 1;
  /** upper edge of a point's stretch; edge(−1) is the lower edge of the first */
  const edge = (i: number): number => {
    if (i < 0) return x[0]! - (x[1]! - x[0]!) / 2;
    return i >= last ? x[last]! + (x[last]! - x[last - 1]!) / 2 : (x[i]! + x[i + 1]!) / 2;
  };
  const lowest = edge(-1);
  const highest = edge(last);
  const absorbance = new Float64Array(target.length).fill(NaN);
  const points = new Float64Array(target.length).fill(NaN);
  let first = 0;
  for (let t = 0; t < target.length; t++) {
    const centre = target[t]!;
    if (!(centre >= x[0]! && centre <= x[last]!)) continue;
    const half = Math.min(width / 2, centre - lowest, highest - centre);
    const low = centre - half;
    const high = centre + half;
    while (first < last && edge(first) <= low) first++;
    let sum = 0;
    let squares = 0;
    // Weights of three neighbours: the point before, the point itself, the point after; a weight is complete when the next but one begins.
    let before = 0;
    let own = 0;
    let lower = edge(first - 1);
    for (let i = first; ; i++) {
      const upper = edge(i);
      const from = low > lower ? low : lower;
      const to = high < upper ? high : upper;
      const share = half > 0 ? (to - from) / (2 * half) : 1;
      const below = i > 0 ? i - 1 : 0;
      const above = i < last ? i + 1 : last;
      const tilt = (share * ((from + to) / 2 - x[i]!)) / (x[above]! - x[below]!);
      own += share;
      let after = tilt;
      if (i > 0) before -= tilt;
      else own -= tilt;
      if (i === last) {
        own += tilt;
        after = 0;
      }
      const isLast = i === last || high <= upper;
      if (Math.abs(before) > NO_WEIGHT) sum += before * y[i - 1]!;
      squares += before * before;
      if (isLast) {
        if (Math.abs(own) > NO_WEIGHT) sum += own * y[i]!;
        if (Math.abs(after) > NO_WEIGHT) sum += after * y[i + 1]!;
        squares += own * own + after * after;
        break;
      }
      before = own;
      own = after;
      lower = upper;
    }
    absorbance[t] = sum;
    if (!Number.isNaN(sum)) points[t] = 1 / squares;
  }
  return { absorbance, points };
}
