import { assert, double, integer, property } from 'fast-check';
import { describe, expect, test } from 'vitest';
import { detectionLimits } from '../../src/numerics/detectionLimits.ts';
import { demingLine, fitLineWithErrorsInBoth } from '../../src/numerics/errorsInVariables.ts';
import { fiellerInterval } from '../../src/numerics/fieller.ts';
import {
  fitLine,
  fitLineOfKnownUncertainty,
  intersectLines,
  inversePrediction,
  lineAt,
  xIntercept,
} from '../../src/numerics/line.ts';
import { propagate, propagateTogether } from '../../src/numerics/propagate.ts';
import { seededRandom, type Random } from '../../src/numerics/random.ts';
import { minimiseOnInterval } from '../../src/numerics/root.ts';
import { theilSenLine } from '../../src/numerics/robustLine.ts';
import { expectPrinted, expectRelative } from '../references/published.ts';
import { expectRefusal } from '../support/refusal.ts';

const places = [0, 1, 2, 3, 4, 5, 6, 7];
const scattered = (random: Random, intercept: number, slope: number, deviation: number): number[] =>
  places.map((x) => intercept + slope * x + deviation * random.normal());

/** Share of 2000 draws for which `isCovered` holds; its standard error at 0.95 is 0.005. */
const coverage = (seed: number, isCovered: (random: Random) => boolean): number => {
  const random = seededRandom(seed);
  return Array.from({ length: 2000 }, () => isCovered(random)).filter(Boolean).length / 2000;
};

// QUAM, 3rd ed. 2012, A5, retyped: slope 0.241 (0.005), intercept 0.0087 (0.0029), s 0.005486; c₀ 0.26 (0.018) mg/L.
test('QUAM A5: a line and a concentration read from it', () => {
  const line = fitLine(
    [0.1, 0.1, 0.1, 0.3, 0.3, 0.3, 0.5, 0.5, 0.5, 0.7, 0.7, 0.7, 0.9, 0.9, 0.9],
    [0.028, 0.029, 0.029, 0.084, 0.083, 0.081, 0.135, 0.131, 0.133, 0.18, 0.181, 0.183, 0.215, 0.23, 0.216],
  );
  expectPrinted(line.slope, 0.241, 3);
  expectPrinted(line.intercept, 0.0087, 4);
  expectPrinted(Math.sqrt(line.interceptVariance), 0.0029, 4);
  expectPrinted(line.residualDeviation, 0.005486, 6);
  const found = inversePrediction(line, 0.0714, line.residualDeviation / Math.SQRT2);
  expectPrinted(found.value, 0.26, 2);
  expectPrinted(found.uncertainty, 0.018, 3);
  // Without the covariance of intercept and slope it would be 0.020.
  const apart = propagate(
    ([a, b, y]) => (y! - a!) / b!,
    [line.intercept, line.slope, 0.0714],
    [
      [line.interceptVariance, 0, 0],
      [0, line.slopeVariance, 0],
      [0, 0, line.residualDeviation ** 2 / 2],
    ],
  );
  expect(apart.uncertainty).toBeGreaterThan(0.0195);
});

// DIN 32645:1994, worked example, retyped: x_NG 0.0698, x_EG 0.14, x_BG 0.2121 (α = 1 %).
test('DIN 32645: limits of a calibration with ten standards', () => {
  const line = fitLine(
    [0.05, 0.1, 0.15, 0.2, 0.25, 0.3, 0.35, 0.4, 0.45, 0.5],
    [3060, 3522, 3707, 4280, 5058, 5510, 5703, 6205, 7156, 7178],
  );
  const limits = detectionLimits(line, { alpha: 0.01, beta: 0.01 });
  expectPrinted(limits.critical, 0.0698, 4);
  expectPrinted(limits.detection, 0.14, 2);
  expectPrinted(limits.quantificationFirstStep, 0.2121, 4);
});

