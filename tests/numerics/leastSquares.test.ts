import { array, assert, double, integer, property } from 'fast-check';
import { describe, expect, test } from 'vitest';
import { conditionOfColumns } from '../../src/numerics/condition.ts';
import { solveLeastSquares } from '../../src/numerics/leastSquares.ts';
import { seededRandom } from '../../src/numerics/random.ts';
import { expectRefusal } from '../support/refusal.ts';

const number = double({ min: -10, max: 10, noNaN: true });
const rows = array(array(number, { minLength: 3, maxLength: 3 }), { minLength: 6, maxLength: 12 });

/** Points with scatter about a plane; wide enough that no column is nearly made up of others. */
function plane(seed: number, count = 12): { design: number[][]; response: number[] } {
  const random = seededRandom(seed);
  const design = Array.from({ length: count }, (_, i) => [1, i / count + 0.3 * random.normal(), random.normal()]);
  return { design, response: design.map(([, a, b]) => 2 + a! - 3 * b! + 0.1 * random.normal()) };
}

describe('laws', () => {
  test('residuals stand at right angles to every column', () => {
    assert(
      property(integer({ min: 1, max: 1e6 }), (seed) => {
        const { design, response } = plane(seed);
        const { residuals } = solveLeastSquares(design, response);
        for (let j = 0; j < 3; j++)
          expect(Math.abs(residuals.reduce((sum, r, i) => sum + r * design[i]![j]!, 0))).toBeLessThan(1e-12);
      }),
    );
  });

  test('a whole-number weight is the same as so many equal points, but for the degrees of freedom', () => {
    assert(
      property(
        integer({ min: 1, max: 1e6 }),
        array(integer({ min: 1, max: 4 }), { minLength: 12, maxLength: 12 }),
        (seed, weights) => {
          const { design, response } = plane(seed);
          const weighted = solveLeastSquares(design, response, { weights });
          const repeated = solveLeastSquares(
            design.flatMap((row, i) => Array.from({ length: weights[i]! }, () => row)),
            response.flatMap((y, i) => Array.from({ length: weights[i]! }, () => y)),
          );
          weighted.coefficients.forEach((c, j) => {
            expect(c).toBeCloseTo(repeated.coefficients[j]!, 10);
            expect(weighted.unscaledCovariance[j]![j]! / repeated.unscaledCovariance[j]![j]!).toBeCloseTo(1, 9);
          });
          expect(weighted.residualSumOfSquares).toBeCloseTo(repeated.residualSumOfSquares, 10);
        },
      ),
      { numRuns: 50 },
    );
  });

  test('units of a column change its coefficient and nothing else', () => {
    assert(
      property(integer({ min: 1, max: 1e6 }), double({ min: 1e-9, max: 1e9, noNaN: true }), (seed, unit) => {
        const { design, response } = plane(seed);
        const plain = solveLeastSquares(design, response);
        const scaled = solveLeastSquares(
          design.map(([a, b, c]) => [a!, b! * unit, c!]),
          response,
        );
        expect((scaled.coefficients[1]! * unit) / plain.coefficients[1]!).toBeCloseTo(1, 9);
        expect((scaled.standardDeviations[1]! * unit) / plain.standardDeviations[1]!).toBeCloseTo(1, 9);
        expect(scaled.condition / plain.condition).toBeCloseTo(1, 8);
        expect(scaled.coefficients[2]).toBeCloseTo(plain.coefficients[2]!, 9);
      }),
      { numRuns: 50 },
    );
  });

  test('the order of the points is irrelevant', () => {
    const { design, response } = plane(5);
    const forwards = solveLeastSquares(design, response);
    const backwards = solveLeastSquares([...design].reverse(), [...response].reverse());
    forwards.coefficients.forEach((c, j) => expect(backwards.coefficients[j]).toBeCloseTo(c, 12));
  });

  test('a column that the others make up is refused, never answered', () => {
    assert(
      property(rows, number, number, (base, a, b) => {
        const dependent = base.map(([x, y]) => [x!, y!, a * x! + b * y!]);
        expectRefusal(
          () =>
            solveLeastSquares(
              dependent,
              dependent.map((_, i) => i),
            ),
          'columns-dependent',
        );
      }),
    );
  });
});

