import { expect, test } from 'vitest';
import {
  runLengthOfCumulativeSums,
  runLengthOfMovingAverage,
  runLengthOfRunRules,
} from '../../src/bench/chart/runLength.ts';
import { ACTION_RULE, RUN_RULES } from '../../src/bench/chart/runRules.ts';

const SHIFTS = [0, 0.25, 0.5, 0.75, 1, 1.5, 2, 2.5, 3];

// Half a unit of the last printed digit would be too strict: published run lengths partly come from Markov chain approximations
// and carry two or three digits, so 3 % is asked of those, 0.01 % of the figures recomputed by integral equations elsewhere.
const closeTo = (value: number, expected: number, relative: number) =>
  expect(Math.abs(value / expected - 1), `${value} against ${expected}`).toBeLessThan(relative);

// 1/P(|z| > 3) and its neighbours; C. W. Champ, W. H. Woodall, Technometrics 1987, 29, 393, table 1 gives 370.40 and 43.89.
test('the action limit alone: one point beyond three standard deviations', () => {
  const expected = [370.39835, 281.15252, 155.2242, 81.215702, 43.894682, 14.967685, 6.302963, 3.2410965, 2.0];
  SHIFTS.forEach((shift, i) => closeTo(runLengthOfRunRules([ACTION_RULE], shift), expected[i]!, 1e-6));
});

// NIST/SEMATECH e-Handbook 6.3.2, after Champ and Woodall 1987: the four rules signal falsely once in 91.75 points (from memory).
test('the four run rules together: 91.75 points between false alarms', () => {
  expect(runLengthOfRunRules(RUN_RULES, 0)).toBeCloseTo(91.75, 2);
});

// Lucas and Saccucci, Technometrics 1990, 32, 1: published to two or three digits (from memory); recomputed by Gauss-Legendre
// quadrature of Crowder's integral equation with 240 nodes.
test.each([
  [
    0.4,
    3.054,
    [499.951, 223.728, 71.2005, 28.4184, 14.2628, 5.87494, 3.52154, 2.53915, 2.01863],
    [500, 224, 71.2, 28.4, 14.3, 5.9, 3.5, 2.5, 2.0],
  ],
  [
    0.25,
    2.998,
    [499.836, 170.296, 48.2939, 20.1147, 11.1355, 5.46374, 3.61371, 2.74475, 2.25756],
    [500, 170, 48.2, 20.1, 11.1, 5.5, 3.6, 2.7, 2.3],
  ],
  [
    0.2,
    2.962,
    [499.735, 150.216, 41.7644, 18.1496, 10.5417, 5.50065, 3.74344, 2.88027, 2.3809],
    [500, 150, 41.8, 18.2, 10.5, 5.5, 3.7, 2.9, 2.4],
  ],
  [
    0.1,
    2.814,
    [499.58, 106.322, 31.2974, 15.8475, 10.3307, 6.08418, 4.36225, 3.4417, 2.868],
    [500, 106, 31.3, 15.9, 10.3, 6.1, 4.4, 3.4, 2.9],
  ],
  [
    0.05,
    2.615,
    [499.933, 84.0059, 28.7637, 16.3742, 11.3828, 7.11249, 5.22488, 4.16786, 3.49617],
    [500, 84.1, 28.8, 16.4, 11.4, 7.1, 5.2, 4.2, 3.5],
  ],
])('moving average, weight %s, limit %s', (weight, limit, recomputed, published) => {
  SHIFTS.forEach((shift, i) => {
    const length = runLengthOfMovingAverage({ weight, limit }, shift);
    closeTo(length, recomputed[i]!, 1e-4);
    closeTo(length, published[i]!, 0.03);
  });
});

// Weight 1 remembers nothing: the moving average is the Shewhart chart.
test('a moving average of weight 1 has the run length of its limit alone', () => {
  closeTo(runLengthOfMovingAverage({ weight: 1, limit: 3 }, 1), 43.894682, 1e-6);
});

// D. M. Hawkins, J. Qual. Technol. 1993, 25, 248; D. C. Montgomery, Introduction to Statistical Quality Control (from memory);
// recomputed by integral equations with 300 nodes.
test.each([
  [
    4,
    [167.684, 74.224, 26.6302, 13.2851, 8.38313, 4.74717, 3.34277, 2.61952, 2.19448],
    [168, 74.2, 26.6, 13.3, 8.38, 4.75, 3.34, 2.62, 2.19],
  ],
  [
    5,
    [465.444, 139.494, 37.9961, 17.0483, 10.376, 5.74722, 4.00887, 3.11369, 2.57325],
    [465, 139, 38.0, 17.0, 10.4, 5.75, 4.01, 3.11, 2.57],
  ],
])('cumulative sums, slack 0.5, limit %s', (limit, recomputed, published) => {
  SHIFTS.forEach((shift, i) => {
    const length = runLengthOfCumulativeSums({ slack: 0.5, limit }, shift);
    closeTo(length, recomputed[i]!, 1e-4);
    closeTo(length, published[i]!, 0.03);
  });
});
