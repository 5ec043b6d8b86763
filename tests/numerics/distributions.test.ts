import { assert, double, property } from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  chiSquareCdf,
  chiSquareQuantile,
  chiSquareSurvival,
  fCdf,
  fQuantile,
  fSurvival,
  normalCdf,
  normalQuantile,
  studentCdf,
  studentQuantile,
} from '../../src/numerics/distributions.ts';
import { expectRelative } from '../references/published.ts';
import { expectRefusal } from '../support/refusal.ts';

const probability = double({ min: 1e-12, max: 1 - 1e-12, noNaN: true });
const freedom = double({ min: -1, max: 6, noNaN: true }).map((exponent) => 10 ** exponent);

// M. Abramowitz, I. A. Stegun, Handbook of Mathematical Functions, table 26.1.
test('normal probabilities to 15 decimals', () => {
  expect(normalCdf(1)).toBeCloseTo(0.841344746068543, 15);
  expect(normalCdf(2)).toBeCloseTo(0.97724986805182, 14);
  expect(normalCdf(-3)).toBeCloseTo(0.00134989803163, 14);
});

// Tails by 40-digit arithmetic (mpmath): what 1 − cdf gives as 0.
describe('far tails keep their digits', () => {
  test.each([
    ['normal at −20', normalCdf(-20), 2.7536241186062337e-89, 1e-13],
    ['chi-square 800, ν = 3', chiSquareSurvival(800, 3), 4.327470814385205e-173, 1e-12],
    ['F 400, ν = 5, 80', fSurvival(400, 5, 80), 4.738394900042618e-55, 1e-12],
    ['Student −50, ν = 20', studentCdf(-50, 20), 8.766690224621145e-23, 1e-12],
  ])('%s', (_, found, exact, tolerance) => expectRelative(found, exact, tolerance));
});

test('closed forms: ν = 1, ν = 2, chi-square of 2', () => {
  for (const t of [-30, -1, -0.01, 0, 0.5, 7]) {
    expect(studentCdf(t, 1)).toBeCloseTo(0.5 + Math.atan(t) / Math.PI, 14);
    expect(studentCdf(t, 2)).toBeCloseTo(0.5 + t / (2 * Math.sqrt(2 + t * t)), 14);
  }
  for (const x of [0.001, 1, 30]) expectRelative(chiSquareSurvival(x, 2), Math.exp(-x / 2), 1e-13);
});

describe('laws', () => {
  test('a quantile has its probability below it', () => {
    assert(
      property(probability, freedom, freedom, (p, a, b) => {
        // Where the quantile falls below the smallest number or beyond the largest there is none.
        const x = chiSquareQuantile(p, a);
        if (x > 1e-290) expect(Math.abs(chiSquareCdf(x, a) - p)).toBeLessThan(1e-9 * p + 1e-10 * (1 - p));
        const f = fQuantile(p, a, b);
        if (f > 1e-290 && f < 1e290) expect(Math.abs(fCdf(f, a, b) - p)).toBeLessThan(1e-8);
        const t = studentQuantile(p, a);
        if (Math.abs(t) < 1e140) expect(Math.abs(studentCdf(t, a) - p)).toBeLessThan(1e-9);
        expect(Math.abs(normalCdf(normalQuantile(p)) - p)).toBeLessThan(1e-14);
      }),
      { numRuns: 200 },
    );
  });

  test('Student is symmetric, its square is F, many degrees are normal', () => {
    assert(
      property(double({ min: 0.51, max: 0.9999, noNaN: true }), freedom, (p, a) => {
        const t = studentQuantile(p, a);
        expectRelative(studentQuantile(1 - p, a), -t, 1e-9);
        if (t < 1e100) expectRelative(fQuantile(2 * p - 1, 1, a), t * t, 1e-7);
      }),
      { numRuns: 100 },
    );
    expectRelative(studentQuantile(0.975, 1e12), normalQuantile(0.975), 1e-11);
    expect(studentQuantile(0.975, Infinity)).toBe(normalQuantile(0.975));
    expectRelative(fQuantile(0.95, 3, Infinity), chiSquareQuantile(0.95, 3) / 3, 1e-14);
  });

  test('both tails add up to 1', () => {
    assert(
      property(double({ min: 1e-3, max: 1e4, noNaN: true }), freedom, freedom, (x, a, b) => {
        expect(chiSquareCdf(x, a) + chiSquareSurvival(x, a)).toBeCloseTo(1, 14);
        expect(fCdf(x, a, b) + fSurvival(x, a, b)).toBeCloseTo(1, 14);
      }),
    );
  });
});

test.each([[0], [1], [-0.1], [1.5]])('a quantile of probability %s is refused', (p) => {
  for (const quantile of [normalQuantile, (q: number) => studentQuantile(q, 3), (q: number) => fQuantile(q, 2, 3)])
    expectRefusal(() => quantile(p), 'probability-range', 'p');
});

test.each([[0], [-1], [-Infinity]])('%s degrees of freedom are refused', (degrees) => {
  expectRefusal(() => studentQuantile(0.9, degrees), 'degrees-of-freedom', 'degreesOfFreedom');
  expectRefusal(() => chiSquareSurvival(1, degrees), 'degrees-of-freedom', 'degreesOfFreedom');
  expectRefusal(() => fSurvival(1, degrees, 2), 'degrees-of-freedom', 'numerator');
  expectRefusal(() => fSurvival(1, 2, degrees), 'degrees-of-freedom', 'denominator');
});

test('a number that is not known stays unknown', () => {
  expect([
    normalCdf(NaN),
    normalQuantile(NaN),
    studentCdf(NaN, 3),
    studentQuantile(NaN, 3),
    studentQuantile(0.9, NaN),
    chiSquareQuantile(0.9, NaN),
    chiSquareSurvival(NaN, 3),
    fQuantile(0.9, NaN, 3),
    fSurvival(NaN, 2, 3),
  ]).toEqual(Array.from({ length: 9 }, () => NaN));
});
