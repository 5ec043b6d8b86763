import { describe, expect, test } from 'vitest';
import { driftOf, type Visit } from '../../src/tanks/drift.ts';

const MONTH = 30.44 * 86_400_000;
const LIMITS = { netOxidation: 160, vanadiumShift: 112 };
/** X rises by 10 mol a month from 20, M stands still; U as a plain calibration gives it. */
const visits = (count: number, spoiled = -1): Visit[] =>
  Array.from({ length: count }, (_, i) => ({
    time: i * MONTH,
    netOxidation: { value: 20 + 10 * i + (i === spoiled ? 300 : 0), uncertainty: 8 },
    vanadiumShift: { value: 5, uncertainty: 4 },
  }));

describe('driftOf', () => {
  test('rate, date of the act limit and the earliest that 95 % allow', () => {
    const drift = driftOf(visits(6), LIMITS)!;
    expect(drift.netOxidation.rate.value).toBeCloseTo(10, 9);
    // Weighted line through six equal points: u = 8/√17.5 a month.
    expect(drift.netOxidation.rate.uncertainty).toBeCloseTo(8 / Math.sqrt(17.5), 9);
    expect((drift.netOxidation.actAt! - 5 * MONTH) / MONTH).toBeCloseTo(9, 6);
    expect(drift.netOxidation.notBefore!).toBeLessThan(drift.netOxidation.actAt!);
    expect(drift.vanadiumShift.actAt).toBeNull();
  });

  test('one spoiled visit does not turn the rate', () => {
    expect(driftOf(visits(7, 3), LIMITS)!.netOxidation.rate.value).toBeCloseTo(10, 0);
  });

  test('order does not matter; one visit has no drift', () => {
    expect(driftOf(visits(5).toReversed(), LIMITS)).toEqual(driftOf(visits(5), LIMITS));
    expect(driftOf(visits(1), LIMITS)).toBeNull();
  });
});
