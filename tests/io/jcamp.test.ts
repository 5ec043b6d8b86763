import { existsSync, readFileSync } from 'node:fs';
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { TankhueError } from '../../src/errors.ts';
import { decodeLine } from '../../src/io/jcampOrdinates.ts';
import type { ReadOptions } from '../../src/io/readOptions.ts';
import { parseSpectra } from '../../src/io/spectra.ts';

const ordinates = (line: string): number[] => {
  const decoded = decodeLine(line);
  if ('unreadable' in decoded) throw new Error(decoded.unreadable);
  return decoded.ordinates;
};

const read = (text: string, options: ReadOptions = {}) => parseSpectra(Buffer.from(text), 's.dx', '', options);

function refusal(text: string, options: ReadOptions = {}): TankhueError {
  try {
    read(text, options);
  } catch (error) {
    if (error instanceof TankhueError) return error;
    throw error;
  }
  return expect.unreachable('was read') as never;
}

// R. S. McDonald, P. A. Wilks, JCAMP-DX: a standard form for exchange of infrared spectra in computer readable form,
// Appl. Spectrosc. 1988, 42, 151-162 (protocol 4.24), table VIIb: one row of ordinates in every form.
describe('table VIIb of the standard', () => {
  test.each([
    ['FIX', '1 2 3 3 2 1 0 -1 -2 -3'],
    ['PAC', '1+2+3+3+2+1+0-1-2-3'],
    ['PAC with blanks', '1 2 3 3 2 1 0-1-2-3'],
    ['SQZ', '1BCCBA@abc'],
    ['DIF', '1JJ%jjjjjj'],
    ['DIFDUP', '1JT%jX'],
  ])('%s', (_, form) => {
    // The abscissa 0 and a blank stand before the published string.
    expect(ordinates(`0 ${form}`)).toEqual([1, 2, 3, 3, 2, 1, 0, -1, -2, -3]);
  });
});

// Same source, section 5.9: the count of a repeat includes the first.
test.each(['50 50 50 50', '50V', '50%%%', '50%U'])('%s is 50 four times', (form) => {
  expect(ordinates(`0 ${form}`)).toEqual([50, 50, 50, 50]);
});

// Same source, table VI: the same 53 ordinates in four forms. In the print of 1988 the DIFDUP strings have the letters l and O where the
// digits 1 and 0 belong (K1, J0); then the check ordinate fails.
const TABLE_VI = [
  0, 0, 0, 0, 2, 4, 4, 4, 7, 5, 4, 4, 5, 5, 7, 10, 11, 11, 6, 5, 7, 6, 9, 9, 7, 10, 10, 9, 10, 11, 12, 15, 16, 16, 14,
  17, 38, 38, 35, 38, 42, 47, 54, 59, 66, 75, 78, 88, 96, 104, 110, 121, 128,
];
const tableVi = (lines: string[], more = '') =>
  `##TITLE=table VI\n##JCAMP-DX=4.24\n##DATA TYPE=INFRARED SPECTRUM\n##XUNITS=1/CM\n##YUNITS=ABSORBANCE\n${more || '##XFACTOR=1.0\n'}##YFACTOR=0.001\n##FIRSTX=599.860\n##LASTX=700.158\n##NPOINTS=53\n##DELTAX=1.92881\n##FIRSTY=0.000\n##XYDATA=(X++(Y..Y))\n${lines.join('\n')}\n##END=\n`;
const DIFDUP = '@VKT%TLkj%J%KLJ%njKjL%kL%jJULJ%kLK1%lLMNPNPRLJ0QTOJ1P';

