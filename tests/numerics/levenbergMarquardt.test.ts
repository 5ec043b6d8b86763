import { assert, double, integer, property } from 'fast-check';
import { describe, expect, test } from 'vitest';
import { solveLeastSquares } from '../../src/numerics/leastSquares.ts';
import { fitNonlinear } from '../../src/numerics/levenbergMarquardt.ts';
import { seededRandom } from '../../src/numerics/random.ts';
import { digits } from '../references/published.ts';
import { expectRefusal } from '../support/refusal.ts';

const decay = (x: number, [a, k]: readonly number[]): number => a! * Math.exp(-k! * x);
const times = Array.from({ length: 15 }, (_, i) => i / 3);

function decayData(seed: number, deviation: (x: number) => number): number[] {
  const random = seededRandom(seed);
  return times.map((x) => decay(x, [3, 0.7]) + deviation(x) * random.normal());
}

// NIST StRD, Misra1a.dat (D. Misra, dental research, 1978), retyped: runs without the files.
test('Misra1a: certified values, deviations and sum of squares, from both starts', () => {
  const y = [10.07, 14.73, 17.94, 23.93, 29.61, 35.18, 40.02, 44.82, 50.76, 55.05, 61.01, 66.4, 75.47, 81.78];
  const x = [77.6, 114.9, 141.1, 190.8, 239.9, 289, 332.8, 378.4, 434.8, 477.3, 536.8, 593.1, 689.1, 760];
  for (const start of [
    [500, 0.0001],
    [250, 0.0005],
  ]) {
    const fit = fitNonlinear({ model: (at, [a, b]) => a! * (1 - Math.exp(-b! * at)), data: { x, y }, start });
    expect(fit.converged).toBe(true);
    expect(digits(fit.estimates, [238.94212918, 0.00055015643181])).toBeGreaterThan(8);
    expect(digits(fit.standardDeviations, [2.7070075241, 7.2668688436e-6])).toBeGreaterThan(8);
    expect(digits([fit.residualSumOfSquares], [0.12455138894])).toBeGreaterThan(8);
  }
});

describe('weights', () => {
  const y = decayData(1, () => 0.05);
  const fitWith = (weights?: number[], data = { x: times, y }) =>
    fitNonlinear({ model: decay, data, start: [1, 0.2], ...(weights && { weights }) });

  // A library that put 1/w² into the normal matrix and w² into the gradient left the start untouched for weight 2 and stopped half way for 0.1.
  test.each([[2], [0.1], [1e-6], [1e8]])('one weight for all, %s, changes nothing but the sum of squares', (weight) => {
    const [plain, weighted] = [fitWith(), fitWith(times.map(() => weight))];
    expect(weighted.converged).toBe(true);
    expect(digits(weighted.estimates, plain.estimates)).toBeGreaterThan(8);
    expect(digits(weighted.standardDeviations, plain.standardDeviations)).toBeGreaterThan(7);
    expect(weighted.residualSumOfSquares / plain.residualSumOfSquares / weight).toBeCloseTo(1, 8);
  });

  test('weight 3 is the point three times', () => {
    const weights = times.map((_, i) => (i % 2 ? 3 : 1));
    const repeated = times.flatMap((x, i) => Array.from({ length: weights[i]! }, () => [x, y[i]!] as const));
    const weighted = fitWith(weights);
    const whole = fitWith(undefined, { x: repeated.map(([x]) => x), y: repeated.map(([, value]) => value) });
    expect(digits(weighted.estimates, whole.estimates)).toBeGreaterThan(8);
    weighted.unscaledCovariance.forEach((row, i) =>
      expect(digits(row, whole.unscaledCovariance[i]!)).toBeGreaterThan(7),
    );
  });
});

