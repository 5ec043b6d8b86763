import { array, assert, double, property } from 'fast-check';
import { describe, expect, test } from 'vitest';
import { oneWayAnova, varianceUncertainties } from '../../src/numerics/anova.ts';
import { derSimonianLaird, mandelPaule } from '../../src/numerics/betweenGroup.ts';
import { mean, standardDeviation } from '../../src/numerics/meanAndDeviation.ts';
import { nestedAnova } from '../../src/numerics/nestedAnova.ts';
import { seededRandom } from '../../src/numerics/random.ts';
import { digits, expectPrinted, HAS_REFERENCES, published, WITHOUT_REFERENCES } from '../references/published.ts';
import { expectRefusal } from '../support/refusal.ts';

// Thirteen trials of a vaccine (G. A. Colditz et al., JAMA 1994, 271, 698; counts from memory): ill and well, treated and not. Worked many times
// in print; the moment estimate of the variance between trials is 0.309 with mean log ratio −0.714 (0.179), Mandel and Paule's 0.318.
const TRIALS = [
  [4, 119, 11, 128],
  [6, 300, 29, 274],
  [3, 228, 11, 209],
  [62, 13536, 248, 12619],
  [33, 5036, 47, 5761],
  [180, 1361, 372, 1079],
  [8, 2537, 10, 619],
  [505, 87886, 499, 87892],
  [29, 7470, 45, 7232],
  [17, 1699, 65, 1600],
  [186, 50448, 141, 27197],
  [5, 2493, 3, 2338],
  [27, 16886, 29, 17825],
];
const logRatios = TRIALS.map(([a, b, c, d]) => Math.log(a! / (a! + b!) / (c! / (c! + d!))));
const deviations = TRIALS.map(([a, b, c, d]) => Math.sqrt(1 / a! - 1 / (a! + b!) + 1 / c! - 1 / (c! + d!)));

describe('thirteen trials', () => {
  test('moment estimate', () => {
    const { betweenVariance, mean: consensus, uncertainty } = derSimonianLaird(logRatios, deviations);
    expectPrinted(betweenVariance, 0.3088, 4);
    expectPrinted(consensus, -0.714, 3);
    expectPrinted(uncertainty, 0.179, 3);
  });

  test('Mandel and Paule', () => {
    const { betweenVariance, mean: consensus, uncertainty } = mandelPaule(logRatios, deviations);
    expectPrinted(betweenVariance, 0.318, 3);
    const weights = deviations.map((u) => 1 / (u * u + betweenVariance));
    expect(weights.reduce((sum, w, i) => sum + w * (logRatios[i]! - consensus) ** 2, 0)).toBeCloseTo(12, 10);
    expect(uncertainty).toBeCloseTo(1 / Math.sqrt(weights.reduce((sum, w) => sum + w, 0)), 12);
  });
});

describe('laws', () => {
  const groups = array(double({ min: -5, max: 5, noNaN: true }), { minLength: 3, maxLength: 8 });

  test('equal uncertainties: the extra variance is what the means scatter beyond them', () => {
    assert(
      property(groups, double({ min: 0.01, max: 3, noNaN: true }), (means, u) => {
        const expected = Math.max(0, standardDeviation(means) ** 2 - u * u);
        for (const estimate of [mandelPaule, derSimonianLaird]) {
          const found = estimate(
            means,
            means.map(() => u),
          );
          expect(Math.abs(found.betweenVariance - expected)).toBeLessThan(1e-9 * (1 + expected));
          expect(found.mean).toBeCloseTo(mean(means), 10);
        }
      }),
    );
  });

  test('shifting changes the mean alone, another unit changes the variance by its square', () => {
    assert(
      property(groups, double({ min: 1e-3, max: 1e3, noNaN: true }), (means, unit) => {
        const u = means.map((_, i) => 0.1 + i / 10);
        const plain = mandelPaule(means, u);
        const moved = mandelPaule(
          means.map((x) => unit * (x + 7)),
          u.map((each) => unit * each),
        );
        expect(Math.abs(moved.betweenVariance / unit ** 2 - plain.betweenVariance)).toBeLessThan(
          1e-7 * (1 + plain.betweenVariance),
        );
        expect(moved.mean / unit - 7).toBeCloseTo(plain.mean, 6);
      }),
    );
  });

  test('groups that agree get none', () => {
    expect(mandelPaule([1, 1.01, 0.99], [0.1, 0.2, 0.1]).betweenVariance).toBe(0);
    expect(mandelPaule([1, 1], [0.1, 0.2]).betweenVariance).toBe(0);
  });

  test('it finds the variance that was put in', () => {
    const random = seededRandom(9);
    const found = Array.from({ length: 400 }, () => {
      const u = Array.from({ length: 20 }, () => 0.1 + 0.4 * random.uniform());
      return mandelPaule(
        u.map((each) => 5 + 0.5 * random.normal() + each * random.normal()),
        u,
      ).betweenVariance;
    });
    // Expected 0.25; standard error of the mean of 400 about 0.006.
    expect(Math.abs(mean(found) - 0.25)).toBeLessThan(0.02);
  });
});