describe('limits of detection', () => {
  const line = fitLine(places, [0.1, 1.9, 4.2, 5.8, 8.1, 10.2, 11.8, 14.1]);

  test('a falling line has the limits of the rising one', () => {
    const falling = fitLine(places, [-0.1, -1.9, -4.2, -5.8, -8.1, -10.2, -11.8, -14.1]);
    const [up, down] = [detectionLimits(line), detectionLimits(falling)];
    expect(down.critical).toBeCloseTo(up.critical, 12);
    expect(down.quantification).toBeCloseTo(up.quantification!, 12);
    expect(down.criticalResponse).toBeCloseTo(-up.criticalResponse, 12);
  });

  test('more readings lower them, a smaller risk raises them', () => {
    expect(detectionLimits(line, { readings: 4 }).critical).toBeLessThan(detectionLimits(line).critical);
    expect(detectionLimits(line, { alpha: 0.01 }).critical).toBeGreaterThan(detectionLimits(line).critical);
    expect(detectionLimits(line, { beta: 0.01 }).detection).toBeGreaterThan(detectionLimits(line).detection);
  });

  test('at the quantification limit the interval is a third of the value to either side', () => {
    const { quantification } = detectionLimits(line);
    const { uncertainty } = inversePrediction(
      line,
      line.intercept + line.slope * quantification!,
      line.residualDeviation,
    );
    // Student, 97.5 %, 6 degrees of freedom.
    expectRelative((2.446911851 * uncertainty) / quantification!, 1 / 3, 1e-9);
  });

  test('a blank passes the critical value in 5 of 100 cases', () => {
    const share = coverage(3, (random) => {
      const own = fitLine(places, scattered(random, 1, 0.5, 0.2));
      return 1 + 0.2 * random.normal() > detectionLimits(own).criticalResponse;
    });
    expect(Math.abs(share - 0.05)).toBeLessThan(0.015);
  });

  test('a slope lost in scatter has no quantification limit', () => {
    const lost = fitLine(places, [0, 3, -2, 4, 0, 3, -1, 4]);
    expect(detectionLimits(lost).quantification).toBeNull();
  });

  test.each<[string, string, () => unknown]>([
    ['probability-range', 'alpha', () => detectionLimits(line, { alpha: 0 })],
    ['probability-range', 'beta', () => detectionLimits(line, { beta: 1 })],
    ['not-positive', 'readings[0]', () => detectionLimits(line, { readings: 0 })],
    ['not-positive', 'relativeHalfInterval[0]', () => detectionLimits(line, { relativeHalfInterval: -1 })],
    ['slope-zero', 'line', () => detectionLimits({ ...line, slope: 0 })],
  ])('%s at %s', (code, where, act) => expectRefusal(act, code, where));
});

describe('Fieller', () => {
  test('ends are where (N − ρD)² = t² var(N − ρD)', () => {
    assert(
      property(
        double({ min: -5, max: 5, noNaN: true }),
        double({ min: 2, max: 9, noNaN: true }),
        double({ min: -0.9, max: 0.9, noNaN: true }),
        (numerator, denominator, correlation) => {
          const ratio = {
            numerator,
            denominator,
            numeratorVariance: 0.3,
            denominatorVariance: 0.2,
            covariance: correlation * Math.sqrt(0.06),
          };
          for (const rho of fiellerInterval(ratio, 1.96)!) {
            const variance = 0.3 - 2 * rho * ratio.covariance + rho * rho * 0.2;
            expect(Math.abs((numerator - rho * denominator) ** 2 - 1.96 ** 2 * variance)).toBeLessThan(1e-10);
          }
        },
      ),
    );
  });

  test('a denominator that may be zero leaves no bounded interval', () => {
    const ratio = { numerator: 1, denominator: 0.3, numeratorVariance: 0.01, denominatorVariance: 0.04, covariance: 0 };
    expect(fiellerInterval(ratio, 1.96)).toBeNull();
    expect(fiellerInterval({ ...ratio, denominatorVariance: 0.02 }, 1.96)).not.toBeNull();
  });
});

