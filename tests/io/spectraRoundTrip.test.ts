import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { parseSpectra, parseSpectraChunks } from '../../src/io/spectra.ts';
import { encoded, writtenText, type WrittenForm } from './writtenSpectra.ts';

const form = fc
  .record({
    separator: fc.constantFrom('tab', 'semicolon', 'comma', 'space'),
    decimal: fc.constantFrom('point', 'comma'),
    quotes: fc.boolean(),
    encoding: fc.constantFrom('UTF-8', 'UTF-8 with mark', 'UTF-16LE', 'UTF-16BE', 'UTF-16LE without mark', 'Latin-1'),
    lineEnd: fc.constantFrom('\n', '\r\n', '\r'),
    direction: fc.constantFrom('rising', 'falling'),
    axis: fc.constantFrom('nm', 'cm-1'),
    unit: fc.constantFrom('A', 'mA', '%T', 'T'),
    layout: fc.constantFrom('columns', 'pairs', 'rows'),
    prose: fc.constantFrom(
      [],
      ['Instrument: invented', 'Date;2025-01-01;08:30', 'Größe, 12,5 µm', ''],
      ['1, 2, 3', 'Scan range 400-700 nm, 100 %T corrected', 'Lamp change 340,5'],
    ),
    footer: fc.constantFrom([], ['', 'End of data'], ['Checksum: 1F3A', 'Operator,someone,signed']),
  })
  // Blanks need no quotes; a comma that is both marks needs a person (tested apart) or quotes.
  .filter((one) => !(one.separator === 'space' && one.quotes))
  .filter((one) => !(one.separator === 'comma' && one.decimal === 'comma' && !one.quotes)) as fc.Arbitrary<WrittenForm>;

const axis = fc
  .tuple(fc.integer({ min: 20000, max: 60000 }), fc.integer({ min: 10, max: 900 }), fc.integer({ min: 6, max: 40 }))
  .map(([first, step, count]) => Array.from({ length: count }, (_, i) => (first + i * step) / 100));

const curves = (count: number): fc.Arbitrary<{ name: string; absorbance: number[] }[]> =>
  fc
    .array(fc.array(fc.double({ min: 0.02, max: 2.5, noNaN: true }), { minLength: count, maxLength: count }), {
      minLength: 1,
      maxLength: 4,
    })
    .map((all) => all.map((absorbance, i) => ({ name: `cuvette-${'ABCD'[i]}`, absorbance })));

const written = axis.chain((wavelength) =>
  fc.record({ wavelength: fc.constant(wavelength), curves: curves(wavelength.length), form }),
);

describe('what is written in any form is read back', () => {
  test('every dialect × encoding × line end × direction × unit × layout', () => {
    fc.assert(
      fc.property(written, ({ wavelength, curves, form }) => {
        const bytes = encoded(writtenText(wavelength, curves, form), form.encoding);
        const { spectra, understood } = parseSpectra(bytes, 'scan.csv', 'hash');
        expect(spectra.map(({ name }) => name)).toEqual(curves.map(({ name }) => name));
        expect(understood).toMatchObject({
          separator: form.separator,
          decimal: form.decimal,
          layout: form.layout === 'pairs' && curves.length === 1 ? 'columns' : form.layout,
          footerLines: form.footer.filter(Boolean).length,
        });
        for (const [i, spectrum] of spectra.entries()) {
          expect(understood.spectra[i]).toMatchObject({
            unit: form.unit,
            axisUnit: form.axis,
            direction: form.direction,
          });
          expect(spectrum.origin).toEqual({ file: 'scan.csv', column: curves[i]!.name, sha256: 'hash' });
          wavelength.forEach((nm, j) => {
            expect(spectrum.wavelength[j]).toBeCloseTo(nm, 5);
            expect(spectrum.absorbance[j]).toBeCloseTo(curves[i]!.absorbance[j]!, 6);
          });
        }
      }),
      { numRuns: 400 },
    );
  });

  test('in pieces of any size it is the same', () => {
    fc.assert(
      fc.property(written, fc.integer({ min: 300, max: 4000 }), ({ wavelength, curves, form }, size) => {
        const bytes = encoded(writtenText(wavelength, curves, form), form.encoding);
        const pieces = Array.from({ length: Math.ceil(bytes.length / size) }, (_, i) =>
          bytes.subarray(i * size, (i + 1) * size),
        );
        expect(parseSpectraChunks(pieces, 'scan.csv')).toEqual(parseSpectraChunks([bytes], 'scan.csv'));
      }),
      { numRuns: 100 },
    );
  });

  test('a decimal comma between commas is read when a person says so', () => {
    fc.assert(
      fc.property(written, ({ wavelength, curves, form: any }) => {
        const form = {
          ...any,
          separator: 'comma',
          decimal: 'comma',
          quotes: false,
          layout: 'columns',
          prose: [],
          footer: [],
        } as const;
        const bytes = encoded(
          writtenText(wavelength, curves, form).split(form.lineEnd).slice(2).join(form.lineEnd),
          form.encoding,
        );
        const read = parseSpectra(bytes, 'scan.csv', '', { decimal: 'comma', unit: form.unit, axis: form.axis });
        for (const [i, spectrum] of read.spectra.entries())
          wavelength.forEach((_, j) => expect(spectrum.absorbance[j]).toBeCloseTo(curves[i]!.absorbance[j]!, 6));
        expect(() => parseSpectra(bytes, 'scan.csv', '', { unit: form.unit, axis: form.axis })).toThrow(
          expect.objectContaining({ code: 'decimal-mark' }),
        );
      }),
      { numRuns: 60 },
    );
  });
});
