import { describe, expect, test } from 'vitest';
import { findColumn, parseSpectra } from '../../src/io/spectra.ts';
import type { ReadOptions } from '../../src/io/readOptions.ts';
import { understoodText } from '../../src/io/understood.ts';

const read = (text: string, options: ReadOptions = {}) => parseSpectra(Buffer.from(text), 'scan.csv', '', options);
const curve = (text: string, options?: ReadOptions) => {
  const { spectra } = read(text, options);
  expect(spectra).toHaveLength(1);
  return [...spectra[0]!.wavelength].map((nm, i) => [nm, Number(spectra[0]!.absorbance[i]!.toFixed(9))]);
};

describe('one spectrum', () => {
  test.each([
    ['no header', '400,0.1\n401,0.2\n402,0.35\n'],
    ['no line end at the end', '400,0.1\n401,0.2\n402,0.35'],
    ['a caption', 'Wavelength (nm),Absorbance\n400,0.1\n401,0.2\n402,0.35\n'],
    ['captions in brackets', 'Wavelength [nm];Abs [A]\n400;0,1\n401;0,2\n402;0,35\n'],
    ['names over units', 'cell 3;\nnm;A\n400;0,1\n401;0,2\n402;0,35\n'],
    [
      'a long header',
      `${'Instrument\tinvented 5\nDate\t2025-01-01\n\nSlit\t1,5\n'.repeat(40)}nm\tA\n400\t0.1\n401\t0.2\n402\t0.35\n`,
    ],
    ['a comment mark', '# nm, A\n400, 0.1\n401, 0.2\n402, 0.35\n'],
    ['a rule under the captions', 'nm     A\n------ -----\n400.0  0.1\n401.0  0.2\n402.0  0.35\n'],
    ['blank lines between rows', 'nm,A\n\n400,0.1\n\n401,0.2\n\n402,0.35\n\n'],
    ['separators at line ends', 'nm,A,,\n400,0.1,,\n401,0.2,,\n402,0.35,,\n'],
    ['falling', 'nm,A\n402,0.35\n401,0.2\n400,0.1\n'],
    ['exponents', 'nm A\n4.00e2 1E-1\n4.01e+02 2.0E-01\n.402E3 3.5e-1\n'],
    ['signs', 'nm;A\n+400;+0,1\n+401;+0,2\n+402;+0,35\n'],
    ['quotes', '"nm","A"\n"400","0.1"\n"401","0.2"\n"402","0.35"\n'],
    ['quotes around decimal commas', '"nm","A"\n"400,0","0,1"\n"401,0","0,2"\n"402,0","0,35"\n'],
    ['a numbered first column', 'No.,Wavelength (nm),Abs\n1,400,0.1\n2,401,0.2\n3,402,0.35\n'],
    ['milliabsorbance', 'nm,mAU\n400,100\n401,200\n402,350\n'],
    [
      'wavenumbers',
      `cm-1,A\n${[402, 401, 400].map((nm) => `${1e7 / nm},${{ 400: 0.1, 401: 0.2, 402: 0.35 }[nm]}`).join('\n')}\n`,
    ],
    ['micrometres', 'µm A\n0.400 0.1\n0.401 0.2\n0.402 0.35\n'],
    ['one row of whole milliabsorbances', 'mAU,400,401,402\ncell 3,100,200,350\n'],
    ['one row', 'sample,400,401,402\ncell 3,0.1,0.2,0.35\n'],
    ['one row with units', 'sample;400 nm;401 nm;402 nm\ncell 3;0,1;0,2;0,35\n'],
    ['a footer that begins with a number', 'nm A\n400 0.1\n401 0.2\n402 0.35\n\n3 points\n2025-01-01 end\n'],
    ['the axis in prose', 'X units: micrometers\nY units: absorbance\n0.400 0.1\n0.401 0.2\n0.402 0.35\n'],
    ['per cent in prose about something else', 'Baseline: 100 %T at 700 nm\nnm,A\n400,0.1\n401,0.2\n402,0.35\n'],
    ['the unit in prose', 'Y mode: mA\nX: wavelength\n400 100\n401 200\n402 350\n'],
  ])('%s', (_, text) => {
    const points = curve(text);
    expect(points.map(([, absorbance]) => absorbance)).toEqual([0.1, 0.2, 0.35]);
    points.forEach(([nm], i) => expect(nm).toBeCloseTo(400 + i, 9));
  });

  test('transmittance of any kind becomes absorbance', () => {
    const expected = [
      [400, 1],
      [401, 2],
    ];
    expect(curve('nm,%T\n400,10\n401,1\n')).toEqual(expected);
    expect(curve('nm,T (%)\n400,10\n401,1\n')).toEqual(expected);
    expect(curve('nm,Transmittance\n400,10\n401,1\n')).toEqual(expected);
    expect(curve('nm,Transmittance\n400,0.1\n401,0.01\n')).toEqual(expected);
    expect(curve('nm,T\n400,0.1\n401,0.01\n')).toEqual(expected);
    expect(curve('400,10.0\n401,1.0\n', { unit: '%T' })).toEqual(expected);
    expect(curve('400,0.1\n401,0.01\n', { unit: 'T' })).toEqual(expected);
  });
});