describe('table VI of the standard', () => {
  test.each([
    [
      'fixed',
      [
        '599.860 0 0 0 0 2 4 4 4 7',
        '617.220 5 4 4 5 5 7 10 11 11',
        '634.579 6 5 7 6 9 9 7 10 10',
        '651.938 9 10 11 12 15 16 16 14 17',
        '669.298 38 38 35 38 42 47 54 59 66',
        '686.657 75 78 88 96 104 110 121 128',
      ],
      '',
    ],
    [
      'packed',
      [
        '599.860 0 0 0 0 2 4 4 4 7 5 4 4 5 5 7 10 11 11 6 5 7 6 9 9 7',
        '648.081 10 10 9 10 11 12 15 16 16 14 17 38 38 35 38 42 47 54',
        '682.799 59 66 75 78 88 96 104 110 121 128',
      ],
      '',
    ],
    ['DIFDUP', [`599.860${DIFDUP}`, '700.158A28 $$ checkpoint'], ''],
    ['DIFDUP with scaled abscissae', [`311${DIFDUP}`, '363A28 $$ checkpoint'], '##XFACTOR=1.92881\n'],
  ])('%s', (_, lines, more) => {
    const { spectra, understood } = read(tableVi(lines, more), { axis: 'cm-1' });
    // Wavenumbers rise in the table, so wavelengths fall and the reader turns them round.
    const found = [...spectra[0]!.absorbance].reverse();
    found.forEach((value, i) => expect(value).toBeCloseTo(TABLE_VI[i]! / 1000, 12));
    expect(found).toHaveLength(53);
    expect(1e7 / spectra[0]!.wavelength[0]!).toBeCloseTo(700.158, 6);
    expect(understood.spectra[0]).toMatchObject({ points: 53, direction: 'rising', axisUnit: 'cm-1' });
  });

  test('infrared wavenumbers are refused without a word from the person: no cuvette lets them through', () => {
    expect(refusal(tableVi([`599.860${DIFDUP}`, '700.158A28']))).toMatchObject({
      code: 'axis-unit',
      where: 's.dx:4:1',
    });
  });

  test('the misprint of 1988 fails a check', () => {
    const misprint = DIFDUP.replace('K1%', 'Kl%').replace('J0Q', 'JOQ');
    expect(refusal(tableVi([`599.860${misprint}`, '700.158A28']), { axis: 'cm-1' })).toMatchObject({
      code: 'check-failed',
      where: 's.dx:15:1',
    });
  });
});

const uvVis = (lines: string[], records: Record<string, string | null> = {}) => {
  const all: Record<string, string | null> = {
    TITLE: 'own example',
    'JCAMP-DX': '4.24',
    'DATA TYPE': 'UV/VIS SPECTRUM',
    XUNITS: 'NANOMETERS',
    YUNITS: 'ABSORBANCE',
    XFACTOR: '1',
    YFACTOR: '0.001',
    FIRSTX: '400',
    LASTX: '403',
    NPOINTS: '4',
    FIRSTY: '0.010',
    ...records,
  };
  const head = Object.entries(all).filter(([, value]) => value !== null);
  const kind = records['XYPOINTS'] === undefined ? '##XYDATA=(X++(Y..Y))\n' : '';
  return `${head.map(([label, value]) => `##${label}=${value}`).join('\n')}\n${kind}${lines.join('\n')}\n##END=\n`;
};

/** Ordinates before YFACTOR, which is 0.001 in `uvVis`. */
const thousandths = (text: string): number[] =>
  [...read(text).spectra[0]!.absorbance].map((absorbance) => Number((absorbance * 1000).toFixed(9)));

