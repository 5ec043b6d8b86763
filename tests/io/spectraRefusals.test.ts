import { describe, expect, test } from 'vitest';
import { TankhueError, TankhueErrors } from '../../src/errors.ts';
import type { ReadOptions } from '../../src/io/readOptions.ts';
import { parseSpectra } from '../../src/io/spectra.ts';

const read = (bytes: Uint8Array | string, options: ReadOptions = {}) =>
  parseSpectra(typeof bytes === 'string' ? Buffer.from(bytes) : bytes, 's.csv', '', options);

function refusal(bytes: Uint8Array | string, options: ReadOptions = {}): TankhueError {
  try {
    read(bytes, options);
  } catch (error) {
    if (error instanceof TankhueError) return error;
    throw error;
  }
  return expect.unreachable('was read') as never;
}

describe('what is no spectrum is refused with its place', () => {
  test.each<[string, Uint8Array | string, string, string]>([
    ['nothing', '', 'file-empty', 's.csv'],
    ['blank lines', '\n \n\t\n', 'no-numbers', 's.csv'],
    ['prose', 'a spectrum\nof nothing\n', 'no-numbers', 's.csv'],
    ['a workbook', Buffer.from([0x50, 0x4b, 3, 4, 20, 0, 6]), 'binary', 's.csv'],
    ['a picture', Buffer.from([0x89, 0x50, 0x4e, 0x47, 13, 10]), 'binary', 's.csv'],
    ['any other bytes', Buffer.from([1, 2, 3, 200, 7, 0, 0, 9, 0, 5]), 'binary', 's.csv'],
    ['one number a line', '0.1\n0.2\n0.3\n', 'no-spectrum', 's.csv:1:1'],
    ['thousands set off by blanks', 'nm;A\n1 100,5;0,1\n1 101,5;0,2\n', 'no-numbers', 's.csv:2:1'],
    ['a last row with a word', 'nm A\n400 0.1\n401 0.2\n402 0.3x\n', 'not-a-number', 's.csv:4:2'],
    ['one point', 'nm,A\n400,0.1\n', 'points-missing', 's.csv:2:1'],
    ['a word among numbers', '400,0.1\n401,abc\n402,0.3\n403,0.3\n', 'not-a-number', 's.csv:2:2'],
    ['a word for a wavelength', '400,0.1\n401,0.2\nabc,0.3\n403,0.3\n', 'not-a-number', 's.csv:3:1'],
    ['a row cut short', 'nm,a,b\n400,0.1,0.2\n401,0.2\n402,0.3,0.2\n', 'row-ragged', 's.csv:3:1'],
    ['a last row cut short', 'nm,a,b\n400,0.1,0.2\n401,0.2,0.2\n402,0.3', 'row-ragged', 's.csv:4:1'],
    ['a last row of one cell', 'nm,a,b\n400,0.1,0.2\n401,0.2,0.2\n402', 'row-ragged', 's.csv:4:1'],
    ['a row too long', 'nm,a\n400,0.1\n401,0.2,0.3\n402,0.3\n403,0.3\n', 'row-ragged', 's.csv:3:1'],
    [
      'a row cut short by a pair where there are no pairs',
      'nm,a,b,c\n400,.1,.2,.3\n401,.2\n402,.1,.2,.3\n',
      'row-ragged',
      's.csv:3:1',
    ],
    ['a wavelength twice', 'nm,A\n400,0.1\n401,0.2\n401,0.3\n', 'axis-repeats', 's.csv:4:1'],
    ['wavelengths that turn', 'nm,A\n400,0.1\n402,0.2\n401,0.3\n403,0.3\n', 'axis-turns', 's.csv:4:1'],
    ['a wavelength of 0', 'nm,A\n0,0.1\n1,0.2\n2,0.2\n', 'axis-unit', 's.csv:2:1'],
    ['a wavelength that is empty', 'nm,a,b\n400,.1,.1\n,.2,.1\n402,.3,.1\n', 'axis-value', 's.csv:3:1'],
    ['a wavelength that is NaN', 'nm,a,b\n400,.1,.1\nNaN,.2,.1\n402,.3,.1\n', 'axis-value', 's.csv:3:1'],
    ['nothing but over-range marks', 'nm,a\n400,OVER\n401,OVER\n', 'no-values', 's.csv'],
    ['nothing but darkness', 'nm,%T\n400,0\n401,-1\n402,0\n', 'no-values', 's.csv'],
    ['a second table', 'nm,A\n400,.1\n401,.2\n402,.3\nnm,A\n400,.5\n401,.6\n', 'second-table', 's.csv:6:1'],
  ])('%s', (_, bytes, code, where) => {
    expect(refusal(bytes)).toMatchObject({ code, where });
  });

  test('all bad lines of a file are shown together, and counted beyond ten', () => {
    const rows = Array.from({ length: 40 }, (_, i) => (i % 3 === 1 ? `${400 + i},x${i}` : `${400 + i},0.1`));
    const error = refusal(rows.join('\n')) as TankhueErrors;
    expect(error.all.map(({ where }) => where)).toEqual(
      [2, 5, 8, 11, 14, 17, 20, 23, 26, 29].map((line) => `s.csv:${line}:2`),
    );
    expect(error.all[9]!.hint).toMatch(/3 more problems/);
  });
});

