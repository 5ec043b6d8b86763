import { array, assert, double, property } from 'fast-check';
import { describe, expect, test } from 'vitest';
import { compareIntervals, monteCarlo, numericalTolerance } from '../../src/numerics/monteCarlo.ts';
import { independent, propagate, propagateTogether, welchSatterthwaite } from '../../src/numerics/propagate.ts';
import { seededRandom } from '../../src/numerics/random.ts';
import { expectRelative } from '../references/published.ts';
import { expectRefusal } from '../support/refusal.ts';

// JCGM 100:2008 (GUM), H.1.6 (from memory; arithmetic confirms it): end gauge, contributions 25, 9.7, 2.9, 16.6 nm with 18, 25.6, 50 and
// 2 degrees of freedom, u = 32 nm, ν_eff = 16.7, taken as 16.
test('Welch-Satterthwaite: GUM H.1', () => {
  const found = welchSatterthwaite([25, 9.7, 2.9, 16.6], [18, 25.6, 50, 2]);
  expect(Math.floor(found)).toBe(16);
});

test('Welch-Satterthwaite: limits', () => {
  expect(welchSatterthwaite([3], [7])).toBeCloseTo(7, 12);
  expect(welchSatterthwaite([1, 1], [5, 5])).toBeCloseTo(10, 12);
  expect(welchSatterthwaite([1, 1], [5, Infinity])).toBeCloseTo(20, 12);
  expect(welchSatterthwaite([1, 2], [Infinity, Infinity])).toBe(Infinity);
  expect(welchSatterthwaite([0, 0], [3, 3])).toBe(Infinity);
});

describe('laws', () => {
  const value = double({ min: 0.5, max: 20, noNaN: true });
  const relative = double({ min: 1e-6, max: 0.2, noNaN: true });

  // Differences over a thousandth of u, at most 20 %, cut (2e-4)² = 4e-8 off the slope of 1/z.
  test('relative uncertainties of a product add in squares', () => {
    assert(
      property(value, value, value, relative, relative, relative, (a, b, c, u, v, w) => {
        const found = propagate(([x, y, z]) => (x! * y!) / z!, [a, b, c], independent([a * u, b * v, c * w]));
        expectRelative(found.uncertainty / found.value, Math.hypot(u, v, w), 5e-8);
      }),
    );
  });

  test('a common error cancels in a difference and doubles in a sum', () => {
    const together = [
      [0.04, 0.04],
      [0.04, 0.04],
    ];
    expect(propagate(([a, b]) => a! - b!, [3, 2], together).uncertainty).toBeLessThan(1e-9);
    expect(propagate(([a, b]) => a! + b!, [3, 2], together).uncertainty).toBeCloseTo(0.4, 9);
  });

  test('linear functions: J U Jᵀ to what rounding of the means leaves', () => {
    assert(
      property(array(double({ min: -1e6, max: 1e6, noNaN: true }), { minLength: 2, maxLength: 2 }), (means) => {
        const covariance = [
          [0.04, 0.01],
          [0.01, 0.09],
        ];
        const found = propagateTogether(([a, b]) => [a! + b!, a! - 2 * b!], means, covariance);
        expectRelative(found.covariance[0]![0]!, 0.15, 1e-5);
        expectRelative(found.covariance[1]![1]!, 0.04 - 0.04 + 0.36, 1e-5);
        expectRelative(found.covariance[0]![1]!, 0.04 - 0.01 - 0.18, 1e-5);
      }),
    );
  });

  test('an input at zero still has its derivative', () => {
    expectRelative(propagate(([x]) => Math.sin(x!), [0], [[1e-6]]).sensitivities[0]!, 1, 1e-9);
  });

  test('an input known exactly is not moved: the function need not be defined beside it', () => {
    const f = ([x, y]: readonly number[]) => (x === 2 ? y! * x : NaN);
    expect(propagate(f, [2, 3], independent([0, 0.1])).uncertainty).toBeCloseTo(0.2, 9);
  });

  test('drawn and linear agree for a straight function, for any numbers', () => {
    const random = seededRandom(3);
    const { standardDeviation, mean } = monteCarlo(
      ([a, b]: readonly number[]) => 2 * a! - b!,
      (r) => [5 + 0.1 * r.normal(), 1 + 0.2 * r.normal()],
      200_000,
      random,
    );
    expectRelative(standardDeviation, Math.hypot(0.2, 0.2), 0.01);
    expect(Math.abs(mean - 9)).toBeLessThan(0.003);
  });
});

