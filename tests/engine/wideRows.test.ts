import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { numberFromBytes } from '../../src/io/numberBytes.ts';
import { wideHeader, wideRows } from '../../src/io/wideRows.ts';

const bytesOf = (text: string): Uint8Array => new TextEncoder().encode(text);
const numberIn = (text: string): number => {
  const bytes = bytesOf(text);
  return numberFromBytes(bytes, 0, bytes.length);
};

describe('numberFromBytes', () => {
  test('any number as JavaScript writes it comes back to the last bit', () => {
    fc.assert(
      fc.property(fc.double({ noNaN: true, noDefaultInfinity: true }), (value) => {
        expect(numberIn(String(value))).toBe(Number(String(value)));
      }),
      { numRuns: 2000 },
    );
  });
  test('fixed decimals come back as Number reads them', () => {
    fc.assert(
      fc.property(fc.double({ min: -10, max: 10, noNaN: true }), fc.integer({ min: 0, max: 20 }), (value, digits) => {
        expect(numberIn(value.toFixed(digits))).toBe(Number(value.toFixed(digits)));
      }),
      { numRuns: 2000 },
    );
  });
  test.each([
    ['0,123', 0.123],
    ['  0.5 ', 0.5],
    ['"0.5"', 0.5],
    ['.5', 0.5],
    ['5.', 5],
    ['+1.5', 1.5],
    ['-0', -0],
    ['1e-3', 0.001],
    ['1,5E-3', 0.0015],
  ])('%j is %s', (text, value) => expect(numberIn(text)).toBe(value));
  test.each([[''], ['-'], ['.'], ['+'], ['NaN'], ['OVER'], ['1.2.3'], ['0x10'], ['1 2'], ['Infinity'], ['--1']])(
    '%j carries no value',
    (text) => expect(numberIn(text)).toBeNaN(),
  );
});

describe('wideHeader', () => {
  test.each([
    ['time,430,435,440,445,450', ',', ['time'], [430, 435, 440, 445, 450], false, 0],
    ['430.5;431.5;432.5;433.5;434.5', ';', [], [430.5, 431.5, 432.5, 433.5, 434.5], false, 0],
    ['id\ttime\t450\t440\t430\t420\t410\tnote', '\t', ['id', 'time'], [410, 420, 430, 440, 450], true, 1],
    ['"when";430,5;431,5;432,5;433,5;434,5', ';', ['when'], [430.5, 431.5, 432.5, 433.5, 434.5], false, 0],
    ['t,430 nm,435 nm,440 nm,445 nm,450 nm', ',', ['t'], [430, 435, 440, 445, 450], false, 0],
  ])('%j', (line, separator, labels, wavelength, descending, trailing) => {
    const layout = wideHeader(line)!;
    expect({ ...layout, wavelength: [...layout.wavelength] }).toEqual({
      separator,
      labels,
      wavelength,
      descending,
      trailing,
    });
  });
  test.each([[''], ['time,absorbance'], ['1,0.1,0.2,0.3,0.4,0.5'], ['t,430,435,433,440,445'], ['t,430,435']])(
    '%j is no line of wavelengths',
    (line) => expect(wideHeader(line)).toBeNull(),
  );
});

describe('wideRows', () => {
  const layout = wideHeader('t;name;430;440;450;460;470')!;
  const read = (text: string) => wideRows(bytesOf(text), layout);

  test('labels, quoted separators, decimal comma, CRLF, empty cells, comments, blank lines', () => {
    const rows = read('1;"a;b";0,1;0,2;;0,4;x\r\n# lamp on\r\n\r\n2;c;1;2;3;4;5\r\n');
    expect(rows.labels).toEqual([
      ['1', 'a;b'],
      ['2', 'c'],
    ]);
    expect([...rows.readings]).toEqual([0.1, 0.2, NaN, 0.4, NaN, 1, 2, 3, 4, 5]);
    expect([...rows.wrongCells]).toEqual([0, 0]);
  });
  test('every row knows its bytes', () => {
    const lines = ['1;a;1;2;3;4;5\n', '2;é;1;2;3;4;5\n', '3;c;1;2;3;4;5\n'];
    const rows = read(lines.join(''));
    expect([...rows.start]).toEqual([0, 14, 29]);
    expect([...rows.end]).toEqual([14, 29, 43]);
  });
  test('a row of too few or too many cells is all NaN and says how many it had', () => {
    const rows = read('1;a;1;2\n2;b;1;2;3;4;5\n3;c;1;2;3;4;5;6;7\n');
    expect([...rows.wrongCells]).toEqual([4, 0, 9]);
    expect([...rows.readings.subarray(0, 5)]).toEqual([NaN, NaN, NaN, NaN, NaN]);
    expect([...rows.readings.subarray(5, 10)]).toEqual([1, 2, 3, 4, 5]);
  });
  test('a new line of wavelengths stops the reading, with labels or without', () => {
    const rows = read('1;a;1;2;3;4;5\nt;name;500;510;520;530;540\n2;b;1;2;3;4;5\n');
    expect([rows.count, rows.header]).toEqual([1, 14]);
    const bare = wideHeader('430,440,450,460,470')!;
    expect(wideRows(bytesOf('1,2,3,4,5\n400,410,420,430,440,450\n'), bare)).toMatchObject({ count: 1, header: 10 });
  });
  test('descending wavelengths are turned', () => {
    const turned = wideHeader('470,460,450,440,430')!;
    expect([...wideRows(bytesOf('1,2,3,4,5\n'), turned).readings]).toEqual([5, 4, 3, 2, 1]);
  });
  test('cut anywhere at line ends, the pieces hold what the whole holds', () => {
    const text = Array.from({ length: 30 }, (_, i) => `${i};n${i};0.1;0.2;0.3;0.4;${i}\n`);
    const whole = read(text.join(''));
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 30 }), (cut) => {
        const front = read(text.slice(0, cut).join(''));
        const back = read(text.slice(cut).join(''));
        expect([...front.readings, ...back.readings]).toEqual([...whole.readings]);
        expect([...front.labels, ...back.labels]).toEqual(whole.labels);
      }),
    );
  });
});
