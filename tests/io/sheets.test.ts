import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { TankhueError, TankhueErrors } from '../../src/errors.ts';
import { readSamplesSheet } from '../../src/io/samplesSheet.ts';
import { readStandardsSheet } from '../../src/io/standardsSheet.ts';
import { readTanksSheet } from '../../src/io/tanksSheet.ts';
import { encoded } from './writtenSpectra.ts';

const samples = (text: string | Uint8Array) => readSamplesSheet(Buffer.from(text as string), 'samples.csv');
const standards = (text: string) => readStandardsSheet(Buffer.from(text), 'standards.csv');
const tanks = (text: string) => readTanksSheet(Buffer.from(text), 'tanks.csv');

function refusals(read: () => unknown): readonly TankhueError[] {
  try {
    read();
  } catch (error) {
    if (error instanceof TankhueErrors) return error.all;
    if (error instanceof TankhueError) return [error];
    throw error;
  }
  return expect.unreachable('was read') as never;
}

describe('a samples sheet', () => {
  test('gives typed rows: cm, K, ms, null where nobody said', () => {
    const { rows, problems, unknownColumns } = samples(
      'sample,system,side,file,column,path_mm,path_u_mm,dilution,dilution_u,temperature_C,taken_at,scanned_at,inert_gas,note\n' +
        'N1,alder-ford,negative,neg.csv,,1,0.01,20,0.2,22.5,2025-03-31T09:40,2025-03-31 09:55:30Z,yes,\n' +
        'P1,alder-ford,Positive,pos.csv,cell 2,0.2,,,,,2025-03-31T09:40+02:00,,no,"two, or three"\n',
    );
    expect(problems).toEqual([]);
    expect(unknownColumns).toEqual([]);
    expect(rows[0]).toMatchObject({
      name: 'N1',
      system: 'alder-ford',
      side: 'negative',
      column: null,
      pathLength: 0.1,
      pathUncertainty: 0.001,
      dilution: 20,
      dilutionUncertainty: 0.01,
      temperature: 295.65,
      takenAt: Date.UTC(2025, 2, 31, 9, 40),
      scannedAt: Date.UTC(2025, 2, 31, 9, 55, 30),
      inertGas: true,
      note: null,
      replicateOf: null,
      where: 'samples.csv:2',
    });
    expect(rows[1]).toMatchObject({
      side: 'positive',
      column: 'cell 2',
      pathLength: 0.02,
      pathUncertainty: null,
      dilution: null,
      temperature: null,
      takenAt: Date.UTC(2025, 2, 31, 7, 40),
      inertGas: false,
      note: 'two, or three',
    });
  });

  test('is the same in any order of columns, separator, encoding and line end', () => {
    const columns = ['sample', 'side', 'file', 'path_mm', 'note'] as const;
    const rows = [
      { sample: 'N1', side: 'negative', file: 'neg.csv', path_mm: 0.5, note: 'clear; cold, "new"\nlamp' },
      { sample: 'P1', side: 'positive', file: 'pös.csv', path_mm: 0.2, note: '' },
    ];
    const order = fc.shuffledSubarray([...columns], { minLength: columns.length });
    const encodings = ['UTF-8', 'UTF-8 with mark', 'UTF-16LE', 'UTF-16BE', 'Latin-1'] as const;
    fc.assert(
      fc.property(
        order,
        fc.constantFrom(',', ';', '\t'),
        fc.constantFrom('.', ','),
        fc.constantFrom(...encodings),
        fc.constantFrom('\n', '\r\n', '\r'),
        (names, separator, decimal, encoding, end) => {
          const quote = (text: string): string => `"${text.replace(/"/g, '""').replace(/\n/g, end)}"`;
          const lines = rows.map((row) =>
            names
              .map((name) => quote(String(row[name]).replace(name === 'path_mm' ? '.' : /(?!)/, decimal)))
              .join(separator),
          );
          const bytes = encoded([names.join(separator), ...lines, ''].join(end), encoding);
          const read = samples(bytes);
          expect(read.problems).toEqual([]);
          expect(read.rows.map(({ name, file, pathLength, note }) => [name, file, pathLength, note])).toEqual([
            ['N1', 'neg.csv', 0.05, 'clear; cold, "new"\nlamp'],
            ['P1', 'pös.csv', 0.02, null],
          ]);
        },
      ),
      { numRuns: 150 },
    );
  });

  test('unknown columns are reported, cells that look like formulas stay text, and __proto__ is a name like others', () => {
    const { rows, unknownColumns } = samples('sample,side,file,__proto__,operator\n=1+1,negative,@neg.csv,x,y\n');
    expect(unknownColumns).toEqual(['__proto__', 'operator']);
    expect(rows[0]).toMatchObject({ name: '=1+1', file: '@neg.csv' });
    expect(Object.getPrototypeOf(rows[0])).toBe(Object.prototype);
  });

  test('a bad row is set aside with all that is wrong in it; the others stand', () => {
    const { rows, problems } = samples(
      'sample,side,file,path_mm,dilution,taken_at\nN1,negativ,neg.csv,-1,0.5,31.3.2025\nP1,positive,pos.csv,1,1,\n,positive,,1mm,1,\n',
    );
    expect(rows.map(({ name }) => name)).toEqual(['P1']);
    expect(
      problems.map((problem) => (problem as TankhueErrors).all.map(({ code, where }) => `${code} ${where}`)),
    ).toEqual([
      [
        'unknown-side samples.csv:2:2',
        'out-of-range samples.csv:2:4',
        'out-of-range samples.csv:2:5',
        'not-a-time samples.csv:2:6',
      ],
      ['name-missing samples.csv:4:1', 'file-missing samples.csv:4:3', 'out-of-range samples.csv:4:4'],
    ]);
  });

  test.each([
    ['infinity', 'inf'],
    ['more than a double holds', '1e999'],
    ['hexadecimal', '0x10'],
    ['two marks', '1.2.3'],
    ['a unit', '1 mm'],
  ])('%s is no path', (_, path) => {
    expect(samples(`sample,side,file,path_mm\nN1,negative,n.csv,${path}\n`).problems).toHaveLength(1);
  });

  test('a comma that could set off thousands is refused with both readings, unless other cells show what it means', () => {
    const [problem] = samples('sample;side;file;dilution\nN1;negative;n.csv;1,234\n').problems;
    expect(problem).toMatchObject({
      code: 'decimal-mark',
      where: 'samples.csv:2:4',
      hint: 'write 1234 or 1.234, whichever is meant',
    });
    expect(samples('sample;side;file;dilution;path_mm\nN1;negative;n.csv;1,234;0,5\n').rows[0]).toMatchObject({
      dilution: 1.234,
    });
    expect(samples('sample;side;file;dilution;path_mm\nN1;negative;n.csv;1.234;0,5\n').problems).toMatchObject([
      { code: 'decimal-mark', hint: 'write 1234 or 1,234, whichever is meant' },
    ]);
    expect(samples('sample,side,file,dilution\nN1,negative,n.csv,1.234\n').rows[0]).toMatchObject({ dilution: 1.234 });
  });

  test('a name that comes twice is refused in the second row', () => {
    const { rows, problems } = samples('sample,side,file\nN1,negative,a.csv\nN1,negative,b.csv\n');
    expect(rows).toHaveLength(1);
    expect(problems).toMatchObject([{ code: 'name-repeats', where: 'samples.csv:3:1' }]);
  });

  test.each<[string, string, string, string]>([
    [
      'a unit that is not the fixed one',
      'sample,side,file,path_cm\nN1,negative,n.csv,0.1\n',
      'column-unit',
      'samples.csv:1:4',
    ],
    [
      'a temperature in kelvin',
      'sample,side,file,temperature_K\nN1,negative,n.csv,298\n',
      'column-unit',
      'samples.csv:1:4',
    ],
    ['a name in other letters', 'sample,side,file,Path_MM\nN1,negative,n.csv,1\n', 'column-name', 'samples.csv:1:4'],
    [
      'a column twice',
      'sample,side,file,path_mm,path_mm\nN1,negative,n.csv,1,2\n',
      'column-repeats',
      'samples.csv:1:5',
    ],
    ['no column for the side', 'sample,file\nN1,n.csv\n', 'column-missing', 'samples.csv:1'],
    ['no header', 'N1,negative,n.csv\n', 'header-missing', 'samples.csv:1:1'],
    ['a header alone', 'sample,side,file\n\n', 'no-rows', 'samples.csv:1:1'],
    ['a row too short', 'sample,side,file\nN1,negative\nP1,positive,p.csv\n', 'row-ragged', 'samples.csv:2:1'],
    ['a row too long', 'sample,side,file,path_mm\nN1,negative,n.csv,0,5\n', 'row-ragged', 'samples.csv:2:1'],
    ['an open quote', 'sample,side,file\n"N1,negative,n.csv\nP1,positive,p.csv\n', 'quote-open', 'samples.csv:2:1'],
  ])('%s is refused', (_, text, code, where) => {
    expect(refusals(() => samples(text))[0]).toMatchObject({ code, where });
  });

  test.each([
    ['nothing', '', 'file-empty'],
    ['bytes', '\u0001\u0002\u0003', 'binary'],
  ])('%s is refused', (_, text, code) => {
    expect(() => samples(text)).toThrow(expect.objectContaining({ code, where: 'samples.csv' }));
  });

  test('all problems of a header come together, with the nearest name', () => {
    const all = refusals(() => samples('sampel,side,path_cm\nN1,negative,1\n'));
    expect(all.map(({ code }) => code)).toEqual(['column-unit', 'column-missing', 'column-missing']);
    expect(all[1]!.hint).toBe('did you mean it by "sampel"? rename it');
  });

  test('lines are counted through quoted line breaks and blank lines', () => {
    const { problems } = samples('\nsample,side,file,note\nN1,negative,n.csv,"a\nb\n"\n\nP1,plus,p.csv,\n');
    expect(problems).toMatchObject([{ code: 'unknown-side', where: 'samples.csv:7:2' }]);
  });
});

