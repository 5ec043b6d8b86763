import { describe, expect, test } from 'vitest';
import {
  parseDilution,
  parseInUnits,
  parseLength,
  parsePositive,
  parseTemperature,
} from '../../src/io/quantityText.ts';

test.each([
  ['1mm', 0.1],
  ['0.1 cm', 0.1],
  ['.2mm', 0.02],
  ['1e-1cm', 0.1],
])('a length of %s is %s cm', (text, cm) => expect(parseLength(text, '--path')).toBeCloseTo(cm, 15));

test.each([
  ['25', 298.15],
  ['25C', 298.15],
  ['25 °C', 298.15],
  ['298.15 K', 298.15],
])('a temperature of %s is %s K', (text, kelvin) =>
  expect(parseTemperature(text, '--temperature')).toBeCloseTo(kelvin, 12),
);

test('a dilution, and a number of one unit', () => {
  expect(parseDilution('20', '--dilution')).toBe(20);
  expect(parseDilution('20x', '--dilution')).toBe(20);
  expect(parsePositive('5 nm', 'nm', '--step')).toBe(5);
});

test('a number in one of several units; Greek mu and the micro sign are one', () => {
  const units = { L: 1, mL: 1e-3, µL: 1e-6 };
  expect(parseInUnits('250mL', 'a volume', units, '2L', '--dose')).toBeCloseTo(0.25, 15);
  expect(parseInUnits('250 μL', 'a volume', units, '2L', '--dose')).toBeCloseTo(2.5e-4, 15);
});

describe('refusals', () => {
  const volume = (text: string) => parseInUnits(text, 'a volume', { L: 1, mL: 1e-3 }, '2L', '--dose');
  test.each<[string, () => unknown, string, string]>([
    ['a length without unit', () => parseLength('1', '--path'), 'unit-missing', '--path'],
    ['a length in inches', () => parseLength('1in', '--path'), 'unit-unknown', '--path'],
    ['a length of 0', () => parseLength('0mm', '--path'), 'out-of-range', '--path'],
    ['a length below 0', () => parseLength('-1mm', '--path'), 'out-of-range', '--path'],
    ['a word for a length', () => parseLength('thin', '--path'), 'not-a-number', '--path'],
    ['a decimal comma', () => parseLength('0,5mm', '--path'), 'unit-unknown', '--path'],
    ['more than a double holds', () => parseLength('1e999mm', '--path'), 'not-a-number', '--path'],
    ['an oven', () => parseTemperature('250C', '--temperature'), 'out-of-range', '--temperature'],
    ['degrees Fahrenheit', () => parseTemperature('77F', '--temperature'), 'unit-unknown', '--temperature'],
    ['a dilution below 1', () => parseDilution('0.5', '--dilution'), 'out-of-range', '--dilution'],
    ['a dilution in per cent', () => parseDilution('20%', '--dilution'), 'unit-unknown', '--dilution'],
    ['another unit', () => parsePositive('5 mm', 'nm', '--step'), 'unit-unknown', '--step'],
    ['nothing above 0', () => parsePositive('0', 'nm', '--step'), 'out-of-range', '--step'],
    ['a volume without unit', () => volume('2'), 'unit-missing', '--dose'],
    ['a unit that every object has', () => volume('2constructor'), 'unit-unknown', '--dose'],
  ])('%s', (_, parse, code, where) => {
    expect(parse).toThrow(expect.objectContaining({ code, where }));
  });

  test('the message of a missing unit', () => {
    expect(() => parseLength('1', '--path')).toThrow(
      expect.objectContaining({
        message: 'expected a path length with its unit; received "1"',
        hint: 'write 1mm or 1cm',
      }),
    );
  });
});
