import { assert, integer, property } from 'fast-check';
import { describe, expect, test } from 'vitest';
import { solveLeastSquares } from '../../src/numerics/leastSquares.ts';
import { solveBoundedLeastSquares, solveNonNegativeLeastSquares } from '../../src/numerics/nonNegativeLeastSquares.ts';
import { seededRandom } from '../../src/numerics/random.ts';
import { expectRefusal } from '../support/refusal.ts';

const seed = integer({ min: 1, max: 1e9 });

/** A system of 6 equations for 4 unknowns, with an answer that the right side is not made from. */
function systemOf(from: number): { matrix: number[][]; b: number[]; positive: number[] } {
  const random = seededRandom(from);
  return {
    matrix: Array.from({ length: 6 }, () => Array.from({ length: 4 }, () => random.normal())),
    b: Array.from({ length: 6 }, () => random.normal()),
    positive: Array.from({ length: 4 }, () => Math.max(0, random.normal())),
  };
}

/** Kuhn-Tucker: no slope for a free unknown, none inwards for one at a limit. */
function expectOptimal(
  matrix: readonly (readonly number[])[],
  found: ReturnType<typeof solveBoundedLeastSquares>,
  lower: number,
  upper: number,
): void {
  found.x.forEach((value, j) => {
    expect(value).toBeGreaterThanOrEqual(lower);
    expect(value).toBeLessThanOrEqual(upper);
    const slope = found.residuals.reduce((sum, r, i) => sum + r * matrix[i]![j]!, 0);
    if (found.atLimit[j] === 'lower') expect(slope).toBeLessThan(1e-9);
    else if (found.atLimit[j] === 'upper') expect(slope).toBeGreaterThan(-1e-9);
    else expect(Math.abs(slope)).toBeLessThan(1e-9);
  });
}

// By hand: x₁ would be −1 without the limit; at 0 the second column alone gives 1.5.
test('a cut answer is not the best one', () => {
  const matrix = [
    [1, 1],
    [0, 1],
  ];
  expect(solveLeastSquares(matrix, [1, 2]).coefficients[0]).toBeCloseTo(-1, 12);
  const { x, atLimit, residualSumOfSquares } = solveNonNegativeLeastSquares(matrix, [1, 2]);
  expect(x).toEqual([0, expect.closeTo(1.5, 12)]);
  expect(atLimit).toEqual(['lower', null]);
  // Cut at 0 the other would have stayed 2, with a sum of 1.
  expect(residualSumOfSquares).toBeCloseTo(0.5, 12);
});

describe('laws', () => {
  test('no other point within the limits is better', () => {
    assert(
      property(seed, (from) => {
        const { matrix, b } = systemOf(from);
        expectOptimal(matrix, solveNonNegativeLeastSquares(matrix, b), 0, Infinity);
        expectOptimal(matrix, solveBoundedLeastSquares(matrix, b, -0.2, 0.3), -0.2, 0.3);
      }),
      { numRuns: 500 },
    );
  });

  test('wide limits give plain least squares', () => {
    assert(
      property(seed, (from) => {
        const { matrix, b } = systemOf(from);
        const { x, atLimit } = solveBoundedLeastSquares(matrix, b, -1e6, 1e6);
        expect(atLimit).toEqual([null, null, null, null]);
        solveLeastSquares(matrix, b).coefficients.forEach((value, j) => expect(x[j]).toBeCloseTo(value, 8));
      }),
    );
  });

  test('what can be met within the limits is met, also with more unknowns than equations', () => {
    assert(
      property(seed, (from) => {
        const { matrix, positive } = systemOf(from);
        for (const rows of [matrix, matrix.slice(0, 3), matrix.slice(0, 1)]) {
          const b = rows.map((row) => row.reduce((sum, value, j) => sum + value * positive[j]!, 0));
          expect(solveNonNegativeLeastSquares(rows, b).residualSumOfSquares).toBeLessThan(1e-24);
        }
      }),
      { numRuns: 500 },
    );
  });

  test('one unknown fixed by equal limits stays there', () => {
    const { x } = solveBoundedLeastSquares(
      [
        [1, 0.5],
        [0, 1],
      ],
      [1, 1],
      [0, 0.25],
      [5, 0.25],
    );
    expect(x[1]).toBe(0.25);
    expect(x[0]).toBeCloseTo(0.875, 12);
  });

  test('two columns alike share in silence: the sum is what counts', () => {
    const { x, residualSumOfSquares } = solveNonNegativeLeastSquares(
      [
        [1, 1],
        [2, 2],
      ],
      [3, 6],
    );
    expect(x[0]! + x[1]!).toBeCloseTo(3, 12);
    expect(residualSumOfSquares).toBeLessThan(1e-20);
  });
});

describe('refusals', () => {
  const matrix = [[1], [2]];
  test.each<[string, string, () => unknown]>([
    ['length-differs', 'b', () => solveNonNegativeLeastSquares(matrix, [1])],
    ['length-differs', 'matrix[1]', () => solveNonNegativeLeastSquares([[1], []], [1, 2])],
    ['length-differs', 'lower', () => solveBoundedLeastSquares(matrix, [1, 2], [0, 0], 1)],
    ['not-finite', 'b[0]', () => solveNonNegativeLeastSquares(matrix, [NaN, 1])],
    ['not-finite', 'matrix[0][0]', () => solveNonNegativeLeastSquares([[NaN], [1]], [1, 2])],
    ['not-finite', 'lower[0]', () => solveBoundedLeastSquares(matrix, [1, 2], -Infinity, 1)],
    ['limits-crossed', 'upper[0]', () => solveBoundedLeastSquares(matrix, [1, 2], 1, 0)],
    ['limits-crossed', 'upper[0]', () => solveBoundedLeastSquares(matrix, [1, 2], 0, NaN)],
  ])('%s at %s', (code, where, act) => expectRefusal(act, code, where));
});