describe('intervals hold what they promise', () => {
  test('zero of a line', () => {
    const share = coverage(1, (random) => {
      const { interval } = xIntercept(fitLine(places, scattered(random, 3, -0.5, 0.4)));
      return interval === null || (interval[0] <= 6 && 6 <= interval[1]);
    });
    expect(Math.abs(share - 0.95)).toBeLessThan(0.015);
  });

  test('meeting point of two lines of unequal scatter', () => {
    // 1 + x and 13 − 2x meet at 4.
    const share = coverage(2, (random) => {
      const rising = fitLine(places, scattered(random, 1, 1, 0.3));
      const falling = fitLine(places, scattered(random, 13, -2, 0.8));
      const { interval } = intersectLines(rising, falling);
      return interval![0] <= 4 && 4 <= interval![1];
    });
    expect(Math.abs(share - 0.95)).toBeLessThan(0.015);
  });

  test('value of a line', () => {
    const share = coverage(4, (random) => {
      const { interval } = lineAt(fitLine(places, scattered(random, 1, 1, 0.3)), 9);
      return interval![0] <= 10 && 10 <= interval![1];
    });
    expect(Math.abs(share - 0.95)).toBeLessThan(0.015);
  });

  test('Theil and Sen, also with a wild point', () => {
    const share = coverage(5, (random) => {
      const y = scattered(random, 1, 1, 0.3);
      const { interval } = theilSenLine(places, y);
      return interval![0] <= 1 && 1 <= interval![1];
    });
    // Exact coverage for eight points.
    expect(Math.abs(share - theilSenLine(places, places).coverage)).toBeLessThan(0.015);
    const spoiled = places.map((x) => (x === 7 ? 40 : 1 + x));
    expect(theilSenLine(places, spoiled).slope).toBeCloseTo(1, 12);
    expect(fitLine(places, spoiled).slope).toBeGreaterThan(3);
  });
});

