import { existsSync, readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { mean, standardDeviation, weightedMean } from '../../src/numerics/meanAndDeviation.ts';

const REFERENCES = '../shared/references/strd';

// NIST StRD, univariate, certified to 15 digits; the digits asked for are those the data leave to a double.
describe.skipIf(!existsSync(REFERENCES))('NIST StRD (skipped without ../shared)', () => {
  test.each([
    ['Michelso', 13],
    ['Mavro', 12],
    ['Lew', 14],
    ['NumAcc1', 15],
    ['NumAcc2', 14],
    ['NumAcc3', 9],
    ['NumAcc4', 8],
  ])('%s', (name, digits) => {
    const { data, certified } = JSON.parse(readFileSync(`${REFERENCES}/${name}.json`, 'utf8'));
    const values: number[] = data.y ?? data;
    expect(Math.abs(mean(values) / certified.mean - 1)).toBeLessThan(1e-14);
    expect(Math.abs(standardDeviation(values) / certified.standard_deviation - 1)).toBeLessThan(10 ** -digits);
  });
});

test('a weighted mean widens where its values disagree', () => {
  // Weights 1 and 4: (10 + 4·12)/5 = 11.6; 1/√5 = 0.447. χ² = 1.6² + 4·0.4² = 3.2 on one degree of freedom.
  const { value, uncertainty } = weightedMean([10, 12], [1, 0.5]);
  expect(value).toBeCloseTo(11.6, 12);
  expect(uncertainty).toBeCloseTo(Math.sqrt(3.2 / 5), 12);
  expect(weightedMean([11.6, 11.6], [1, 0.5]).uncertainty).toBeCloseTo(1 / Math.sqrt(5), 12);
});