describe('laws', () => {
  test('a linear model gives what linear least squares gives', () => {
    assert(
      property(integer({ min: 1, max: 1e6 }), (seed) => {
        const random = seededRandom(seed);
        const x = Array.from({ length: 10 }, (_, i) => [1, i + random.normal(), random.normal()]);
        const y = x.map(([, a, b]) => 1 + 2 * a! - b! + random.normal());
        const weights = x.map(() => 0.1 + random.uniform());
        const linear = solveLeastSquares(x, y, { weights });
        const model = (row: readonly number[], b: readonly number[]) =>
          row.reduce((sum, value, j) => sum + value * b[j]!, 0);
        const fit = fitNonlinear({ model, data: { x, y }, weights, start: [0.1, 0.1, 0.1] });
        expect(fit.converged).toBe(true);
        fit.estimates.forEach((estimate, j) => expect(estimate).toBeCloseTo(linear.coefficients[j]!, 7));
        fit.covariance.forEach((row, i) => expect(digits(row, linear.covariance[i]!)).toBeGreaterThan(6));
        expect(fit.residualVariance).toBeCloseTo(linear.residualVariance, 9);
      }),
      { numRuns: 40 },
    );
  });

  test('scaling the parameters scales estimates and deviations', () => {
    const y = decayData(2, () => 0.02);
    const plain = fitNonlinear({ model: decay, data: { x: times, y }, start: [1, 0.2] });
    assert(
      property(double({ min: -12, max: 12, noNaN: true }), (exponent) => {
        const unit = 10 ** exponent;
        const model = (x: number, [a, k]: readonly number[]) => decay(x, [a! / unit, k!]);
        const scaled = fitNonlinear({ model, data: { x: times, y }, start: [unit, 0.2] });
        expect(scaled.converged).toBe(true);
        expect(digits(scaled.estimates, [plain.estimates[0]! * unit, plain.estimates[1]!])).toBeGreaterThan(7);
        expect(digits([scaled.standardDeviations[0]!], [plain.standardDeviations[0]! * unit])).toBeGreaterThan(6);
      }),
      { numRuns: 30 },
    );
  });

  test('a stated Jacobian and differences end at the same place; so do residuals and a model', () => {
    const y = decayData(3, () => 0.02);
    const byDifferences = fitNonlinear({ model: decay, data: { x: times, y }, start: [1, 0.2] });
    const jacobian = (x: number, [a, k]: readonly number[]) => [Math.exp(-k! * x), -a! * x * Math.exp(-k! * x)];
    const stated = fitNonlinear({ model: decay, jacobian, data: { x: times, y }, start: [1, 0.2] });
    const residuals = (b: readonly number[]) => times.map((x, i) => decay(x, b) - y[i]!);
    const asResiduals = fitNonlinear({
      residuals,
      jacobian: (b: readonly number[]) => times.map((x) => jacobian(x, b)),
      start: [1, 0.2],
    });
    for (const other of [stated, asResiduals]) {
      expect(other.converged).toBe(true);
      expect(digits(other.estimates, byDifferences.estimates)).toBeGreaterThan(8);
      expect(digits(other.standardDeviations, byDifferences.standardDeviations)).toBeGreaterThan(7);
    }
  });

  test('stated uncertainties cover: 95 of 100 within two deviations', () => {
    const within = Array.from({ length: 400 }, (_, seed) => {
      const y = decayData(seed + 100, () => 0.05);
      const { estimates, standardDeviations } = fitNonlinear({ model: decay, data: { x: times, y }, start: [2, 0.5] });
      // Student, 13 degrees of freedom.
      return Math.abs(estimates[1]! - 0.7) < 2.160368656 * standardDeviations[1]!;
    }).filter(Boolean).length;
    // Binomial, 400 × 0.95 = 380 ± 4.4; three deviations to either side.
    expect(within).toBeGreaterThan(366);
    expect(within).toBeLessThan(394);
  });
});

