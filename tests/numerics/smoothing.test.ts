import { array, assert, double, integer, property } from 'fast-check';
import { describe, expect, test } from 'vitest';
import { linearCurve, monotoneCurve } from '../../src/numerics/interpolation.ts';
import { smoothEquidistant, smoothUnequal } from '../../src/numerics/smoothing.ts';
import { expectRefusal } from '../support/refusal.ts';

/** Weights of the middle of a window: what comes out there for a single one at each place. */
const weightsOf = (halfWidth: number, degree: number, derivative = 0): number[] =>
  Array.from({ length: 2 * halfWidth + 1 }, (_, place) => {
    const y = new Float64Array(2 * halfWidth + 1);
    y[place] = 1;
    return smoothEquidistant(y, 1, { halfWidth, degree, derivative }).values[halfWidth]!;
  });

// A. Savitzky, M. J. E. Golay, Anal. Chem. 1964, 36, 1627, tables I-X (integers over their norm; from memory, each confirmed by its sum).
describe('published weights', () => {
  test.each([
    ['smooth, quadratic, 5', weightsOf(2, 2), [-3, 12, 17, 12, -3], 35],
    ['smooth, quadratic, 7', weightsOf(3, 2), [-2, 3, 6, 7, 6, 3, -2], 21],
    ['smooth, cubic, 9', weightsOf(4, 3), [-21, 14, 39, 54, 59, 54, 39, 14, -21], 231],
    ['smooth, quartic, 7', weightsOf(3, 4), [5, -30, 75, 131, 75, -30, 5], 231],
    ['first derivative, quadratic, 5', weightsOf(2, 2, 1), [-2, -1, 0, 1, 2], 10],
    ['first derivative, cubic, 5', weightsOf(2, 3, 1), [1, -8, 0, 8, -1], 12],
    ['first derivative, cubic, 7', weightsOf(3, 3, 1), [22, -67, -58, 0, 58, 67, -22], 252],
    ['second derivative, quadratic, 5', weightsOf(2, 2, 2), [2, -1, -2, -1, 2], 7],
    ['second derivative, quadratic, 7', weightsOf(3, 2, 2), [5, 0, -3, -4, -3, 0, 5], 42],
  ])('%s', (_, found, integers, norm) =>
    integers.forEach((integer, i) => expect(found[i]).toBeCloseTo(integer / norm, 13)),
  );
});

describe('laws', () => {
  const coefficients = array(double({ min: -3, max: 3, noNaN: true }), { minLength: 4, maxLength: 4 });
  const cubicAt = (c: readonly number[], x: number): number => c[0]! + x * (c[1]! + x * (c[2]! + x * c[3]!));
  const curvatureAt = (c: readonly number[], x: number): number => 2 * c[2]! + 6 * x * c[3]!;
  const window = { halfWidth: 3, degree: 3 };

  test('a cubic comes out as it went in, to its ends, with its curvature, at any distances', () => {
    assert(
      property(
        coefficients,
        array(double({ min: 0.2, max: 2, noNaN: true }), { minLength: 12, maxLength: 12 }),
        (c, gaps) => {
          let place = -8;
          const x = gaps.map((gap) => (place += gap));
          const y = x.map((at) => cubicAt(c, at));
          const scale = Math.max(1, ...y.map(Math.abs));
          const smooth = smoothUnequal(x, y, window).values;
          const curved = smoothUnequal(x, y, { ...window, derivative: 2 }).values;
          x.forEach((at, i) => {
            expect(Math.abs(smooth[i]! - y[i]!)).toBeLessThan(1e-10 * scale);
            expect(Math.abs(curved[i]! - curvatureAt(c, at))).toBeLessThan(1e-7 * scale);
          });
        },
      ),
    );
  });

  test('equal distances give the same by either way; the unit of x divides the slope', () => {
    const y = Array.from({ length: 15 }, (_, i) => Math.sin(i / 2) + (i % 3) / 10);
    const x = y.map((_, i) => 400 + 5 * i);
    const slopes = { ...window, derivative: 1 };
    const [equal, unequal] = [smoothEquidistant(y, 5, slopes), smoothUnequal(x, y, slopes)];
    equal.values.forEach((value, i) => expect(unequal.values[i]).toBeCloseTo(value, 12));
    smoothEquidistant(y, 1, slopes).values.forEach((value, i) => expect(value / 5).toBeCloseTo(equal.values[i]!, 12));
  });

  test('noise gain: 17/35 in the middle of the five-point parabola, more at the ends', () => {
    const { noiseGain } = smoothEquidistant(new Float64Array(9), 1, { halfWidth: 2, degree: 2 });
    expect(noiseGain[4]! ** 2).toBeCloseTo(17 / 35, 12);
    expect(noiseGain[0]).toBeGreaterThan(noiseGain[4]!);
    expect(noiseGain[8]).toBeCloseTo(noiseGain[0]!, 12);
  });

  test('straight pieces meet the points and do not go beyond them', () => {
    const curve = linearCurve([0, 1, 3], [2, 4, 0]);
    expect([0, 0.5, 1, 2, 3].map(curve)).toEqual([2, 3, 4, 2, 0]);
    expect([curve(-0.001), curve(3.001), curve(NaN)]).toEqual([NaN, NaN, NaN]);
  });

  test('a monotone curve goes through its points and never beyond its neighbours', () => {
    assert(
      property(
        // Steps of 1e-9: differences near the smallest double have no slope.
        array(
          double({ min: -5, max: 5, noNaN: true }).map((value) => Math.round(value * 1e9) / 1e9),
          { minLength: 2, maxLength: 9 },
        ),
        integer({ min: 1, max: 1e6 }),
        (y, seed) => {
          const x = y.map((_, i) => i + ((seed * (i + 1)) % 97) / 150);
          const curve = monotoneCurve(x, y);
          y.forEach((value, i) => expect(curve(x[i]!)).toBeCloseTo(value, 12));
          for (let i = 1; i < y.length; i++) {
            const [low, high] = [Math.min(y[i - 1]!, y[i]!), Math.max(y[i - 1]!, y[i]!)];
            let before = y[i - 1]!;
            for (let k = 1; k <= 20; k++) {
              const value = curve(x[i - 1]! + (k / 20) * (x[i]! - x[i - 1]!) * (1 - 1e-12));
              expect(value).toBeGreaterThanOrEqual(low - 1e-12);
              expect(value).toBeLessThanOrEqual(high + 1e-12);
              expect((value - before) * (y[i]! - y[i - 1]!)).toBeGreaterThanOrEqual(-1e-12);
              before = value;
            }
          }
        },
      ),
    );
  });

  // Slope 4 chords at one end and 0 at the other: uncut it would pass 8 and come back.
  test('a steep piece before a level one', () => {
    const curve = monotoneCurve([0, 1, 2, 3], [0, 7, 8, 8]);
    for (let x = 1; x <= 2; x += 0.01) expect(curve(x)).toBeLessThanOrEqual(8 + 1e-12);
  });

  test('a smooth monotone function is followed to a fraction of its curvature', () => {
    const x = Array.from({ length: 21 }, (_, i) => i / 10);
    const curve = monotoneCurve(x, x.map(Math.exp));
    for (let at = 0.13; at < 1.9; at += 0.07) expect(Math.abs(curve(at) / Math.exp(at) - 1)).toBeLessThan(1e-3);
  });
});