// The rules of sections 5.4 to 5.11 of the same source, on lines of our own.
describe('checks', () => {
  test('after a line in difference form the next begins with a check ordinate, which is no point', () => {
    expect(thousandths(uvVis(['400A0J', '401A1KJ']))).toEqual([10, 11, 13, 14]);
  });

  test('a check ordinate that differs is refused, with what was expected', () => {
    expect(refusal(uvVis(['400A0J', '401A2KJ']))).toMatchObject({
      code: 'check-failed',
      where: 's.dx:14:1',
      message: 'expected the check ordinate 11; received 12',
    });
  });

  test('after a plain or squeezed line a new point follows', () => {
    expect(thousandths(uvVis(['400 10 11', '402 12 13']))).toEqual([10, 11, 12, 13]);
    expect(thousandths(uvVis(['400A0A1', '402A2A3']))).toEqual([10, 11, 12, 13]);
  });

  test('a question mark is a missing ordinate, and what follows it is a value', () => {
    expect(thousandths(uvVis(['400A0J?A3']))).toEqual([10, 11, NaN, 13]);
    expect(read(uvVis(['400A0J?A3'])).understood.spectra[0]).toMatchObject({ missing: 1 });
  });

  test('an exponent needs its sign; E5 without is the squeezed 55', () => {
    expect(ordinates('400 1.0E+01 2.5E-01')).toEqual([10, 0.25]);
    expect(ordinates('400E5e5')).toEqual([55, -55]);
  });

  test.each<[string, string, string, string]>([
    ['a point too few', uvVis(['400 10 11 12']), 'points-missing', 's.dx:13:1'],
    ['a point too many', uvVis(['400 10 11 12 13 14']), 'points-missing', 's.dx:13:1'],
    ['a line that is missing', uvVis(['400 10', '402 12 13 14'], { NPOINTS: '4' }), 'check-failed', 's.dx:14:1'],
    [
      'LASTX that does not fit the lines',
      uvVis(['400 10 11', '402 12 13'], { LASTX: '415' }),
      'check-failed',
      's.dx:14:1',
    ],
    ['DELTAX that does not fit', uvVis(['400 10 11 12 13'], { DELTAX: '2' }), 'check-failed', 's.dx:12:1'],
    ['FIRSTY that does not fit', uvVis(['400 10 11 12 13'], { FIRSTY: '0.5' }), 'check-failed', 's.dx:11:1'],
    ['YFACTOR that does not fit', uvVis(['400 10 11 12 13'], { YFACTOR: '0.01' }), 'check-failed', 's.dx:11:1'],
    ['no NPOINTS', uvVis(['400 10 11 12 13'], { NPOINTS: null }), 'record-missing', 's.dx:12:1'],
    ['no FIRSTX', uvVis(['400 10 11 12 13'], { FIRSTX: null }), 'record-missing', 's.dx:12:1'],
    ['FIRSTX that is no number', uvVis(['400 10 11 12 13'], { FIRSTX: 'blue' }), 'not-a-number', 's.dx:8:1'],
    ['letters of no form', uvVis(['400 10 !! 12 13']), 'not-a-number', 's.dx:13:1'],
    ['a repeat of nothing', uvVis(['400V10']), 'not-a-number', 's.dx:13:1'],
    ['a difference from nothing', uvVis(['400J 10 11 12']), 'not-a-number', 's.dx:13:1'],
    ['no table', '##TITLE=x\n##JCAMP-DX=4.24\n##END=\n', 'no-numbers', 's.dx'],
    ['peaks only', '##TITLE=x\n##XUNITS=NANOMETERS\n##PEAK TABLE=(XY..XY)\n400, 1\n##END=\n', 'no-numbers', 's.dx'],
    ['no end', uvVis(['400 10 11 12 13']).replace('##END=\n', ''), 'block-open', 's.dx:13:1'],
    ['no title', '##JCAMP-DX=4.24\n##END=\n', 'block-open', 's.dx:1:1'],
    ['another axis', uvVis(['400 10 11 12 13'], { XUNITS: 'SECONDS' }), 'axis-unit', 's.dx:4:1'],
    ['another ordinate', uvVis(['400 10 11 12 13'], { YUNITS: 'REFLECTANCE' }), 'value-unit', 's.dx:5:1'],
    [
      'points that turn',
      uvVis(['400, 10; 402, 11; 401, 12; 403, 13'], { XYPOINTS: '(XY..XY)' }),
      'axis-turns',
      's.dx:13:1',
    ],
    ['half a pair', uvVis(['400, 10; 402'], { XYPOINTS: '(XY..XY)' }), 'not-a-number', 's.dx:13:1'],
    ['pairs too few', uvVis(['400, 10; 403, 11'], { XYPOINTS: '(XY..XY)' }), 'points-missing', 's.dx:13:1'],
    [
      'pairs off LASTX',
      uvVis(['400, 10; 401, 10; 402, 10; 409, 11'], { XYPOINTS: '(XY..XY)' }),
      'check-failed',
      's.dx:9:1',
    ],
  ])('%s is refused', (_, text, code, where) => {
    expect(refusal(text)).toMatchObject({ code, where });
  });
});