test('the weak direction names the columns that can hardly be told apart', () => {
  const design = Array.from({ length: 20 }, (_, i) => [1, Math.sin(i), Math.sin(i) + 1e-4 * Math.cos(3 * i)]);
  const { weakDirection, condition } = solveLeastSquares(
    design,
    design.map(([, a]) => a!),
  );
  expect(condition).toBeGreaterThan(1e3);
  expect(Math.abs(weakDirection![0]!)).toBeLessThan(0.01);
  expect(Math.abs(weakDirection![1]! + weakDirection![2]!)).toBeLessThan(0.01);
  expect(
    solveLeastSquares(
      [
        [1, 0],
        [0, 1],
        [1, 1],
      ],
      [1, 2, 3],
    ).weakDirection,
  ).toBeNull();
});

test('condition of columns: known angle, dependent, empty', () => {
  // Two unit columns at angle θ: s² = 1 ± cos θ.
  const angle = 0.01;
  const ratio = Math.sqrt((1 + Math.cos(angle)) / (1 - Math.cos(angle)));
  const pair = [Float64Array.of(1, 0), Float64Array.of(Math.cos(angle), Math.sin(angle))];
  expect(conditionOfColumns(pair).ratio / ratio).toBeCloseTo(1, 9);
  // Lengths are taken out.
  expect(conditionOfColumns([pair[0]!.map((x) => 1e6 * x), pair[1]!]).ratio / ratio).toBeCloseTo(1, 9);
  // 1e-9 apart: the Gram matrix would have lost it.
  const close = [Float64Array.of(1, 0), Float64Array.of(1, 1e-9)];
  expect(conditionOfColumns(close).ratio / 2e9).toBeCloseTo(1, 5);
  expect(conditionOfColumns([Float64Array.of(1, 2), Float64Array.of(2, 4)]).ratio).toBe(Infinity);
  expect(conditionOfColumns([Float64Array.of(1, 2), Float64Array.of(0, 0)]).ratio).toBe(Infinity);
});

describe('refusals', () => {
  const design = [
    [1, 0],
    [1, 1],
    [1, 2],
  ];
  test.each<[string, string, () => unknown]>([
    ['points-missing', 'design', () => solveLeastSquares([[1, 2]], [1])],
    ['points-missing', 'design', () => solveLeastSquares([], [])],
    ['length-differs', 'response', () => solveLeastSquares(design, [1, 2])],
    ['length-differs', 'design[1]', () => solveLeastSquares([[1, 0], [1], [1, 2]], [1, 2, 3])],
    ['length-differs', 'weights', () => solveLeastSquares(design, [1, 2, 3], { weights: [1, 2] })],
    ['not-finite', 'response[1]', () => solveLeastSquares(design, [1, NaN, 3])],
    [
      'not-finite',
      'design[0][1]',
      () =>
        solveLeastSquares(
          [
            [1, Infinity],
            [1, 1],
            [1, 2],
          ],
          [1, 2, 3],
        ),
    ],
    ['not-positive', 'weights[2]', () => solveLeastSquares(design, [1, 2, 3], { weights: [1, 1, 0] })],
    ['not-positive', 'weights[0]', () => solveLeastSquares(design, [1, 2, 3], { weights: [-1, 1, 1] })],
    [
      'columns-dependent',
      'fit',
      () =>
        solveLeastSquares(
          design.map(([a]) => [a!, 0]),
          [1, 2, 3],
        ),
    ],
  ])('%s at %s', (code, where, act) => expectRefusal(act, code, where));
});