describe('intervals of draws', () => {
  /** Draws the numbers 1 … trials, each once. */
  const counting = (trials: number) => {
    let next = 0;
    return monteCarlo(
      (x: number) => x,
      () => ++next,
      trials,
      seededRandom(1),
    );
  };

  // JCGM 101, 7.7.2: q = ⌊0.95 M + ½⌋, r = ⌊(M − q + 1)/2⌋; the ends are the draws of rank r and r + q.
  test.each([
    [100, [3, 98]],
    [1000, [25, 975]],
    [101, [3, 99]],
  ])('of %s draws', (trials, interval) => expect(counting(trials).interval).toEqual(interval));

  // Exponential with its steep end below and above: 0 … ln 20; symmetric −ln 0.975 … −ln 0.025.
  test.each([[1], [-1]])('a lopsided density has its shortest interval at the steep end, sign %s', (sign) => {
    const { interval, shortestInterval } = monteCarlo(
      (u: number) => -sign * Math.log(1 - u),
      (random) => random.uniform(),
      200_000,
      seededRandom(2),
    );
    const [near, far] = sign > 0 ? shortestInterval : [...shortestInterval].reverse();
    expect(Math.abs(near!)).toBeLessThan(0.002);
    expect(Math.abs(far! - sign * Math.log(20))).toBeLessThan(0.05);
    const [low] = sign > 0 ? interval : [...interval].reverse();
    expect(low).toBeCloseTo(-sign * Math.log(0.975), 2);
  });

  test('draws that share their leading digits keep the rest', () => {
    let next = 0;
    const found = monteCarlo(
      (x: number) => x,
      () => 1e9 + (next++ % 2),
      1000,
      seededRandom(1),
    );
    expect(found.mean).toBe(1e9 + 0.5);
    expect(found.standardDeviation).toBeCloseTo(0.5002501876, 9);
  });

  test('the same seed, the same interval', () => {
    const once = () =>
      monteCarlo(
        (x: number) => x,
        (random) => random.normal(),
        1000,
        seededRandom(5),
      );
    expect(once()).toEqual(once());
  });
});

// JCGM 101:2008, 7.9.2, examples 1 and 2 (from memory): u = 0.35 g with two digits, δ = 0.005 g; u = 2 K with one digit, δ = 0.5 K.
test.each([
  [0.35, 2, 0.005],
  [2, 1, 0.5],
  [10.1, 2, 0.5],
  [9.97, 2, 0.5],
  [0.0996, 2, 0.005],
  [32e-9, 2, 0.5e-9],
])('tolerance of u = %s to %s digits', (u, count, tolerance) =>
  expectRelative(numericalTolerance(u, count), tolerance, 1e-12),
);

test('agreement is of both ends', () => {
  expect(compareIntervals([-1, 1], [-1.04, 1.04], 0.05).agrees).toBe(true);
  expect(compareIntervals([-1, 1], [-1.06, 1], 0.05).agrees).toBe(false);
  expect(compareIntervals([-1, 1], [-1, 0.9], 0.05)).toMatchObject({
    agrees: false,
    differences: [0, expect.closeTo(0.1, 12)],
  });
});

describe('refusals', () => {
  const one = [[0.01]];
  test.each<[string, string, () => unknown]>([
    ['not-finite', 'means[0]', () => propagate(([x]) => x!, [NaN], one)],
    ['length-differs', 'covariance', () => propagate(([x]) => x!, [1, 2], one)],
    ['length-differs', 'covariance[1]', () => propagate(([x]) => x!, [1, 2], [[1, 0], [0]])],
    ['variance-negative', 'covariance[0][0]', () => propagate(([x]) => x!, [1], [[-0.01]])],
    ['not-finite', 'covariance[0][0]', () => propagate(([x]) => x!, [1], [[NaN]])],
    ['not-finite', 'result[0]', () => propagate(([x]) => Math.log(x!), [-1], one)],
    ['not-finite', 'sensitivities[0][0]', () => propagate(([x]) => Math.sqrt(x! - 1), [1], one)],
    ['not-positive', 'uncertainties[0]', () => independent([-1])],
    ['length-differs', 'degreesOfFreedom', () => welchSatterthwaite([1, 2], [3])],
    ['degrees-of-freedom', 'degreesOfFreedom[1]', () => welchSatterthwaite([1, 2], [3, 0])],
    [
      'trials-few',
      'trials',
      () =>
        monteCarlo(
          (x: number) => x,
          () => 1,
          99,
          seededRandom(1),
        ),
    ],
    [
      'trials-few',
      'trials',
      () =>
        monteCarlo(
          (x: number) => x,
          () => 1,
          1000.5,
          seededRandom(1),
        ),
    ],
    [
      'not-finite',
      'draws[0]',
      () =>
        monteCarlo(
          (x: number) => x,
          () => NaN,
          100,
          seededRandom(1),
        ),
    ],
    ['not-positive', 'uncertainty', () => numericalTolerance(0, 2)],
    ['digits-range', 'digits', () => numericalTolerance(1, 0)],
  ])('%s at %s', (code, where, act) => expectRefusal(act, code, where));
});