describe('laws', () => {
  const number = double({ min: -100, max: 100, noNaN: true });

  test('moving x moves the zero and the meeting point, and no uncertainty', () => {
    assert(
      property(integer({ min: 1, max: 1e6 }), double({ min: -1e6, max: 1e6, noNaN: true }), (seed, shift) => {
        const [one, other] = [seededRandom(seed), seededRandom(seed + 1)].map((random, i) =>
          scattered(random, 1, i ? -1 : 1, 0.1),
        );
        const moved = places.map((x) => x + shift);
        const [here, there] = [
          intersectLines(fitLine(places, one!), fitLine(places, other!)),
          intersectLines(fitLine(moved, one!), fitLine(moved, other!)),
        ];
        expect(Math.abs(there.value - here.value - shift)).toBeLessThan(1e-8);
        expect(Math.abs(there.uncertainty / here.uncertainty - 1)).toBeLessThan(1e-3);
      }),
      { numRuns: 50 },
    );
  });

  test('known uncertainties are not rescaled, relative weights are', () => {
    const y = scattered(seededRandom(8), 1, 1, 0.3);
    const [one, three] = [1, 3].map((u) =>
      fitLineOfKnownUncertainty(
        places,
        y,
        places.map(() => u),
      ),
    );
    expect(three!.slopeVariance / one!.slopeVariance).toBeCloseTo(9, 10);
    expect(three!.slope).toBeCloseTo(one!.slope, 12);
    const [light, heavy] = [1, 9].map((w) =>
      fitLine(
        places,
        y,
        places.map(() => w),
      ),
    );
    expect(heavy!.slopeVariance).toBeCloseTo(light!.slopeVariance, 12);
  });

  test('without errors in x, errors in both is known uncertainty in y', () => {
    assert(
      property(integer({ min: 1, max: 1e6 }), (seed) => {
        const random = seededRandom(seed);
        const y = scattered(random, 2, -1, 0.3);
        const uncertaintyY = places.map(() => 0.1 + random.uniform());
        const plain = fitLineOfKnownUncertainty(places, y, uncertaintyY);
        const both = fitLineWithErrorsInBoth({ x: places, y, uncertaintyX: places.map(() => 0), uncertaintyY });
        expect(both.line.slope).toBeCloseTo(plain.slope, 10);
        expect(both.line.covariance).toBeCloseTo(plain.covariance, 10);
        expect(both.bySensitivity.slopeVariance).toBeCloseTo(plain.slopeVariance, 10);
        expect(both.chiSquare).toBeCloseTo(plain.residualSumOfSquares, 9);
      }),
      { numRuns: 30 },
    );
  });

  test('exchanging x and y exchanges the line with its inverse', () => {
    const random = seededRandom(12);
    const x = places.map((value) => value + 0.1 * random.normal());
    const y = scattered(random, 2, 1.5, 0.2);
    const [ux, uy] = [places.map(() => 0.1), places.map((_, i) => 0.1 + i / 20)];
    const correlation = places.map((_, i) => (i % 3) / 4);
    const there = fitLineWithErrorsInBoth({ x, y, uncertaintyX: ux, uncertaintyY: uy, correlation });
    const back = fitLineWithErrorsInBoth({ x: y, y: x, uncertaintyX: uy, uncertaintyY: ux, correlation });
    expect(there.line.slope * back.line.slope).toBeCloseTo(1, 10);
    expect(back.chiSquare).toBeCloseTo(there.chiSquare, 9);
    expect(Math.sqrt(back.line.slopeVariance) * there.line.slope ** 2).toBeCloseTo(
      Math.sqrt(there.line.slopeVariance),
      9,
    );
  });

  test('correlated errors: least distance, and sensitivities as refitting shows them', () => {
    const random = seededRandom(31);
    const x = places.map((value) => value + 0.3 * random.normal());
    const y = scattered(random, 2, 1.5, 0.5);
    const correlation = places.map((_, i) => 0.8 * Math.sin(i));
    const points = {
      x,
      y,
      uncertaintyX: places.map((_, i) => 0.1 + i / 20),
      uncertaintyY: places.map(() => 0.5),
      correlation,
    };
    const { line, chiSquare, bySensitivity } = fitLineWithErrorsInBoth(points);
    const distance = (slope: number): number => {
      const weights = places.map((_, i) => {
        const [u, v] = [points.uncertaintyX[i]!, points.uncertaintyY[i]!];
        return 1 / (v * v + slope * slope * u * u - 2 * slope * correlation[i]! * u * v);
      });
      const intercept =
        weights.reduce((sum, w, i) => sum + w * (y[i]! - slope * x[i]!), 0) / weights.reduce((sum, w) => sum + w, 0);
      return weights.reduce((sum, w, i) => sum + w * (y[i]! - intercept - slope * x[i]!) ** 2, 0);
    };
    const least = minimiseOnInterval(distance, 0.5, 3);
    expect(Math.abs(line.slope - least.x)).toBeLessThan(1e-6);
    expect(chiSquare).toBeCloseTo(least.value, 10);
    const covariance = x.flatMap((_, i) =>
      [0, 1].map((k) =>
        x.flatMap((__, j) =>
          [0, 1].map((l) => {
            if (i !== j) return 0;
            const [u, v] = [points.uncertaintyX[i]!, points.uncertaintyY[i]!];
            return k === l ? (k === 0 ? u * u : v * v) : correlation[i]! * u * v;
          }),
        ),
      ),
    );
    const refitted = propagateTogether(
      (data) => {
        const again = fitLineWithErrorsInBoth({
          ...points,
          x: x.map((_, i) => data[2 * i]!),
          y: y.map((_, i) => data[2 * i + 1]!),
        });
        return [again.line.intercept, again.line.slope];
      },
      x.flatMap((value, i) => [value, y[i]!]),
      covariance,
    );
    expectRelative(bySensitivity.interceptVariance, refitted.covariance[0]![0]!, 1e-5);
    expectRelative(bySensitivity.slopeVariance, refitted.covariance[1]![1]!, 1e-5);
    expectRelative(bySensitivity.covariance, refitted.covariance[0]![1]!, 1e-5);
  });

  test('one ratio for all points: closed form and iteration agree', () => {
    assert(
      property(integer({ min: 1, max: 1e6 }), double({ min: 0.2, max: 5, noNaN: true }), (seed, ratio) => {
        const random = seededRandom(seed);
        const x = places.map((value) => value + 0.1 * random.normal());
        const y = scattered(random, 2, -1.5, 0.2);
        const uncertaintyX = places.map(() => 0.1);
        const uncertaintyY = places.map(() => 0.1 * Math.sqrt(ratio));
        const { slope, intercept } = demingLine(x, y, ratio);
        const { line } = fitLineWithErrorsInBoth({ x, y, uncertaintyX, uncertaintyY });
        expect(line.slope).toBeCloseTo(slope, 9);
        expect(line.intercept).toBeCloseTo(intercept, 8);
      }),
      { numRuns: 30 },
    );
  });

  test('a robust slope turns with the line', () => {
    assert(
      property(integer({ min: 1, max: 1e6 }), number, (seed, turn) => {
        const y = scattered(seededRandom(seed), 1, 1, 0.3);
        const [plain, turned] = [
          theilSenLine(places, y),
          theilSenLine(
            places,
            y.map((value, i) => value + turn * i),
          ),
        ];
        expect(turned.slope).toBeCloseTo(plain.slope + turn, 9);
        expect(turned.interval![1]).toBeCloseTo(plain.interval![1] + turn, 9);
      }),
    );
  });
});