describe('a standards sheet', () => {
  const header = 'standard,file,path_mm,V2_mol_L,V3_mol_L,role\n';

  test('gives typed rows', () => {
    const { rows } = standards(`${header}a,a.csv,1,0.8,0.8,\nb,b.csv,0.1,,1.6,check\n`);
    expect(rows).toMatchObject([
      {
        name: 'a',
        pathLength: 0.1,
        dilution: 1,
        concentration: { V2: 0.8, V3: 0.8, V4: 0, V5: 0 },
        role: 'calibration',
      },
      { name: 'b', pathLength: 0.01, concentration: { V2: 0, V3: 1.6, V4: 0, V5: 0 }, role: 'check' },
    ]);
  });

  test('every problem of every row comes at once', () => {
    const text = `${header}a,a.csv,0,0.8,0.8,\na,b.csv,,-1,1.6,chek\n,,1,x,1,\n`;
    expect(refusals(() => standards(text)).map(({ code, where }) => `${code} ${where}`)).toEqual([
      'out-of-range standards.csv:2:3',
      'name-repeats standards.csv:3:1',
      'path-unknown standards.csv:3:3',
      'out-of-range standards.csv:3:4',
      'role-unknown standards.csv:3:6',
      'name-missing standards.csv:4:1',
      'file-missing standards.csv:4:2',
      'out-of-range standards.csv:4:4',
    ]);
  });

  test('concentrations in another unit are refused', () => {
    expect(refusals(() => standards('standard,file,path_mm,V2_g_L\na,a.csv,1,40\n'))[0]).toMatchObject({
      code: 'column-unit',
      where: 'standards.csv:1:4',
    });
  });
});