describe('units and blocks', () => {
  test('units of axis and ordinate', () => {
    const um = read(uvVis(['0.4 10 11 12 13'], { XUNITS: 'MICROMETERS', FIRSTX: '0.4', LASTX: '0.403' })).spectra[0]!;
    [400, 401, 402, 403].forEach((nm, i) => expect(um.wavelength[i]).toBeCloseTo(nm, 9));
    const percent = uvVis(['400 100 10 1 0'], { YUNITS: 'PERCENT TRANSMITTANCE', YFACTOR: '1', FIRSTY: '100' });
    expect([...read(percent).spectra[0]!.absorbance]).toEqual([0, 1, 2, NaN]);
    const fraction = uvVis(['400 1000 100 10 1'], { YUNITS: 'TRANSMITTANCE', FIRSTY: '1' });
    [0, 1, 2, 3].forEach((a, i) => expect(read(fraction).spectra[0]!.absorbance[i]).toBeCloseTo(a, 12));
    const cm = read(uvVis(['25000 10 11 12 13'], { XUNITS: '1/CM', FIRSTX: '25000', LASTX: '24997' })).spectra[0]!;
    expect(cm.wavelength[0]).toBe(400);
    expect(cm.absorbance[0]).toBe(0.01);
  });

  test('labels are equal whatever their case, blanks and dashes; comments are not read', () => {
    const text = uvVis(['400 10 11 $$ 12', '402 12 13'])
      .replace('##XUNITS=', '##x-units =')
      .replace('##NPOINTS=4', '##N POINTS=4 $$ four');
    expect(read(text).spectra[0]!.absorbance).toHaveLength(4);
  });

  test('the path length is kept as information', () => {
    expect(read(uvVis(['400 10 11 12 13'], { PATHLENGTH: '0.1 $$ cm' })).understood.stated).toEqual({
      'path length (cm)': '0.1',
    });
  });

  test('XYDATA of pairs is read as pairs', () => {
    const text = uvVis(['400, 10; 401, 11', '402.5, 12', '403, 13']).replace('(X++(Y..Y))', '(XY..XY)');
    expect([...read(text).spectra[0]!.wavelength]).toEqual([400, 401, 402.5, 403]);
  });
});

const REFERENCE = '../shared/references/jcamp.json';
const reference = existsSync(REFERENCE) ? JSON.parse(readFileSync(REFERENCE, 'utf8')) : { own_examples: [] };

describe.skipIf(!existsSync(REFERENCE))('whole files in ../shared/references (skipped where they are not)', () => {
  type Example = { name: string; text?: string; wavelength_nm?: number[]; absorbance?: number[]; blocks?: Example[] };
  const examples = (reference.own_examples as Example[]).filter((one) => one.text !== undefined);
  test.each(examples)('$name', ({ text, wavelength_nm, absorbance, blocks }) => {
    const { spectra } = read(text!);
    const expected = blocks ?? [{ name: '', wavelength_nm, absorbance }];
    expect(spectra).toHaveLength(expected.length);
    for (const [i, { wavelength_nm: nm, absorbance: a }] of expected.entries()) {
      const turned = nm![1]! < nm![0]!;
      const found = [...spectra[i]!.wavelength].map((x, j) => [x, spectra[i]!.absorbance[j]!] as const);
      if (turned) found.reverse();
      found.forEach(([x, y], j) => {
        expect(x).toBeCloseTo(nm![j]!, 9);
        expect(y).toBeCloseTo(a![j]!, 11);
      });
      expect(found).toHaveLength(nm!.length);
    }
  });
});

/** Ordinates in difference form with repeats, as section 5 of the standard writes them; ours, for round trips. */
function difdup(x: number, values: readonly number[]): string {
  const pseudo = (value: number, plus: string, minus: string): string => {
    const digits = String(Math.abs(value));
    return (value < 0 ? minus[Number(digits[0]) - 1]! : plus[Number(digits[0])]!) + digits.slice(1);
  };
  const stepAt = (i: number): number => values[i]! - values[i - 1]!;
  let line = x + pseudo(values[0]!, '@ABCDEFGHI', 'abcdefghi');
  for (let i = 1; i < values.length;) {
    const step = stepAt(i);
    let same = 1;
    while (i + same < values.length && stepAt(i + same) === step) same++;
    line += pseudo(step, '%JKLMNOPQR', 'jklmnopqr');
    if (same > 1) line += `STUVWXYZs`[Number(String(same)[0]) - 1]! + String(same).slice(1);
    i += same;
  }
  return line;
}

test('what is written in difference form with repeats is read back', () => {
  const values = fc.array(fc.integer({ min: -3, max: 3 }), { minLength: 30, maxLength: 200 });
  fc.assert(
    fc.property(values, fc.integer({ min: -500, max: 500 }), (steps, first) => {
      const expected = steps.reduce<number[]>((all, step) => [...all, all.at(-1)! + step * 7], [first]);
      const cut = Math.floor(expected.length / 2);
      const lines = [
        difdup(400, expected.slice(0, cut)),
        difdup(400 + cut - 1, expected.slice(cut - 1)),
        difdup(400 + expected.length - 1, expected.slice(-1)),
      ];
      const text = uvVis(lines, {
        LASTX: String(399 + expected.length),
        NPOINTS: String(expected.length),
        FIRSTY: null,
        YFACTOR: '1E-3',
      });
      expect([...read(text).spectra[0]!.absorbance].map((a) => Math.round(a * 1000) + 0)).toEqual(expected);
    }),
    { numRuns: 200 },
  );
});
