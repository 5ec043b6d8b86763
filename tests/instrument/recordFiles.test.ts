import { expect, test } from 'vitest';
import { verifyInstrument } from '../../src/bench/instrument/verifyInstrument.ts';
import { precisionStudy } from '../../src/bench/precision/precisionStudy.ts';
import { TankhueErrors } from '../../src/errors.ts';
import { readInstrumentRecord } from '../../src/io/instrumentRecordFile.ts';
import { readPrecisionRecord } from '../../src/io/precisionRecordFile.ts';
import { normalDeviates, scan } from './simulated.ts';

const record = verifyInstrument(
  Array.from({ length: 3 }, (_, i) => {
    const draw = normalDeviates(i + 1);
    return { test: 'blank' as const, minutes: i, spectrum: scan(`b${i}`, 400, 900, 1, () => 0.0003 * draw()) };
  }),
);
const precision = precisionStudy({
  factors: ['filling'],
  origin: { file: 'r.csv', column: '', sha256: 'abc' },
  lines: [0.5, 0.51, 0.52, 0.5, 0.49, 0.5].map((value, i) => ({
    sample: 's',
    labels: [String(Math.floor(i / 2))],
    values: { stateOfCharge: value, averageOxidationState: NaN, totalVanadium: NaN },
  })),
});

test('what is written reads back the same', () => {
  expect(readInstrumentRecord(JSON.stringify(record), 'photometer.json')).toEqual(record);
  expect(readPrecisionRecord(JSON.stringify(precision), 'precision.json')).toEqual(precision);
});

test('fields of a later version are let through', () => {
  const later = { ...record, lampHours: 400 };
  expect(readInstrumentRecord(JSON.stringify(later), 'photometer.json')).toMatchObject({ lampHours: 400 });
});

test.each([
  ['json-broken', '{', 'photometer.json:1:2'],
  ['wrong-schema', JSON.stringify({ ...record, schema: 'tankhue/assay/1' }), 'photometer.json $.schema'],
  ['field-wrong', JSON.stringify({ ...record, offsetPrior: -1 }), 'photometer.json $.offsetPrior'],
  [
    'not-finite',
    JSON.stringify(record).replace(/"offsetPrior":[^,]+/, '"offsetPrior":1e999'),
    'photometer.json $.offsetPrior',
  ],
  [
    'field-missing',
    JSON.stringify({ ...record, wavelengthShift: { value: 1 } }),
    'photometer.json $.wavelengthShift.uncertainty',
  ],
  [
    'field-wrong',
    JSON.stringify({ ...record, cells: [{ name: 'a', pathLength: 0, uncertainty: 0, method: 'fringes' }] }),
    'photometer.json $.cells[0].pathLength',
  ],
])('an instrument record that is none: %s', (code, text, where) => {
  expect(() => readInstrumentRecord(text, 'photometer.json')).toThrow(expect.objectContaining({ code, where }));
});

test('all problems of one file at once', () => {
  const broken = JSON.stringify({ ...record, offsetPrior: -1, slopePrior: 'small', state: 'fine' });
  try {
    readInstrumentRecord(broken, 'photometer.json');
    expect.unreachable();
  } catch (error) {
    expect((error as TankhueErrors).all.map(({ where }) => where)).toEqual([
      'photometer.json $.state',
      'photometer.json $.offsetPrior',
      'photometer.json $.slopePrior',
    ]);
  }
});

test('a precision record that is none', () => {
  const broken = JSON.stringify({ ...precision, quantities: { stateOfCharge: { unit: 'points' } } });
  expect(() => readPrecisionRecord(broken, 'p.json')).toThrow(
    expect.objectContaining({ code: 'field-wrong', where: 'p.json $.quantities.stateOfCharge.unit' }),
  );
});