describe('points without a value', () => {
  test.each(['OVER', 'over', 'Overflow', '****', '>3.0', '> 3,5', 'inf', '+Inf', 'Infinity', '#####', 'SAT', '<-1'])(
    '%s is over range',
    (mark) => {
      const { spectra, understood } = read(`nm;A\n400;0,1\n401;${mark}\n402;0,3\n`);
      expect([...spectra[0]!.absorbance]).toEqual([0.1, NaN, 0.3]);
      expect(understood.spectra[0]).toMatchObject({ overRange: 1, missing: 0, noLight: 0 });
    },
  );

  test.each(['', '---', '-', 'NaN', 'n/a', '#N/A', 'null'])('"%s" is missing', (mark) => {
    const { spectra, understood } = read(`nm;A;\n400;0,1;\n401;${mark};\n402;0,3;\n`);
    expect([...spectra[0]!.absorbance]).toEqual([0.1, NaN, 0.3]);
    expect(understood.spectra[0]).toMatchObject({ overRange: 0, missing: 1, noLight: 0 });
  });

  test('transmittance of 0 or below has no absorbance and is counted', () => {
    const { spectra, understood } = read('nm,%T\n400,10\n401,0\n402,-0.02\n403,100\n');
    expect([...spectra[0]!.absorbance]).toEqual([1, NaN, NaN, 0]);
    expect(understood.spectra[0]).toMatchObject({ noLight: 2 });
    expect(understoodText('scan.csv', understood)).toContain('2 without light');
  });

  test('an over-range mark counts in its own column and its own row only', () => {
    const columns = read('nm,a,b\n400,OVER,0.1\n401,0.2,0.3\n402,OVER,0.3\n').understood.spectra;
    expect(columns.map((one) => one.overRange)).toEqual([2, 0]);
    const rows = read('name,400,401,402\na,OVER,0.1,****\nb,0.2,0.3,0.4\n').understood.spectra;
    expect(rows.map((one) => one.overRange)).toEqual([2, 0]);
  });
});