describe('no wrong answer is called converged', () => {
  const y = decayData(4, () => 0.02);

  test('two parameters that only their product shows', () => {
    const model = (x: number, [a, b, k]: readonly number[]) => a! * b! * Math.exp(-k! * x);
    const fit = fitNonlinear({ model, data: { x: times, y }, start: [1, 1, 0.2] });
    expect(fit).toMatchObject({ converged: false, reason: 'direction-undetermined' });
    expect(fit.standardDeviations.every(Number.isNaN)).toBe(true);
  });

  test('a parameter the model does not use', () => {
    const model = (x: number, [a, k]: readonly number[]) => decay(x, [a!, k!]);
    expect(fitNonlinear({ model, data: { x: times, y }, start: [1, 0.2, 5] })).toMatchObject({
      converged: false,
      reason: 'direction-undetermined',
    });
  });

  // r = (b, 3 − b²): gradient b − 2b(3 − b²) and J are fine at 0, yet the sum of squares has a maximum there.
  test('a start on a hill top', () => {
    const residuals = ([b]: readonly number[]) => [b!, 3 - b! * b!];
    expect(fitNonlinear({ residuals, start: [0] })).toMatchObject({ converged: false, reason: 'saddle' });
    const beside = fitNonlinear({ residuals, start: [0.1] });
    expect(beside.converged).toBe(true);
    expect(beside.estimates[0]).toBeCloseTo(Math.sqrt(2.5), 8);
  });

  test('rounds used up', () => {
    expect(fitNonlinear({ model: decay, data: { x: times, y }, start: [100, 8] }, { rounds: 2 })).toMatchObject({
      converged: false,
      reason: 'rounds-used-up',
      iterations: 2,
    });
  });

  test('a step out of the model is taken back, not believed', () => {
    const model = (x: number, [a]: readonly number[]) => Math.log(a! - x);
    const x = [0, 0.5, 1];
    const fit = fitNonlinear({ model, data: { x, y: x.map((at) => Math.log(1.05 - at)) }, start: [30] });
    expect(fit.converged).toBe(true);
    expect(fit.estimates[0]).toBeCloseTo(1.05, 10);
  });

  test('exact data: the estimate is right and its deviation is rounding', () => {
    const fit = fitNonlinear({
      model: decay,
      data: { x: times, y: times.map((x) => decay(x, [3, 0.7])) },
      start: [1, 0.2],
    });
    expect(fit.converged).toBe(true);
    expect(digits(fit.estimates, [3, 0.7])).toBeGreaterThan(12);
    expect(fit.standardDeviations[0]).toBeLessThan(1e-12);
  });

  test('as many parameters as points: the estimate stands, its scatter is unknown', () => {
    const fit = fitNonlinear({ model: decay, data: { x: [0, 1], y: [3, 1] }, start: [1, 0.2] });
    expect(fit.converged).toBe(true);
    expect(fit.estimates[1]).toBeCloseTo(Math.log(3), 8);
    expect(fit.degreesOfFreedom).toBe(0);
    expect(fit.standardDeviations).toEqual([NaN, NaN]);
  });
});

describe('refusals', () => {
  const data = { x: [0, 1, 2], y: [3, 2, 1] };
  test.each<[string, string, () => unknown]>([
    ['points-missing', 'start', () => fitNonlinear({ model: decay, data, start: [] })],
    ['points-missing', 'residuals', () => fitNonlinear({ model: decay, data: { x: [1], y: [1] }, start: [1, 1] })],
    ['not-finite', 'start[1]', () => fitNonlinear({ model: decay, data, start: [1, NaN] })],
    ['not-finite', 'data.y[0]', () => fitNonlinear({ model: decay, data: { ...data, y: [NaN, 1, 2] }, start: [1, 1] })],
    ['length-differs', 'data.y', () => fitNonlinear({ model: decay, data: { ...data, y: [1] }, start: [1, 1] })],
    ['length-differs', 'weights', () => fitNonlinear({ model: decay, data, weights: [1], start: [1, 1] })],
    ['not-positive', 'weights[1]', () => fitNonlinear({ model: decay, data, weights: [1, 0, 1], start: [1, 1] })],
    ['not-finite', 'residuals at the start[0]', () => fitNonlinear({ residuals: () => [NaN, 1], start: [1] })],
    [
      'length-differs',
      'jacobian',
      () => fitNonlinear({ residuals: ([b]) => [b!, 1], jacobian: () => [[1]], start: [1] }),
    ],
  ])('%s at %s', (code, where, act) => expectRefusal(act, code, where));
});