describe('what can be read in two ways is refused with both and the option that decides', () => {
  test.each<[string, string, string, string, RegExp[]]>([
    [
      'one number or two',
      '400,123\n401,124\n',
      'decimal-mark',
      's.csv:1:1',
      [/--decimal comma \(400\.123\)/, /--decimal point \(400 and 123\)/],
    ],
    [
      'two numbers or four',
      '400,5,0,123\n401,5,0,124\n',
      'decimal-mark',
      's.csv:1:1',
      [/--decimal comma \(400\.5 and 0\.123\)/, /--decimal point/, /1 more line/],
    ],
    [
      'captions do not help when they are half as many',
      'nm,A\n400,5,0,123\n401,5,0,124\n',
      'decimal-mark',
      's.csv:2:1',
      [/comma/, /point/],
    ],
    ['three parts', '400,0,123\n401,0,124\n', 'decimal-mark', 's.csv:1:1', [/--decimal point/, /semicolon or tab/]],
    [
      'thousands or thousandths',
      '1,100\t1,234\n1,101\t1,235\n',
      'decimal-mark',
      's.csv:1:1',
      [/--decimal comma \(1\.100\)/, /1100/],
    ],
    ['both marks', '400.5\t0,1\n401.5\t0,2\n', 'decimal-mark', 's.csv:1:1', [/one decimal mark throughout/]],
    [
      '%T or mA',
      '400 97.5\n401 98.5\n',
      'value-unit',
      's.csv:1:2',
      [/--unit %T \(absorbance 0\.00656/, /--unit mA \(absorbance 0\.0985/],
    ],
    [
      'per cent or a fraction',
      'nm,%T\n400,0.97\n401,0.98\n',
      'value-unit',
      's.csv:2:2',
      [/--unit A \(absorbance 0\.980/, /--unit %T \(2\.01/, /--unit T \(0\.00877/],
    ],
    ['a fraction or per cent', 'nm,T\n400,1.97\n401,0.98\n', 'value-unit', 's.csv:2:2', [/--unit %T/, /--unit T/]],
    ['per cent that cannot be', 'nm,%T\n400,970\n401,980\n', 'value-unit', 's.csv:2:2', [/--unit %T/, /--unit mA/]],
    [
      'absorbance that cannot be',
      'nm,Absorbance\n400,97\n401,98\n',
      'value-unit',
      's.csv:2:2',
      [/--unit %T/, /--unit mA/],
    ],
    ['nm or cm⁻¹', '25000 0.1\n24900 0.2\n', 'axis-unit', 's.csv:1:1', [/--axis nm/, /--axis cm-1 \(400\.0/]],
    ['nm that cannot be', 'nm A\n25000 0.1\n24900 0.2\n', 'axis-unit', 's.csv:2:1', [/--axis nm/, /--axis cm-1/]],
    ['cm⁻¹ that cannot be', 'cm-1 A\n400 0.1\n410 0.2\n', 'axis-unit', 's.csv:2:1', [/--axis nm/, /--axis cm-1/]],
    [
      'wavelengths across or down',
      'x,400,500,600\n400,0.1,0.2,0.3\n500,0.2,0.3,0.4\n600,0.2,0.3,0.4\n',
      'layout',
      's.csv:1:1',
      [/--layout rows/, /--layout columns/],
    ],
    [
      'one axis or three',
      '400,.1,400,500\n401,.1,401,501\n402,.1,402,502\n',
      'layout',
      's.csv:1:3',
      [/--layout columns/, /--layout pairs/],
    ],
  ])('%s', (_, text, code, where, hints) => {
    const error = refusal(text);
    expect(error).toMatchObject({ code, where });
    for (const hint of hints) expect(error.hint).toMatch(hint);
  });

  test.each<[string, string, ReadOptions, number[]]>([
    ['--decimal point', '400,1\n401,2\n', { decimal: 'point' }, [1, 2]],
    ['--decimal comma', '400,5,0,123\n401,5,0,124\n', { decimal: 'comma' }, [0.123, 0.124]],
    [
      '--decimal comma of thousandths',
      '1,100\t1,234\n1,101\t1,235\n',
      { decimal: 'comma', axis: 'um' },
      [1.234, 1.235],
    ],
    ['--unit mA', '400 97.5\n401 98.5\n', { unit: 'mA' }, [0.0975, 0.0985]],
    ['--unit T', 'nm,%T\n400,0.1\n401,0.01\n', { unit: 'T' }, [1, 2]],
    ['--axis cm-1', '25000 0.1\n24900 0.2\n', { axis: 'cm-1' }, [0.1, 0.2]],
    ['--layout columns', 'x,400,500,600\n400,.1,.2,.3\n500,.2,.3,.4\n', { layout: 'columns' }, [0.1, 0.2]],
  ])('%s decides', (_, text, options, absorbance) => {
    expect([...read(text, options).spectra[0]!.absorbance]).toEqual(absorbance);
  });
});