describe('a tanks sheet', () => {
  const header = 'sample,system,side,file,volume_L,volume_u_L,cells_in_series,target_oxidation_state,open_circuit_V\n';

  test('gives the tank beside the cuvette', () => {
    const { rows } = tanks(`${header}N1,p,negative,n.csv,2000,10,20,3.5,27.1\nC1,p,composite,c.csv,,,,,\n`);
    expect(rows[0]).toMatchObject({
      name: 'N1',
      volume: 2000,
      volumeUncertainty: 10,
      cellsInSeries: 20,
      targetOxidationState: 3.5,
      openCircuit: 27.1,
    });
    expect(rows[1]).toMatchObject({ side: 'composite', volume: null });
  });

  test('the fill record and the shares of a composite', () => {
    const { rows } = tanks(
      'sample,side,file,volume_L,fill_volume_L,fill_vanadium_mol_L,composite_share_negative,composite_share_positive\nN1,negative,n.csv,2000,1900,1.6,,\nC1,composite,c.csv,,,,2,1.5\n',
    );
    expect(rows[0]!.fillVanadium).toBeCloseTo(3040, 9);
    expect(rows[1]!.compositeShares).toEqual({ negative: 2, positive: 1.5 });
  });

  test.each<[string, string, string, string]>([
    ['a volume of 0', 'N1,p,negative,n.csv,0,,,,', 'out-of-range', 'tanks.csv:2:5'],
    ['a volume below 0', 'N1,p,negative,n.csv,-5,,,,', 'out-of-range', 'tanks.csv:2:5'],
    ['no volume', 'N1,p,negative,n.csv,,,,,', 'volume-unknown', 'tanks.csv:2:5'],
    ['half a cell', 'N1,p,negative,n.csv,1,,0.5,,', 'out-of-range', 'tanks.csv:2:7'],
    ['a target beyond the states', 'N1,p,negative,n.csv,1,,,5.5,', 'out-of-range', 'tanks.csv:2:8'],
    ['a side that is none', 'N1,p,anode,n.csv,1,,,,', 'unknown-side', 'tanks.csv:2:3'],
  ])('%s is refused', (_, row, code, where) => {
    expect(tanks(`${header}${row}\n`).problems).toMatchObject([{ code, where }]);
  });

  test.each([
    ['a fill volume without its concentration', 'fill_volume_L,fill_vanadium_mol_L', '1900,', 'tanks.csv:2:6'],
    ['one share of a composite', 'composite_share_negative,composite_share_positive', ',1.5', 'tanks.csv:2:5'],
  ])('%s is refused: it would count for nothing', (_, columns, cells, where) => {
    const { problems } = tanks(`sample,side,file,volume_L,${columns}\nN1,negative,n.csv,2000,${cells}\n`);
    expect(problems).toMatchObject([{ code: 'cell-alone', where }]);
  });

  test('a volume in another unit is refused', () => {
    expect(refusals(() => tanks('sample,side,file,volume_m3\nN1,negative,n.csv,2\n'))[0]).toMatchObject({
      code: 'column-unit',
      where: 'tanks.csv:1:4',
    });
  });
});