describe.skipIf(!HAS_REFERENCES)(`one-way analysis, NIST StRD ${WITHOUT_REFERENCES}`, () => {
  test.each([
    ['SiRstv', 11],
    ['SmLs01', 12],
    ['AtmWtAg', 7],
  ])('%s', (name, least) => {
    const { data, certified } = published(`strd/${name}`);
    const groups = new Map<number, number[]>();
    data.group.forEach((key: number, i: number) => groups.set(key, [...(groups.get(key) ?? []), data.y[i]]));
    const { between, within, fStatistic, rSquared } = oneWayAnova([...groups.values()]);
    expect([between.degreesOfFreedom, within.degreesOfFreedom]).toEqual([certified.between.df, certified.within.df]);
    expect(digits([fStatistic, rSquared], [certified.f_statistic, certified.r_squared])).toBeGreaterThan(least);
    expect(digits([Math.sqrt(within.meanSquare)], [certified.residual_standard_deviation])).toBeGreaterThan(least);
  });
});

// By hand: groups 1 2 3 and 4 5 9; means 2 and 6, sums of squares 24 and 16, F = 24/4 = 6 on 1 and 4, between-group variance (24 − 4)/3.
test('one-way analysis by hand', () => {
  const found = oneWayAnova([
    [1, 2, 3],
    [4, 5, 9],
  ]);
  expect(found.fStatistic).toBeCloseTo(6, 12);
  expect(found.rSquared).toBeCloseTo(0.6, 12);
  // Student, t = √6 on 4 degrees of freedom, two-sided: 0.0705.
  expectPrinted(found.probability, 0.0705, 4);
  expect(found.between.variance).toBeCloseTo(20 / 3, 12);
  // √(2·(24/3)²/(1 + 2) + 2·(4/3)²/(4 + 2)) and √(2·4²/6).
  expect(found.betweenVarianceUncertainty).toBeCloseTo(Math.sqrt((2 * 64) / 3 + (2 * 16) / 9 / 6), 12);
  expect(found.withinVarianceUncertainty).toBeCloseTo(Math.sqrt(32 / 6), 12);
});

test('the uncertainty stated is the scatter of the variances', () => {
  const random = seededRandom(21);
  const groups = Array.from({ length: 48 }, (_, i) => ['all', String(i >> 3), String(i >> 1)]);
  const runs = Array.from({ length: 1500 }, () => {
    const effects = groups.map(() => random.normal());
    const values = groups.map((_, i) => 2 * effects[i >> 3]! + effects[24 + (i >> 1)]! + 0.5 * random.normal());
    const levels = nestedAnova(groups, values);
    return levels.map((level, k) => [level.variance, varianceUncertainties(levels)[k]! ** 2] as const);
  });
  [0, 1, 2].forEach((k) => {
    const scatter = standardDeviation(runs.map((run) => run[k]![0]));
    const stated = Math.sqrt(mean(runs.map((run) => run[k]![1])));
    expect(Math.abs(stated / scatter - 1)).toBeLessThan(0.1);
  });
});

describe('refusals', () => {
  test.each<[string, string | undefined, () => unknown]>([
    ['points-missing', 'means', () => mandelPaule([1], [1])],
    ['length-differs', 'uncertainties', () => mandelPaule([1, 2], [1])],
    ['not-positive', 'uncertainties[1]', () => mandelPaule([1, 2], [1, 0])],
    ['not-finite', 'means[0]', () => derSimonianLaird([NaN, 2], [1, 1])],
    ['points-missing', 'groups', () => oneWayAnova([[1, 2]])],
    ['points-missing', 'groups[1]', () => oneWayAnova([[1, 2], []])],
    [
      'not-finite',
      'groups[0][1]',
      () =>
        oneWayAnova([
          [1, NaN],
          [1, 2],
        ]),
    ],
    ['level-confounded', undefined, () => oneWayAnova([[1], [2]])],
  ])('%s at %s', (code, where, act) => expectRefusal(act, code, where));
  test('nothing differs: F and its probability are unknown', () => {
    expect(
      oneWayAnova([
        [1, 1],
        [1, 1],
      ]),
    ).toMatchObject({ fStatistic: NaN, probability: NaN });
    expect(
      oneWayAnova([
        [1, 1],
        [2, 2],
      ]),
    ).toMatchObject({ fStatistic: Infinity, probability: 0 });
  });
});
