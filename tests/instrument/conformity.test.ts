import { expect, test } from 'vitest';
import { judgeConformity, worstConformity } from '../../src/bench/instrument/conformity.ts';

// JCGM 106:2012, 7 (examples from memory; each follows from the normal distribution): breakdown voltage of a Zener diode
// −5.47 V, u 0.05 V, upper limit −5.40 V: 0.92. Burst strength 509.7 kPa, u 8.6 kPa, lower limit 490 kPa: 0.99. Viscosity of an
// oil 13.6 mm²/s, u 1.8, limits 12.5 and 16.3: 0.66.
test.each([
  ['upper limit', -5.47, 0.05, [-Infinity, -5.4], 0.92],
  ['lower limit', 509.7, 8.6, [490, Infinity], 0.99],
  ['both', 13.6, 1.8, [12.5, 16.3], 0.66],
] as const)('probability of conformity, %s: JCGM 106', (_, value, uncertainty, limits, probability) => {
  expect(judgeConformity(value, uncertainty, limits).probability).toBeCloseTo(probability, 2);
});

test.each([
  [0.5, 'passed'],
  [0.803, 'passed'],
  [0.81, 'undecided'],
  [1.1, 'undecided'],
  [1.197, 'failed'],
  [-0.81, 'undecided'],
  [-1.3, 'failed'],
] as const)('a value of %s ± 0.1 against limits of ±1 has %s', (value, conformity) => {
  expect(judgeConformity(value, 0.1, [-1, 1]).conformity).toBe(conformity);
});

test('without uncertainty the bare limit decides', () => {
  expect(judgeConformity(1, 0, [-1, 1])).toEqual({ conformity: 'passed', probability: 1 });
  expect(judgeConformity(1.01, 0, [-1, 1])).toEqual({ conformity: 'failed', probability: 0 });
});

test('several tests together', () => {
  expect(worstConformity(['passed', 'undecided', 'failed'])).toBe('failed');
  expect(worstConformity(['passed', 'undecided'])).toBe('undecided');
  expect(worstConformity(['passed'])).toBe('passed');
  expect(worstConformity([])).toBe('undecided');
});
