import { expect, test } from 'vitest';
import { cumulativeSums } from '../../src/bench/chart/cumulativeSum.ts';
import { movingAverage, movingAverageLimit } from '../../src/bench/chart/movingAverage.ts';
import { runRuleSignals } from '../../src/bench/chart/runRules.ts';

// NIST/SEMATECH e-Handbook of Statistical Methods, 6.3.2.4: λ = 0.3, target 50, s = 2.0539. The page prints two decimals, and
// limits 52.5884 and 47.4115 with a rounded factor; the rest of the digits are recomputed.
test('moving average: e-Handbook 6.3.2.4', () => {
  const data = [
    52.0, 47.0, 53.0, 49.3, 50.1, 47.0, 51.0, 50.1, 51.2, 50.5, 49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6,
    52.1,
  ];
  const published = [
    50.6, 49.52, 50.56, 50.18, 50.16, 49.21, 49.75, 49.85, 50.26, 50.33, 50.11, 49.36, 49.52, 50.05, 49.38, 49.92,
    50.73, 51.23, 51.94, 51.99,
  ];
  const average = movingAverage(
    Float64Array.from(data, (x) => (x - 50) / 2.0539),
    0.3,
  );
  published.forEach((value, i) => expect(50 + 2.0539 * average[i]!).toBeCloseTo(value, 2));
  const half = 2.0539 * movingAverageLimit({ weight: 0.3, limit: 3 });
  expect(50 + half).toBeCloseTo(52.58843174, 8);
  expect(50 + half).toBeCloseTo(52.5884, 3);
});

// NIST/SEMATECH e-Handbook of Statistical Methods, 6.3.2.3 (from memory, sums recomputed): target 325, k = 0.3175, h = 4.1959;
// the upper sum is past h from group 14 on.
test('cumulative sums: e-Handbook 6.3.2.3', () => {
  const data = [
    324.925, 324.675, 324.725, 324.35, 325.35, 325.225, 324.125, 324.525, 325.225, 324.6, 324.625, 325.15, 328.325,
    327.25, 327.825, 328.5, 326.675, 327.775, 326.875, 328.35,
  ];
  const upper = [
    0, 0, 0, 0, 0.0325, 0, 0, 0, 0, 0, 0, 0, 3.0075, 4.94, 7.4475, 10.63, 11.9875, 14.445, 16.0025, 19.035,
  ];
  const lower = [0, 0.0075, 0, 0.3325, 0, 0, 0.5575, 0.715, 0.1725, 0.255, 0.3125, 0, 0, 0, 0, 0, 0, 0, 0, 0];
  const sums = cumulativeSums(
    Float64Array.from(data, (x) => x - 325),
    0.3175,
  );
  upper.forEach((value, i) => expect(sums.up[i]).toBeCloseTo(value, 9));
  lower.forEach((value, i) => expect(sums.down[i]).toBeCloseTo(value, 9));
  expect(sums.up.findIndex((value) => value > 4.1959) + 1).toBe(14);
  // The sum left zero with group 13: there the shift began.
  expect(sums.upSince[13]! + 1).toBe(13);
});

test('a missing point leaves sums and averages where they were', () => {
  const deviations = Float64Array.of(1, NaN, 1);
  const { up } = cumulativeSums(deviations, 0.5);
  expect([...up]).toEqual([0.5, NaN, 1]);
  expect([...movingAverage(deviations, 0.5)]).toEqual([0.5, NaN, 0.75]);
});

test.each([
  ['past-action', [0, 3.1], [1]],
  ['two-of-three', [2.1, 0, 2.1, 0], [2]],
  ['two-of-three', [2.1, -2.1, 0], []],
  ['two-of-three', [2.1, 0, 0, 2.1], []],
  ['two-of-three', [2.1, NaN, NaN, 0, 2.1], [4]],
  ['four-of-five', [1.1, 1.1, -0.5, 1.1, 1.1], [4]],
  ['four-of-five', [1.1, 1.1, 1.1, 0, 0, 1.1], []],
  ['eight-one-side', [-0.1, -0.2, -0.1, -0.3, -0.1, -0.1, -0.4, -0.1, 0.1], [7]],
])('run rule %s on %j', (code, deviations, expected) => {
  const signals = runRuleSignals(Float64Array.from(deviations));
  expect([...signals.keys()].filter((i) => signals[i]!.includes(code))).toEqual(expected);
});
