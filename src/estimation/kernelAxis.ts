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

/** @param axis nm, ascending @param grid nm @param step of the grid, nm */
export function axisMap(axis: Float64Array, grid: Float64Array, step: number): AxisMap {
  const unit = {
    name: '',
    wavelength: axis,
    absorbance: new Float64Array(axis.length),
    origin: { file: '', column: '', sha256: '' },
  };
  const { absorbance: reach } = resample(unit, grid, step);
  const reached = Uint8Array.from(reach, (value) => (Number.isNaN(value) ? 0 : 1));
  const used = [...reached.keys()].filter((g) => reached[g]);
  const first = new Int32Array(grid.length).fill(axis.length);
  const last = new Int32Array(grid.length).fill(-1);
  const columns: Float64Array[] = [];
  for (let i = 0; i < axis.length; i++) {
    unit.absorbance.fill(0);
    unit.absorbance[i] = 1;
    const { absorbance } = resample(unit, grid, step);
    columns.push(absorbance);
    for (const g of used)
      if (absorbance[g] !== 0) {
        first[g] = Math.min(first[g]!, i);
        last[g] = i;
      }
  }
  const width = used.reduce((widest, g) => Math.max(widest, last[g]! - first[g]! + 1), 1);
  // A window that would reach beyond the points in use starts earlier: a point nobody needs must not spoil a row by being NaN.
  const latest = used.length > 0 ? last[used[used.length - 1]!]! - width + 1 : 0;
  const start = Int32Array.from(used, (g) => Math.min(first[g]!, latest));
  const weight = new Float64Array(used.length * width);
  used.forEach((g, r) => {
    for (let i = 0; i < width; i++) weight[r * width + i] = columns[start[r]! + i]![g]!;
  });
  return { reached, width, start, weight };
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