// F. N. Fritsch, R. E. Carlson, SIAM J. Numer. Anal. 1980, 17, 238, table of a radiochemical calculation (data from memory): a spline overshoots
// beyond 1 and dips below 0; this may not.
test('the RPN 14 data stay monotone', () => {
  const x = [7.99, 8.09, 8.19, 8.7, 9.2, 10, 12, 15, 20];
  const y = [0, 2.76429e-5, 4.37498e-2, 0.169183, 0.469428, 0.94374, 0.998636, 0.999919, 0.999994];
  const curve = monotoneCurve(x, y);
  let before = 0;
  for (let at = 7.99; at < 20; at += 0.01) {
    const value = curve(at);
    expect(value).toBeGreaterThanOrEqual(before - 1e-15);
    expect(value).toBeLessThanOrEqual(0.999994);
    before = value;
  }
});

describe('refusals', () => {
  const y = [1, 2, 3, 4, 5];
  test.each<[string, string, () => unknown]>([
    ['smoothing-window', 'window', () => smoothEquidistant(y, 1, { halfWidth: 3, degree: 2 })],
    ['smoothing-window', 'window', () => smoothEquidistant(y, 1, { halfWidth: 1, degree: 3 })],
    ['smoothing-window', 'window', () => smoothEquidistant(y, 1, { halfWidth: 2, degree: 2, derivative: 3 })],
    ['smoothing-window', 'window', () => smoothEquidistant(y, 1, { halfWidth: 1.5, degree: 1 })],
    ['smoothing-window', 'window', () => smoothEquidistant(y, 1, { halfWidth: 1, degree: -1 })],
    ['not-positive', 'spacing[0]', () => smoothEquidistant(y, 0, { halfWidth: 1, degree: 1 })],
    ['not-finite', 'y[1]', () => smoothEquidistant([1, NaN, 2], 1, { halfWidth: 1, degree: 1 })],
    ['axis-turns', 'x[2]', () => smoothUnequal([1, 2, 2, 3, 4], y, { halfWidth: 1, degree: 1 })],
    ['length-differs', 'y', () => smoothUnequal([1, 2, 3], y, { halfWidth: 1, degree: 1 })],
    ['points-missing', 'x', () => linearCurve([1], [1])],
    ['axis-turns', 'x[1]', () => monotoneCurve([2, 1], [1, 2])],
    ['not-finite', 'y[0]', () => monotoneCurve([1, 2], [NaN, 2])],
    ['length-differs', 'y', () => linearCurve([1, 2], [1])],
  ])('%s at %s', (code, where, act) => expectRefusal(act, code, where));
});
