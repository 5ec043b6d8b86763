import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { linesOfChunks } from '../../src/io/decodeText.ts';
import { numberFormOf, readNumberRow } from '../../src/io/numberRow.ts';
import { encoded } from './writtenSpectra.ts';

const pieces = (bytes: Uint8Array, size: number): Uint8Array[] =>
  Array.from({ length: Math.ceil(bytes.length / size) }, (_, i) => bytes.subarray(i * size, (i + 1) * size));

describe('lines', () => {
  test('come out the same whatever ends them and however the bytes are cut', () => {
    const line = fc.stringMatching(/^[a-zäµ0-9,;. ]{0,12}$/);
    const encodings = ['UTF-8', 'UTF-8 with mark', 'UTF-16LE', 'UTF-16BE', 'Latin-1'] as const;
    fc.assert(
      fc.property(
        fc.array(line, { minLength: 1, maxLength: 900 }),
        fc.constantFrom('\n', '\r\n', '\r'),
        fc.constantFrom(...encodings),
        fc.integer({ min: 1, max: 50 }),
        (rest, end, encoding, size) => {
          const lines = ['first, µ', ...rest, 'last'];
          const bytes = encoded(lines.join(end), encoding);
          expect([...linesOfChunks(pieces(bytes, size), 'f').lines]).toEqual(lines);
        },
      ),
      { numRuns: 120 },
    );
  });

  test('a line end cut in two is one line end', () => {
    const text = `${'x'.repeat(5000)}\r\nb\r\nc`;
    for (let size = 4998; size < 5006; size++)
      expect([...linesOfChunks(pieces(Buffer.from(text), size), 'f').lines]).toEqual(['x'.repeat(5000), 'b', 'c']);
  });
});

describe('a row of numbers from bytes', () => {
  const out = new Float64Array(8);
  const row = (
    text: string,
    separator: 'tab' | 'semicolon' | 'comma' | 'space',
    decimal: 'point' | 'comma' = 'point',
  ) => {
    const count = readNumberRow(Buffer.from(text), numberFormOf(separator, decimal), out, 0, 8);
    return count < 0 ? null : [...out.subarray(0, count)];
  };

  test('is what Number makes of each cell', () => {
    const number = fc.oneof(
      fc.double({ noNaN: true, noDefaultInfinity: true }).map(String),
      fc.double({ min: -10, max: 1000, noNaN: true }).map((value) => value.toFixed(7)),
      fc.stringMatching(/^[+-]?\d{1,24}(\.\d{0,24})?([eE][+-]?\d{1,2})?$/),
      fc.stringMatching(/^[+-]?\.\d{1,20}$/),
    );
    const signs = { tab: '\t', semicolon: ';', comma: ',', space: '   ' } as const;
    fc.assert(
      fc.property(
        fc.array(number, { minLength: 1, maxLength: 8 }),
        fc.constantFrom('tab', 'semicolon', 'comma', 'space'),
        fc.boolean(),
        (cells, separator, commas) => {
          const decimal = commas && separator !== 'comma' ? 'comma' : 'point';
          const text = cells.join(signs[separator]);
          expect(row(decimal === 'comma' ? text.replaceAll('.', ',') : text, separator, decimal)).toEqual(
            cells.map(Number),
          );
        },
      ),
      { numRuns: 2000 },
    );
  });

  test.each<[string, string, 'tab' | 'semicolon' | 'comma' | 'space', number[] | null]>([
    ['empty cells are without value', '1;;2;', 'semicolon', [1, NaN, 2, NaN]],
    ['blanks around cells', ' 1 ;\t2 ', 'semicolon', [1, 2]],
    ['runs of blanks and tabs', '  1 \t 2   3 ', 'space', [1, 2, 3]],
    ['a word', '1;OVER', 'semicolon', null],
    ['the other decimal mark', '1;0,5', 'semicolon', null],
    ['thousands marks', '1;1,234.5', 'semicolon', null],
    ['a quote', '1;"2"', 'semicolon', null],
    ['a sign alone', '1;-', 'semicolon', null],
    ['a point alone', '1;.', 'semicolon', null],
    ['more than a double holds', '1;1e999', 'semicolon', null],
    ['more cells than wanted', '1;2;3;4;5;6;7;8;9', 'semicolon', null],
  ])('%s', (_, text, separator, expected) => expect(row(text, separator)).toEqual(expected));
});
