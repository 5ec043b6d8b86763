import { assert, double, property } from 'fast-check';
import { describe, expect, test } from 'vitest';
import { findRoot, minimiseOnInterval } from '../../src/numerics/root.ts';
import { minimiseBySimplex } from '../../src/numerics/simplex.ts';
import { expectRefusal } from '../support/refusal.ts';

// Newton's own example (J. Wallis, A Treatise of Algebra, 1685): x³ − 2x − 5 = 0, x = 2.09455148.
test("Wallis's cubic", () => {
  let evaluations = 0;
  const root = findRoot((x) => (evaluations++, x ** 3 - 2 * x - 5), 2, 3);
  expect(root).toBeCloseTo(2.0945514815423265, 14);
  expect(evaluations).toBeLessThan(12);
});

test('Kepler: E − 0.8 sin E = 1', () => {
  const root = findRoot((e) => e - 0.8 * Math.sin(e) - 1, 0, Math.PI);
  expect(Math.abs(root - 0.8 * Math.sin(root) - 1)).toBeLessThan(1e-15);
});

test('a root is found wherever the sign changes, jumps and flat feet included', () => {
  assert(
    property(double({ min: -0.999, max: 0.999, noNaN: true }), (at) => {
      for (const f of [
        (x: number) => (x - at) ** 3,
        (x: number) => (x < at ? -1 : 1),
        (x: number) => Math.atan(1e6 * (x - at)),
      ])
        expect(Math.abs(findRoot(f, -1, 1) - at)).toBeLessThan(1e-4);
      expect(Math.abs(findRoot((x) => Math.expm1(5 * (x - at)), -1, 1) - at)).toBeLessThan(1e-15);
      expect(findRoot((x) => x - at, 1, -1)).toBeCloseTo(at, 14);
    }),
  );
});

test('an end that is the root is the root', () => {
  expect(findRoot((x) => x, 0, 5)).toBe(0);
  expect(findRoot((x) => x - 5, 0, 5)).toBe(5);
});

test('the tolerance is kept', () => {
  expect(Math.abs(findRoot((x) => x * x - 2, 0, 2, 0.01) - Math.SQRT2)).toBeLessThan(0.01);
});

test.each([
  ['no-sign-change', 1, 2],
  ['not-finite', 0, Infinity],
  ['not-finite', NaN, 1],
])('%s: from %s to %s', (code, low, high) => expectRefusal(() => findRoot((x) => x, low, high), code));
test('a function without value is refused', () =>
  expectRefusal(() => findRoot(() => NaN, 0, 1), 'no-sign-change', 'bracket'));

describe('minimum on an interval', () => {
  test('inside, for any place of a smooth valley', () => {
    assert(
      property(double({ min: -9, max: 9, noNaN: true }), (at) => {
        const { x, value } = minimiseOnInterval((z) => Math.cosh(z - at), -10, 10);
        expect(Math.abs(x - at)).toBeLessThan(1e-6);
        expect(value).toBeCloseTo(1, 12);
      }),
    );
  });

  test('at the end where the function falls towards it', () => {
    expect(minimiseOnInterval((x) => x, 2, 5).x).toBeCloseTo(2, 5);
    expect(minimiseOnInterval((x) => -x, 2, 5).x).toBeCloseTo(5, 5);
  });

  test('a corner', () => expect(minimiseOnInterval((x) => Math.abs(x - 0.3), -1, 1).x).toBeCloseTo(0.3, 6));
  test('an endless interval is refused', () =>
    expectRefusal(() => minimiseOnInterval((x) => x * x, 0, Infinity), 'not-finite', 'interval[1]'));
});

describe('simplex', () => {
  // H. H. Rosenbrock, Comput. J. 1960, 3, 175; start (−1.2, 1), minimum 0 at (1, 1).
  test("Rosenbrock's valley", () => {
    const { point, converged } = minimiseBySimplex(([x, y]) => 100 * (y! - x! * x!) ** 2 + (1 - x!) ** 2, [-1.2, 1]);
    expect(converged).toBe(true);
    point.forEach((value) => expect(value).toBeCloseTo(1, 4));
  });

  // M. J. D. Powell, Comput. J. 1962, 5, 147; start (3, −1, 0, 1), minimum 0 at the origin, where second derivatives vanish too.
  test("Powell's quartic", () => {
    const { value } = minimiseBySimplex(
      ([a, b, c, d]) => (a! + 10 * b!) ** 2 + 5 * (c! - d!) ** 2 + (b! - 2 * c!) ** 4 + 10 * (a! - d!) ** 4,
      [3, -1, 0, 1],
    );
    expect(value).toBeLessThan(1e-10);
  });

  // K. I. M. McKinnon, SIAM J. Optim. 1998, 9, 148, eq. 2.1 with τ = 2, θ = 6, φ = 60: from the simplex (0, 0), (1, 1), ((1 + √33)/8, (1 − √33)/8)
  // the plain method contracts for ever towards (0, 0), where the slope is not zero. The minimum is −1/4 at (0, −1/2).
  test("McKinnon's function, where the plain method stalls", () => {
    const [along, down] = [(1 + Math.sqrt(33)) / 8, (1 - Math.sqrt(33)) / 8];
    const f = ([u, v]: readonly number[]): number => {
      const [x, y] = [u! + along * v!, u! + down * v!];
      return (x <= 0 ? 360 : 6) * x * x + y + y * y;
    };
    const { value } = minimiseBySimplex(f, [0, 0], { edges: [1, 1] });
    expect(value).toBeCloseTo(-0.25, 6);
  });

  test('a corner, which has no derivative', () => {
    const { point } = minimiseBySimplex(([x, y]) => Math.abs(x! - 1) + 2 * Math.abs(y! + 2), [5, 5]);
    expect(point[0]).toBeCloseTo(1, 4);
    expect(point[1]).toBeCloseTo(-2, 4);
  });

  test('values that do not exist are walls, and spent evaluations are said', () => {
    const wall = minimiseBySimplex(([x]) => (x! < 0 ? NaN : (x! - 0.01) ** 2), [3]);
    expect(wall.point[0]).toBeCloseTo(0.01, 4);
    expect(minimiseBySimplex(([x]) => x! ** 2, [100], { evaluations: 5 }).converged).toBe(false);
  });

  test.each([
    ['points-missing', []],
    ['not-finite', [NaN]],
  ])('%s: start %j', (code, start) => expectRefusal(() => minimiseBySimplex(() => 0, start), code));
  test('an edge of 0 goes nowhere', () =>
    expectRefusal(() => minimiseBySimplex(() => 0, [1, 1], { edges: [1, 0] }), 'not-positive', 'edges[1]'));
  test('no value at the start', () =>
    expectRefusal(() => minimiseBySimplex(() => NaN, [1]), 'not-finite', 'value at the start[0]'));
});