// P. K. Sen, J. Am. Stat. Assoc. 1968, 63, 1379 (from memory): slope 4, interval 26/7 … 35/8. Orders of seven with three inversions or fewer:
// 1 + 6 + 20 + 49 = 76 of 5040, at either end.
test("Sen's example", () => {
  const found = theilSenLine([1, 2, 3, 4, 10, 12, 18], [9, 15, 19, 20, 45, 55, 78]);
  expect(found.slope).toBeCloseTo(4, 12);
  expect(found.interval![0]).toBeCloseTo(26 / 7, 12);
  expect(found.interval![1]).toBeCloseTo(35 / 8, 12);
  expect(found.coverage).toBeCloseTo(1 - (2 * 76) / 5040, 12);
});

test('four points are too few for any 95 % interval without a distribution; ties in x are left out', () => {
  expect(theilSenLine([1, 2, 3, 4], [1, 3, 2, 4])).toMatchObject({ interval: null, coverage: NaN });
  const tied = theilSenLine([1, 1, 2, 2, 3, 3, 4, 4], [1, 1.2, 2, 2.2, 3, 3.2, 4, 4.2]);
  expect(tied.slope).toBeCloseTo(1, 12);
  expect(tied.interval![0]).toBeLessThan(1);
});

describe('refusals', () => {
  const y = [1, 2, 3];
  const level = { ...fitLine([0, 1, 2], [1, 2, 2.9]), slope: 0 };
  const points = { x: [1, 2, 3], y, uncertaintyX: [0.1, 0.1, 0.1], uncertaintyY: [0.1, 0.1, 0.1] };
  test.each<[string, string, () => unknown]>([
    ['points-missing', 'x', () => fitLine([1, 2], [1, 2])],
    ['columns-dependent', 'fit', () => fitLine([2, 2, 2], y)],
    ['length-differs', 'y', () => fitLine([1, 2, 3], [1, 2])],
    ['length-differs', 'weights', () => fitLine([1, 2, 3], y, [1])],
    ['not-positive', 'weights[0]', () => fitLine([1, 2, 3], y, [0, 1, 1])],
    ['not-finite', 'x[0]', () => fitLine([NaN, 2, 3], y)],
    ['not-finite', 'y[2]', () => fitLine([1, 2, 3], [1, 2, Infinity])],
    ['points-missing', 'x', () => fitLineOfKnownUncertainty([1], [1], [1])],
    ['not-positive', 'uncertainties[1]', () => fitLineOfKnownUncertainty([1, 2], [1, 2], [1, 0])],
    ['slope-zero', 'line', () => inversePrediction(level, 1, 0.1)],
    ['slope-zero', 'line', () => xIntercept(level)],
    ['slope-zero', 'line', () => intersectLines(level, level)],
    ['not-finite', 'y[1]', () => inversePrediction(level, 1, NaN)],
    ['points-missing', 'x', () => fitLineWithErrorsInBoth({ ...points, x: [1, 2] })],
    ['length-differs', 'uncertaintyX', () => fitLineWithErrorsInBoth({ ...points, uncertaintyX: [1] })],
    [
      'not-positive',
      'point 2',
      () => fitLineWithErrorsInBoth({ ...points, uncertaintyX: [1, 0, 1], uncertaintyY: [1, 0, 1] }),
    ],
    ['not-positive', 'point 1', () => fitLineWithErrorsInBoth({ ...points, uncertaintyX: [-1, 1, 1] })],
    ['correlation-range', 'correlation[2]', () => fitLineWithErrorsInBoth({ ...points, correlation: [0, 0, 1] })],
    ['not-positive', 'varianceRatio[0]', () => demingLine([1, 2, 3], y, 0)],
    ['slope-undetermined', 'x, y', () => demingLine([1, 1, 1], y, 1)],
    ['slope-undetermined', 'x', () => theilSenLine([1, 1, 1], y)],
    ['points-missing', 'x', () => theilSenLine([1], [1])],
    ['probability-range', 'coverage', () => theilSenLine([1, 2, 3], y, 1)],
  ])('%s at %s', (code, where, act) => expectRefusal(act, code, where));
});
