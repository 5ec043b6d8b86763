import { existsSync, readFileSync } from 'node:fs';
import { array, assert, integer, pre, property } from 'fast-check';
import { describe, expect, test } from 'vitest';
import { PIGMENT_PASTES } from '../support/pigmentPastes.ts';
import { nestedAnova } from '../../src/numerics/nestedAnova.ts';

const REFERENCES = '../shared/references/strd';

// NIST StRD, analysis of variance, certified to 15 digits. AtmWtAg shares 7 leading digits between all data and SmLs07 13, which
// no double keeps, so digits are asked for by the data's own loss.
describe.skipIf(!existsSync(REFERENCES))('one-way analysis against NIST StRD (skipped without ../shared)', () => {
  test.each([
    ['SiRstv', 11],
    ['SmLs01', 12],
    ['AtmWtAg', 7],
    ['SmLs07', 1],
  ])('%s', (name, digits) => {
    const { data, certified } = JSON.parse(readFileSync(`${REFERENCES}/${name}.json`, 'utf8'));
    const [between, within] = nestedAnova(
      data.group.map((group: number) => ['all', String(group)]),
      data.y,
    );
    expect(between!.degreesOfFreedom).toBe(certified.between.df);
    expect(within!.degreesOfFreedom).toBe(certified.within.df);
    for (const [mine, theirs] of [
      [between, certified.between],
      [within, certified.within],
    ])
      expect(Math.abs(mine.meanSquare / theirs.mean_square - 1)).toBeLessThan(10 ** -digits);
    const f = between!.meanSquare / within!.meanSquare;
    expect(Math.abs(f / certified.f_statistic - 1)).toBeLessThan(10 ** -digits);
  });
});

// Published for the pigment pastes: mean squares 86.495 (14 df), 57.983 (15 df), 0.917 (30 df); components 7.1, 28.5, 0.92.
test('three levels: pigment pastes', () => {
  const groups = PIGMENT_PASTES.flatMap((_, b) => [0, 0, 1, 1].map((s) => ['all', String(b), String(s)]));
  const [batch, sample, repeat] = nestedAnova(groups, PIGMENT_PASTES.flat());
  expect([batch, sample, repeat].map((level) => level!.degreesOfFreedom)).toEqual([14, 15, 30]);
  expect(batch!.meanSquare).toBeCloseTo(86.495, 3);
  expect(sample!.meanSquare).toBeCloseTo(57.983, 3);
  expect(repeat!.meanSquare).toBeCloseTo(0.917, 3);
  expect(batch!.variance).toBeCloseTo(7.1, 1);
  expect(sample!.variance).toBeCloseTo(28.5, 1);
  expect(repeat!.variance).toBeCloseTo(0.92, 2);
});

// D. C. Montgomery, Design and Analysis of Experiments, purity of batches of three suppliers (from memory): sums of squares
// 15.06, 69.92, 63.33.
test('three levels, smaller: suppliers and batches', () => {
  const suppliers = [
    [
      [1, -1, 0],
      [-2, -3, -4],
      [-2, 0, 1],
      [1, 4, 0],
    ],
    [
      [1, -2, -3],
      [0, 4, 2],
      [-1, 0, -2],
      [0, 3, 2],
    ],
    [
      [2, 4, 0],
      [-2, 0, 2],
      [1, -1, 2],
      [3, 2, 1],
    ],
  ];
  const groups = suppliers.flatMap((batches, s) => batches.flatMap((b, i) => b.map(() => ['all', `${s}`, `${i}`])));
  const levels = nestedAnova(groups, suppliers.flat(2));
  [15.06, 69.92, 63.33].forEach((expected, i) => expect(levels[i]!.sumOfSquares).toBeCloseTo(expected, 2));
});

test('a fixed outer group costs its means: two samples far apart change nothing', () => {
  const groups = [
    ['a', '1'],
    ['a', '1'],
    ['a', '2'],
    ['a', '2'],
    ['b', '1'],
    ['b', '1'],
    ['b', '2'],
    ['b', '2'],
  ];
  const near = [1, 2, 3, 5, 1, 0, 2, 2];
  const apart = near.map((value, i) => value + (i < 4 ? 0 : 100));
  const [one, other] = [nestedAnova(groups, near), nestedAnova(groups, apart)];
  one.forEach((level, i) => expect(other[i]!.variance).toBeCloseTo(level.variance, 9));
  expect(one.map((level) => level.degreesOfFreedom)).toEqual([2, 4]);
});

// The expected sums of squares are exact for any sizes: with variances put in as one unit effect a group, averaged over all signs,
// the estimate returns them. One group at a time: E[SS] is linear in the variances and effects are independent.
test('unbalanced designs: estimates are unbiased for any group sizes', () => {
  const sizes = array(array(integer({ min: 1, max: 3 }), { minLength: 1, maxLength: 3 }), {
    minLength: 2,
    maxLength: 3,
  });
  assert(
    property(sizes, (days) => {
      const groups = days.flatMap((fillings, d) =>
        fillings.flatMap((n, f) => Array.from({ length: n }, () => ['all', `${d}`, `${f}`])),
      );
      const cells = new Set(groups.map((keys) => keys.join()));
      pre(cells.size > days.length && groups.length > cells.size);
      // E over independent unit effects of one level = Σ over its groups of the analysis of that group's indicator.
      const estimateFor = (keyOf: (keys: readonly string[], i: number) => string): number[] => {
        const keys = groups.map(keyOf);
        const total = [0, 0, 0];
        for (const key of new Set(keys))
          nestedAnova(
            groups,
            keys.map((each) => (each === key ? 1 : 0)),
          ).forEach((level, i) => (total[i]! += level.variance));
        return total;
      };
      const expectations = [
        estimateFor((keys) => keys[1]!),
        estimateFor((keys) => keys.join()),
        estimateFor((_, i) => `${i}`),
      ];
      expectations.forEach((estimates, i) =>
        estimates.forEach((value, j) => expect(value).toBeCloseTo(i === j ? 1 : 0, 8)),
      );
    }),
    { numRuns: 50 },
  );
});

test.each([
  [
    [
      ['a', '1'],
      ['a', '2'],
    ],
    'groups[].2',
  ],
  [
    [
      ['a', '1'],
      ['a', '1'],
    ],
    'groups[].1',
  ],
])('groups %j cannot be told apart', (groups, where) => {
  expect(() => nestedAnova(groups, [1, 2])).toThrow(expect.objectContaining({ code: 'level-confounded', where }));
});
