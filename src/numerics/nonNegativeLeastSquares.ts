// What        Least squares with limits on every unknown; none below zero as the usual case.
// Equation    minimise |Ax − b| with lower ≤ x ≤ upper. Active sets: an unknown at a limit is freed when the gradient points inwards, the free
//             ones are solved, and the step is cut at the first limit it meets.
// Why so      Finite and exact: at the end no gradient points inwards (Kuhn-Tucker), so no other x within the limits is better. A cut of an
//             unlimited answer at its limits is not the best answer.
// Valid for   unknowns by the dozen. Columns that the free ones make up stay at their limit: the answer is then one of several equally good.
// Units       those of b over those of A.
// Source      C. L. Lawson, R. J. Hanson, Solving Least Squares Problems, 1974, ch. 23; upper limits: P. B. Stark, R. L. Parker,
//             Comput. Stat. 1995, 10, 129.
import { TankhueError } from '../errors.ts';
import { expectFinite, expectLength } from './expectations.ts';
import { dot, thinQrOfRows } from './gramSchmidt.ts';
import { fitByQr } from './linearFit.ts';
import type { Rows } from './matrix.ts';

export interface BoundedLeastSquares {
  readonly x: number[];
  /** b − Ax */
  readonly residuals: number[];
  readonly residualSumOfSquares: number;
  /** where each unknown ended */
  readonly atLimit: ('lower' | 'upper' | null)[];
}

/** @throws as `solveBoundedLeastSquares` */
export const solveNonNegativeLeastSquares = (matrix: Rows, b: readonly number[]): BoundedLeastSquares =>
  solveBoundedLeastSquares(matrix, b, 0, Infinity);

/**
 * @param matrix one row an equation
 * @param lower one limit for all unknowns or one each; finite
 * @param upper one limit for all unknowns or one each; may be Infinity
 * @throws TankhueError `length-differs`, `not-finite`, `limits-crossed`, `not-settled`
 */
export function solveBoundedLeastSquares(
  matrix: Rows,
  b: readonly number[],
  lower: number | readonly number[],
  upper: number | readonly number[],
): BoundedLeastSquares {
  const count = matrix[0]?.length ?? 0;
  const low = limitsOf(lower, count, 'lower');
  const high = limitsOf(upper, count, 'upper');
  expectInput(matrix, b, low, high);
  const right = Float64Array.from(b);
  const columns = low.map((_, j) => Float64Array.from(matrix, (row) => row[j]!));
  const lengths = columns.map((column) => Math.sqrt(dot(column, column)));
  const x = [...low];
  const state = x.map((): 'lower' | 'upper' | 'free' => 'lower');
  const residualsOf = (values: readonly number[]): Float64Array => {
    const residuals = Float64Array.from(right);
    columns.forEach((column, j) => {
      for (let i = 0; i < residuals.length; i++) residuals[i]! -= column[i]! * values[j]!;
    });
    return residuals;
  };
  // Freed and at once back: by rounding only, or because the free ones make it up. Not asked again before something else has moved.
  const refused = new Set<number>();
  const most = 20 * count + 100;
  for (let round = 0; ; round++) {
    if (round === most)
      throw new TankhueError(
        'not-settled',
        `expected an end within ${most} rounds; received none`,
        'bounded least squares',
        'scale the columns to similar sizes',
      );
    const residuals = residualsOf(x);
    const size = Math.sqrt(dot(residuals, residuals));
    // Improvement each unknown at a limit promises, as a share of the residual: −1 … 1.
    const inward = columns.map((column, j) => {
      if (state[j] === 'free' || refused.has(j) || size === 0 || lengths[j] === 0 || low[j] === high[j]) return 0;
      const slope = dot(column, residuals) / lengths[j]! / size;
      return state[j] === 'lower' ? slope : -slope;
    });
    const best = inward.indexOf(Math.max(...inward));
    if (!(inward[best]! > 1e-12) || isRounding(size, x)) break;
    const before = state[best]!;
    state[best] = 'free';
    if (solveFree(best)) refused.clear();
    else {
      state[best] = before;
      refused.add(best);
    }
  }
  const residuals = residualsOf(x);
  return {
    x,
    residuals: Array.from(residuals),
    residualSumOfSquares: dot(residuals, residuals),
    atLimit: state.map((each) => (each === 'free' ? null : each)),
  };

  /** Residuals that are only rounding of the terms they are the difference of. */
  function isRounding(size: number, values: readonly number[]): boolean {
    const terms = values.reduce((sum, value, j) => sum + Math.abs(value) * lengths[j]!, Math.sqrt(dot(right, right)));
    return size <= 4 * Number.EPSILON * terms;
  }

  /** Moves to the best point of the free unknowns, fixing those that meet a limit; false where `freed` does not move inwards. */
  function solveFree(freed: number): boolean {
    for (let first = true; ; first = false) {
      const free = x.map((_, j) => j).filter((j) => state[j] === 'free');
      if (free.length === 0) return true;
      const rest = residualsOf(x.map((value, j) => (state[j] === 'free' ? 0 : value)));
      const qr = thinQrOfRows(free.map((j) => columns[j]!));
      if (qr.dependent.length > 0) return false;
      const wanted = fitByQr(qr, rest).coefficients;
      if (first) {
        const change = wanted[free.indexOf(freed)]! - x[freed]!;
        if (x[freed] === low[freed] ? !(change > 0) : !(change < 0)) return false;
      }
      let share = 1;
      let blocked = -1;
      free.forEach((j, i) => {
        const limit = wanted[i]! < low[j]! ? low[j]! : wanted[i]! > high[j]! ? high[j]! : null;
        if (limit === null) return;
        const reach = (limit - x[j]!) / (wanted[i]! - x[j]!);
        if (reach < share) [share, blocked] = [Math.max(0, reach), j];
      });
      if (blocked < 0) {
        free.forEach((j, i) => (x[j] = wanted[i]!));
        return true;
      }
      const isBelow = wanted[free.indexOf(blocked)]! < low[blocked]!;
      free.forEach((j, i) => (x[j] = Math.min(high[j]!, Math.max(low[j]!, x[j]! + share * (wanted[i]! - x[j]!)))));
      x[blocked] = isBelow ? low[blocked]! : high[blocked]!;
      state[blocked] = isBelow ? 'lower' : 'upper';
    }
  }
}

const limitsOf = (limit: number | readonly number[], count: number, where: string): readonly number[] => {
  if (typeof limit === 'number') return Array.from({ length: count }, () => limit);
  expectLength(limit, count, where);
  return limit;
};

function expectInput(matrix: Rows, b: readonly number[], low: readonly number[], high: readonly number[]): void {
  expectLength(b, matrix.length, 'b');
  expectFinite(b, 'b');
  matrix.forEach((row, i) => {
    expectLength(row, low.length, `matrix[${i}]`);
    expectFinite(row, `matrix[${i}]`);
  });
  expectFinite(low, 'lower');
  low.forEach((limit, j) => {
    if (!(limit <= high[j]!))
      throw new TankhueError(
        'limits-crossed',
        `expected an upper limit of ${limit} or more; received ${high[j]}`,
        `upper[${j}]`,
        'write the smaller number as the lower limit',
      );
  });
}
