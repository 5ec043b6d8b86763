import { resample } from '../spectrum/resample.ts';

/**
 * The rule of `resample` as a matrix: each used grid point is a weighted sum over one window of the caller's points. All windows are
 * of one width (zero weights fill up), because a loop that always runs equally long costs half as much.
 */
export interface AxisMap {
  /** one flag per grid point: false where the caller's axis does not reach */
  readonly reached: Uint8Array;
  /** points of the caller's axis per window */
  readonly width: number;
  /** first point of each used grid point's window */
  readonly start: Int32Array;
  /** `width` weights for each used grid point */
  readonly weight: Float64Array;
}

/**
 * The weights are asked of `resample` itself, so that there is one rule: spectra of ones, so far apart that no grid point sees two.
 * @param axis nm, ascending @param grid nm @param step of the grid, nm
 */
export function axisMap(axis: Float64Array, grid: Float64Array, step: number): AxisMap {
  const { first, width: widest } = reachOf(axis, grid, step);
  const comb = {
    name: '',
    wavelength: axis,
    absorbance: new Float64Array(axis.length),
    origin: { file: '', column: '', sha256: '' },
  };
  const responses = Array.from({ length: widest }, (_, tooth) => {
    comb.absorbance.forEach((_value, i) => (comb.absorbance[i] = i % widest === tooth ? 1 : 0));
    return resample(comb, grid, step).absorbance;
  });
  const reached = Uint8Array.from(grid, (_, g) => (Number.isNaN(responses[0]![g]!) ? 0 : 1));
  const used = [...reached.keys()].filter((g) => reached[g]);
  const weightOf = (g: number, i: number): number => responses[i % widest]![g]!;
  const needed = used.map((g) => {
    const points = Array.from({ length: widest }, (_, k) => first[g]! + k).filter(
      (i) => i < axis.length && Math.abs(weightOf(g, i)) > NO_WEIGHT,
    );
    return { from: points[0]!, to: points[points.length - 1]! };
  });
  const longest = needed.reduce((most, { from, to }) => Math.max(most, to - from + 1), 1);
  // An even width, so that two points can be taken at once; where there is no room for it, as it is.
  const span = needed.length > 0 ? needed[needed.length - 1]!.to + 1 : 0;
  const width = longest + (longest % 2 === 1 && longest < span ? 1 : 0);
  // A window that would reach beyond the points in use starts earlier: a point nobody needs must not spoil a row by being NaN.
  const latest = needed.length > 0 ? needed[needed.length - 1]!.to - width + 1 : 0;
  const start = Int32Array.from(needed, ({ from }) => Math.max(0, Math.min(from, latest)));
  const weight = new Float64Array(used.length * width);
  needed.forEach(({ from, to }, r) => {
    for (let i = from; i <= to; i++) weight[r * width + i - start[r]!] = weightOf(used[r]!, i);
  });
  return { reached, width, start, weight };
}

/** Weights below are rounding. */
const NO_WEIGHT = 1e-12;
/** Points beyond the stretch of a mean that it may lean on, at each end. */
const LEANING = 2;

/** First point that each grid point may need, and the most that any may need. */
function reachOf(axis: Float64Array, grid: Float64Array, step: number): { first: Int32Array; width: number } {
  let low = 0;
  let high = 0;
  let width = 1;
  const first = Int32Array.from(grid, (nm) => {
    while (low < axis.length && axis[low]! < nm - step / 2) low++;
    while (high < axis.length && axis[high]! <= nm + step / 2) high++;
    width = Math.max(width, high - low + 2 * LEANING);
    return Math.max(0, low - LEANING);
  });
  return { first, width };
}

/** Means of rows of a matrix, one row after the other, into one array that is used again and again. */
export function averager({ width, start, weight }: AxisMap): {
  readonly means: Float64Array;
  average(absorbances: Float64Array, offset: number): void;
} {
  const count = start.length;
  const means = new Float64Array(count);
  const average = (absorbances: Float64Array, offset: number): void => {
    for (let l = 0, at = 0; l < count; l++, at += width) {
      const from = offset + start[l]!;
      let sum = 0;
      for (let i = 0; i < width; i++) sum += weight[at + i]! * absorbances[from + i]!;
      means[l] = sum;
    }
  };
  return { means, average };
}
