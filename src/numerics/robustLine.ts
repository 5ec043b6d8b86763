// What        Slope of a line that a few wild points do not move, with its interval.
// Equation    median of all (y_j − y_i)/(x_j − x_i); intercept: median of y − bx. The interval runs between the slopes of rank r and N + 1 − r,
//             r from the distribution of the number of inversions (Kendall).
// Why so      No tuning constant and no iteration; up to 29 % of the points may be wild. The interval is free of any distribution, exact up to
//             100 points without ties in x, and then says the coverage it truly has.
// Valid for   errors in y alike and independent; pairs with equal x tell nothing and are left out.
// Units       those of y over x.
// Source      H. Theil, Proc. K. Ned. Akad. Wet. A 1950, 53, 386; P. K. Sen, J. Am. Stat. Assoc. 1968, 63, 1379.
import { normalCdf, normalQuantile } from './distributions.ts';
import { TankhueError } from '../errors.ts';
import { expectFinite, expectLength, expectPoints, expectProbability } from './expectations.ts';

export interface RobustLine {
  readonly slope: number;
  readonly intercept: number;
  /** null where the points are too few for any interval of that coverage (four, for 95 %) */
  readonly interval: [number, number] | null;
  /** what the interval truly covers, at least what was asked for; NaN without an interval */
  readonly coverage: number;
}

const EXACT_POINTS = 100;

/** @throws TankhueError `points-missing`, `length-differs`, `not-finite`, `slope-undetermined`, `probability-range` */
export function theilSenLine(x: readonly number[], y: readonly number[], coverage = 0.95): RobustLine {
  expectPoints(x.length, 2, 'x');
  expectLength(y, x.length, 'y');
  expectFinite(x, 'x');
  expectFinite(y, 'y');
  expectProbability(coverage, 'coverage');
  const slopes = x
    .flatMap((value, i) => x.slice(0, i).map((other, j) => (y[i]! - y[j]!) / (value - other)))
    // Pairs at one place have no slope.
    .filter(Number.isFinite)
    .sort((a, b) => a - b);
  if (slopes.length === 0)
    throw new TankhueError(
      'slope-undetermined',
      'expected points at two places or more; received one',
      'x',
      'take points further apart',
    );
  const slope = median(slopes);
  const { rank, actual } = outermostRank(x, slopes.length, coverage);
  return {
    slope,
    intercept: median(x.map((value, i) => y[i]! - slope * value).sort((a, b) => a - b)),
    interval: rank > 0 ? [slopes[rank - 1]!, slopes[slopes.length - rank]!] : null,
    coverage: rank > 0 ? actual : NaN,
  };
}

/** Largest r such that N + 1 − 2r slopes between the ranks r and N + 1 − r cover enough, and what they cover. */
function outermostRank(x: readonly number[], slopes: number, coverage: number): { rank: number; actual: number } {
  const ties = tieSizes(x);
  if (ties.length === 0 && x.length <= EXACT_POINTS) {
    const inversions = inversionProbabilities(x.length);
    let [rank, below] = [0, 0];
    while (2 * (below + inversions[rank]!) <= 1 - coverage) below += inversions[rank++]!;
    return { rank, actual: 1 - 2 * below };
  }
  const spread = (n: number): number => n * (n - 1) * (2 * n + 5);
  const deviation = Math.sqrt((spread(x.length) - ties.reduce((sum, t) => sum + spread(t), 0)) / 18);
  const rank = Math.max(0, Math.floor((slopes - normalQuantile((1 + coverage) / 2) * deviation) / 2));
  return { rank, actual: 2 * normalCdf((slopes - 2 * rank) / deviation) - 1 };
}

/** Probability of each number of inversions in a random order of n. */
function inversionProbabilities(n: number): Float64Array {
  let known = Float64Array.of(1);
  for (let size = 2; size <= n; size++) {
    const next = new Float64Array(known.length + size - 1);
    known.forEach((p, i) => {
      for (let k = 0; k < size; k++) next[i + k]! += p / size;
    });
    known = next;
  }
  return known;
}

function tieSizes(x: readonly number[]): number[] {
  const counts = new Map<number, number>();
  for (const value of x) counts.set(value, (counts.get(value) ?? 0) + 1);
  return [...counts.values()].filter((count) => count > 1);
}

const median = (sorted: readonly number[]): number =>
  (sorted[(sorted.length - 1) >> 1]! + sorted[sorted.length >> 1]!) / 2;
