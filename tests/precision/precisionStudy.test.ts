import { expect, test } from 'vitest';
import { uncertaintyFromPrecision } from '../../src/assay/precisionRecord.ts';
import { grubbsLimit } from '../../src/bench/grubbs.ts';
import { cochranLimit, precisionStudy, type ReplicateSheet } from '../../src/bench/precision/precisionStudy.ts';

import { PIGMENT_PASTES } from '../support/pigmentPastes.ts';

const origin = { file: 'replicates.csv', column: '', sha256: '' };

// ISO 5725-2, table of Cochran's critical values (from memory): groups, results a group, 5 %, 1 %. The printed table is rounded
// from an older one: 0.7175 stands there as 0.718, so one unit of the last digit is allowed.
test.each([
  [5, 2, 0.841, 0.928],
  [10, 2, 0.602, 0.718],
  [10, 3, 0.445, 0.536],
  [20, 2, 0.389, 0.48],
])('Cochran, %s groups of %s', (groups, results, five, one) => {
  expect(Math.abs(cochranLimit(groups, results - 1, 0.05) - five)).toBeLessThan(0.001);
  expect(Math.abs(cochranLimit(groups, results - 1, 0.01) - one)).toBeLessThan(0.001);
});

// F. E. Grubbs, Technometrics 1969, 11, 1, two-sided 5 % values recomputed from Student quantiles.
test.each([
  [3, 1.154304851],
  [10, 2.289954084],
  [30, 2.90847306],
])('Grubbs, %s values', (count, limit) => {
  expect(grubbsLimit(count, 0.05)).toBeCloseTo(limit, 7);
});

// The pigment pastes of Box, Hunter and Hunter (see the test of the analysis itself) as one sample assayed by 15 "days" of two
// "fillings": components 7.1, 28.5, 0.92, so repeatability is √0.92 and reproducibility √36.6.
const pasteSheet: ReplicateSheet = {
  factors: ['day', 'filling'],
  origin,
  lines: PIGMENT_PASTES.flatMap((values, day) =>
    values.map((value, i) => ({
      sample: 'paste',
      labels: [`${day}`, `${i < 2 ? 1 : 2}`],
      values: { stateOfCharge: value / 100, averageOxidationState: NaN, totalVanadium: value / 10 },
    })),
  ),
};

test('a sheet of replicates: components, repeatability, reproducibility', () => {
  const { quantities } = precisionStudy(pasteSheet);
  const { components, repeatability, reproducibility } = quantities.stateOfCharge!;
  expect(components.map(({ source }) => source)).toEqual(['day', 'filling', 'repeat']);
  [7.1, 28.5, 0.92].forEach((variance, i) =>
    expect(components[i]!.variance * 1e4).toBeCloseTo(variance, i === 2 ? 2 : 1),
  );
  expect(repeatability.standardDeviation).toBeCloseTo(0.00957, 4);
  expect(reproducibility.standardDeviation).toBeCloseTo(Math.sqrt(7.1 + 28.5 + 0.92) / 100, 3);
  // 30 degrees of freedom: 95 % interval s·√(30/χ²), χ² = 46.97924224 and 16.79077227.
  expect(repeatability.interval[0]).toBeCloseTo(repeatability.standardDeviation * Math.sqrt(30 / 46.97924224), 9);
  expect(repeatability.interval[1]).toBeCloseTo(repeatability.standardDeviation * Math.sqrt(30 / 16.79077227), 9);
});

test('total vanadium is relative: the same data in another unit give the same figures', () => {
  const total = precisionStudy(pasteSheet).quantities.totalVanadium!;
  const mean = PIGMENT_PASTES.flat().reduce((a, b) => a + b, 0) / 60;
  expect(total.unit).toBe('relative');
  expect(total.components[1]!.standardDeviation).toBeCloseTo(Math.sqrt(28.533) / mean, 4);
});

test('averaging over fillings and scans shrinks their components, not the day', () => {
  const { components } = precisionStudy(pasteSheet).quantities.stateOfCharge!;
  const [day, filling, repeat] = components.map(({ variance }) => variance);
  const u = uncertaintyFromPrecision(precisionStudy(pasteSheet).quantities.stateOfCharge!, { filling: 2, repeat: 4 });
  expect(u).toBeCloseTo(Math.sqrt(day! + filling! / 2 + repeat! / 4), 12);
});

test('a factor that is one to one with another is left out and said', () => {
  const sheet = {
    ...pasteSheet,
    factors: ['operator', 'day', 'filling'],
    lines: pasteSheet.lines.map((line) => ({ ...line, labels: ['kim', ...line.labels] })),
  };
  const record = precisionStudy(sheet);
  expect(record.quantities.stateOfCharge!.components.map(({ source }) => source)).toEqual(['day', 'filling', 'repeat']);
  expect(record.findings.filter(({ code }) => code === 'level-not-separable')[0]!.message).toContain('operator');
});

test('one wild group is found by Cochran, one outlying mean by Grubbs; nothing is left out', () => {
  const values = [10, 10.1, 10.05, 9.9, 10.02, 10.12, 9.95, 10.0, 10.08, 10.0, 13, 10.1];
  const line = (value: number, filling: number) => ({
    sample: 's',
    labels: [`${filling}`],
    values: { stateOfCharge: value / 100, averageOxidationState: NaN, totalVanadium: NaN },
  });
  const wild = { factors: ['filling'], origin, lines: values.map((value, i) => line(value, Math.floor(i / 2))) };
  const codes = precisionStudy(wild).findings.map(({ code, severity }) => `${code} ${severity}`);
  expect(codes).toContain('scatter-unequal caution');
  const outlying = {
    ...wild,
    lines: [10, 10.1, 10.05, 9.9, 10.02, 10.12, 9.95, 10.0, 10.08, 10.0, 13, 13.1].map((value, i) =>
      line(value, Math.floor(i / 2)),
    ),
  };
  const found = precisionStudy(outlying);
  expect(found.findings.map(({ code, severity }) => `${code} ${severity}`)).toContain('group-outlying caution');
  expect(found.quantities.stateOfCharge!.lines).toBe(12);
});

test('copied lines are not replicates', () => {
  const copied = { ...pasteSheet, lines: pasteSheet.lines.map((_, i) => pasteSheet.lines[2 * Math.floor(i / 2)]!) };
  expect(precisionStudy(copied).findings.map(({ code }) => code)).toContain('not-independent');
  expect(precisionStudy(pasteSheet).findings.map(({ code }) => code)).not.toContain('not-independent');
});

test.each([
  ['one line each', [['1'], ['2'], ['3']]],
  ['no lines', []],
])('%s: refused', (_, labels) => {
  const lines = labels.map((each) => ({
    sample: 's',
    labels: each,
    values: { stateOfCharge: 0.5, averageOxidationState: NaN, totalVanadium: NaN },
  }));
  // Three lines of one sample are replicates of it, whatever the label: only a sheet of different samples has none.
  const apart = lines.map((line, i) => ({ ...line, sample: `${i}` }));
  expect(() => precisionStudy({ factors: ['filling'], origin, lines: apart })).toThrow(
    expect.objectContaining({ code: 'replicates-missing', where: 'replicates.csv' }),
  );
});