describe('several spectra', () => {
  test('one axis, units differ from column to column', () => {
    const { spectra, understood } = read(
      'Wavelength (nm),a (A),b (%T),c (mAU),d (T)\n400,0.1,10,100,0.1\n401,0.2,1,200,0.01\n',
    );
    expect(spectra.map(({ absorbance }) => [...absorbance])).toEqual([
      [0.1, 0.2],
      [1, 2],
      [0.1, 0.2],
      [1, 2],
    ]);
    expect(understood.spectra.map(({ unit }) => unit)).toEqual(['A', '%T', 'mA', 'T']);
    expect(spectra.map(({ name }) => name)).toEqual(['a (A)', 'b (%T)', 'c (mAU)', 'd (T)']);
  });

  test('columns named A, B and T are names, not units', () => {
    const { understood } = read('nm,A,B,T\n400,0.1,0.2,0.3\n401,0.2,0.2,0.3\n');
    expect(understood.spectra).toMatchObject([
      { name: 'A', unit: 'A' },
      { name: 'B', unit: 'A' },
      { name: 'T', unit: 'A' },
    ]);
    expect(understood.assumed).toContain('values are absorbance: no caption names another unit');
  });

  test('per cents in a name are no unit', () => {
    const { understood } = read('nm,V2 50%,T 100%\n400,0.1,0.2\n401,0.2,0.2\n');
    expect(understood.spectra.map(({ unit }) => unit)).toEqual(['A', 'A']);
  });

  test('pairs, each with its own axis and length', () => {
    const { spectra, understood } = read('first,,second,\nnm,A,nm,A\n400,0.1,700,0.5\n401,0.2,690,0.6\n402,0.3\n');
    expect(understood.layout).toBe('pairs');
    expect(spectra.map(({ name, wavelength, absorbance }) => [name, [...wavelength], [...absorbance]])).toEqual([
      ['first', [400, 401, 402], [0.1, 0.2, 0.3]],
      ['second', [690, 700], [0.6, 0.5]],
    ]);
    expect(understood.spectra.map(({ direction }) => direction)).toEqual(['rising', 'falling']);
  });

  test('pairs are seen without captions, from axes that rise', () => {
    expect(read('400,0.1,400,0.5\n401,0.2,401,0.4\n402,0.3,402,0.6\n').understood.layout).toBe('pairs');
  });

  test('rows with a time in front', () => {
    const { spectra, understood } = read('time_s;400;401,5;403\n0;0,1;0,2;0,3\n1;0,1;;0,4\n');
    expect(understood).toMatchObject({ layout: 'rows', decimal: 'comma' });
    expect(spectra.map(({ name, absorbance }) => [name, ...absorbance])).toEqual([
      ['0', 0.1, 0.2, 0.3],
      ['1', 0.1, NaN, 0.4],
    ]);
  });

  test('the person decides between rows and columns', () => {
    const text = '0,400,500,600\n100,0.1,0.2,0.3\n200,0.2,0.3,0.4\n';
    expect(read(text, { layout: 'rows' }).spectra.map(({ wavelength }) => [...wavelength])).toEqual([
      [400, 500, 600],
      [400, 500, 600],
    ]);
  });

  test('a column is found by its name', () => {
    const { spectra } = read('nm,negative,positive\n400,0.1,0.2\n401,0.2,0.2\n');
    expect(findColumn(spectra, ' positive ', 'sheet').absorbance[0]).toBe(0.2);
    expect(() => findColumn(spectra, 'positiv', 'samples.csv:2:4')).toThrow(
      expect.objectContaining({ code: 'column-unknown', where: 'samples.csv:2:4', hint: 'did you mean "positive"?' }),
    );
    expect(() => findColumn(spectra, null, 'samples.csv:2:4')).toThrow(
      expect.objectContaining({ code: 'column-unclear', hint: 'say which: negative, positive' }),
    );
    const half = read('nm,dark,clear\n400,OVER,0.2\n401,OVER,0.2\n').spectra;
    expect(findColumn(half, 'clear', 'x').absorbance[0]).toBe(0.2);
    expect(() => findColumn(half, 'dark', 'samples.csv:2:4')).toThrow(
      expect.objectContaining({ code: 'no-values', where: 'samples.csv:2:4' }),
    );
    const twins = read('nm,a,a\n400,0.1,0.2\n401,0.2,0.2\n').spectra;
    expect(() => findColumn(twins, 'a', 'x')).toThrow(expect.objectContaining({ code: 'column-unclear' }));
  });
});

test('what was understood is said', () => {
  const { understood } = read('Größe: 1\nnm;probe 1;probe 2\n402;OVER;0,5\n401;0,2;0,4\n400;0,1;0,3\n\nend\n');
  expect(understoodText('neg.csv', understood)).toBe(
    [
      'neg.csv: 2 spectra; delimited text, UTF-8, separator semicolon, decimal comma, layout columns, 2 lines above, 1 line below',
      '  probe 1: 3 points, 400.0 to 402.0 nm every 1.00 nm, falling, read as A; points without a value: 1 over range',
      '  probe 2: 3 points, 400.0 to 402.0 nm every 1.00 nm, falling, read as A',
      '  assumed: values are absorbance: no caption names another unit',
    ].join('\n'),
  );
});
