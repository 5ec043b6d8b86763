import { describe, expect, test } from 'vitest';
import { drawComposition, type CompositionSource } from '../../src/estimation/monteCarloComposition.ts';
import { shareInterval } from '../../src/estimation/interval.ts';
import { compareIntervals, numericalTolerance } from '../../src/numerics/monteCarlo.ts';
import { seededRandom } from '../../src/numerics/random.ts';

const TRIALS = 400_000;
const normal = (lower: number, higher: number): CompositionSource => ({ lower, higher, freedom: Infinity });

// JCGM 101:2008, 9.2.2, table 2: the sum of four standard normal quantities has u = 2.00 and the interval −3.92 … 3.92.
test('four normal inputs: JCGM 101, 9.2.2', () => {
  const sources = [normal(1, 0), normal(0, 1), normal(1, 0), normal(0, 1)];
  const { total } = drawComposition(0, 0, sources, TRIALS, seededRandom(3));
  // Four standard errors of 400,000 draws: 0.013 of the mean, 0.009 of u, 0.034 of an end of the interval.
  expect(Math.abs(total.mean)).toBeLessThan(0.013);
  expect(Math.abs(total.standardDeviation - 2)).toBeLessThan(0.009);
  expect(Math.abs(total.interval[0] + 3.92)).toBeLessThan(0.034);
  expect(Math.abs(total.interval[1] - 3.92)).toBeLessThan(0.034);
});

// Student's t, 97.5 %: 12.706 (ν 1), 4.303 (2), 2.571 (5), 2.228 (10), 2.042 (30); any table.
test.each([
  [1, 12.706, 0.6],
  [2, 4.303, 0.09],
  [5, 2.571, 0.03],
  [10, 2.228, 0.025],
  [30, 2.042, 0.02],
])('a source of %s degrees of freedom has Student’s interval ± %s', (freedom, quantile, four) => {
  const { total } = drawComposition(5, 0, [{ lower: 1, higher: 0, freedom }], TRIALS, seededRandom(freedom));
  expect(Math.abs(total.interval[0] - (5 - quantile))).toBeLessThan(four);
  expect(Math.abs(total.interval[1] - (5 + quantile))).toBeLessThan(four);
});

describe('the share', () => {
  const sources = [normal(0.02, -0.01), normal(0.01, 0.012), normal(0.004, 0.02), normal(0, -0.006)];
  const covariance = [0, 0, 0, 0];
  for (const { lower, higher } of sources) {
    covariance[0]! += lower * lower;
    covariance[1]! += lower * higher;
    covariance[2]! += lower * higher;
    covariance[3]! += higher * higher;
  }

  test('correlated normal sources: the interval is Fieller’s, which is exact for a ratio', () => {
    const { share } = drawComposition(0.9, 0.7, sources, TRIALS, seededRandom(5));
    const exact = shareInterval(0.9, 0.7, covariance, 1.959964)!;
    const agreement = compareIntervals(exact, share.interval, numericalTolerance(share.standardDeviation, 2));
    expect(agreement).toMatchObject({ agrees: true });
  });

  test('near zero with an uncertain total it is not symmetric, and still Fieller’s', () => {
    const wide = sources.map(({ lower, higher }) => normal(8 * lower, 8 * higher));
    const { share } = drawComposition(0.9, 0.08, wide, TRIALS, seededRandom(6));
    const exact = shareInterval(
      0.9,
      0.08,
      covariance.map((value) => 64 * value),
      1.959964,
    )!;
    const middle = 0.08 / 0.98;
    const skewness = (share.interval[1] - middle) / (middle - share.interval[0]);
    expect(Math.abs(skewness - 1)).toBeGreaterThan(0.1);
    expect(Math.abs(share.interval[0] - exact[0])).toBeLessThan(0.01);
    expect(Math.abs(share.interval[1] - exact[1])).toBeLessThan(0.01);
  });

  test('a source that scales both concentrations moves the total and not the share', () => {
    const { share, total } = drawComposition(0.9, 0.7, [normal(0.09, 0.07)], 2000, seededRandom(7));
    expect(share.standardDeviation).toBeLessThan(1e-12);
    expect(total.standardDeviation).toBeGreaterThan(0.14);
  });
});

test('the same seed gives the same intervals; few trials are refused', () => {
  const draw = (seed: number) => drawComposition(0.9, 0.7, [normal(0.02, -0.01)], 1000, seededRandom(seed));
  expect(draw(1)).toEqual(draw(1));
  expect(draw(1)).not.toEqual(draw(2));
  expect(() => drawComposition(0.9, 0.7, [], 50, seededRandom(1))).toThrow(
    expect.objectContaining({ code: 'trials-few' }),
  );
});
