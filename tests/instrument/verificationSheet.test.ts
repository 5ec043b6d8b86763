import { describe, expect, test } from 'vitest';
import { TankhueErrors, type TankhueError } from '../../src/errors.ts';
import { verifyInstrument } from '../../src/bench/instrument/verifyInstrument.ts';
import { readVerificationSheet } from '../../src/io/verificationSheet.ts';
import { scan } from './simulated.ts';

const bytes = (text: string) => new TextEncoder().encode(text);
const flat = (file: string) => scan(file, 400, 900, 1, () => 0.1);
const read = (text: string) => readVerificationSheet(bytes(text), 'checks.csv', flat);

const problemsOf = (text: string): readonly TankhueError[] => {
  try {
    read(text);
  } catch (error) {
    return (error as TankhueErrors).all.flatMap((each) => (each instanceof TankhueErrors ? each.all : [each]));
  }
  throw new Error('nothing was refused');
};

describe('a sheet of scans', () => {
  test('each test takes the columns it needs', () => {
    const { scans, assumed } = read(
      [
        'test,file,blank_file,cell,path_mm,path_u_mm,solution,concentration_mg_L,concentration_u_mg_L,minutes,reference_file,reference_path_mm,reference_path_u_mm',
        'holmium,ho.csv,,,,,,,,,,,',
        'dichromate-perchloric,k.csv,acid.csv,,10,0.01,,60,0.1,,,,',
        'cut-off,na.csv,,,,,sodium-nitrite,,,,,,',
        'empty-cell,e.csv,,thin,0.1,,,,,,,,',
        'filled-cell,f.csv,,thin,,,,,,,thick.csv,10,0.02',
        'blank,b.csv,,,,,,,,15,,,',
      ].join('\n'),
    );
    expect(scans.map((each) => each.test)).toEqual([
      'holmium',
      'dichromate-perchloric',
      'cut-off',
      'empty-cell',
      'filled-cell',
      'blank',
    ]);
    expect(scans[1]).toMatchObject({
      concentration: { value: 60, uncertainty: 0.1 },
      pathLength: { value: 1, uncertainty: 0.001 },
      blank: { name: 'acid.csv' },
    });
    expect(scans[2]).toMatchObject({ opaque: [340, 370], least: 3 });
    expect(scans[3]).toMatchObject({ cell: 'thin', nominalPath: 0.01, refractiveIndex: 1 });
    expect(scans[4]).toMatchObject({
      reference: { name: 'thick.csv' },
      referencePath: { value: 1, uncertainty: 0.002 },
    });
    expect(scans[5]).toMatchObject({ minutes: 15 });
    expect(assumed).toEqual([]);
  });

  test('a certificate of another temperature is said, not corrected', () => {
    const sheet = (celsius: number) =>
      read(`test,file,temperature_C,certificate_temperature_C\nblank,b.csv,${celsius},25\n`).scans;
    const codes = (celsius: number) => verifyInstrument(sheet(celsius)).findings.map(({ code }) => code);
    expect(codes(18)).toContain('temperature-off');
    expect(codes(24)).not.toContain('temperature-off');
  });

  test('what the sheet leaves open is said', () => {
    const { assumed } = read('test,file,concentration_mg_L\ndichromate-sulfuric,k.csv,60\n');
    expect(assumed).toHaveLength(3);
    expect(assumed[0]).toContain('10 mm cell');
  });

  test.each([
    ['unknown-test', 'test,file\nholmuim,ho.csv\n', 'checks.csv:2:1'],
    ['cell-empty', 'test,file\nholmium,\n', 'checks.csv:2:2'],
    ['cell-empty', 'test,file,concentration_mg_L\ndichromate-sulfuric,k.csv,\n', 'checks.csv:2:3'],
    ['cell-empty', 'test,file,cell\nempty-cell,e.csv,\n', 'checks.csv:2:3'],
    ['out-of-range', 'test,file,concentration_mg_L\ndichromate-sulfuric,k.csv,-60\n', 'checks.csv:2:3'],
    ['range-empty', 'test,file,from_nm,to_nm,least_A\ncut-off,k.csv,370,340,3\n', 'checks.csv:2:4'],
    ['column-missing', 'file\nho.csv\n', 'checks.csv:1'],
  ])('%s is refused in %j', (code, text, where) => {
    expect(problemsOf(text)[0]).toMatchObject({ code, where });
  });

  test('a misspelt test is told its name', () => {
    expect(problemsOf('test,file\nholmuim,ho.csv\n')[0]!.hint).toBe('did you mean holmium?');
  });

  test('the problems of every row are shown at once', () => {
    const text = 'test,file,concentration_mg_L\ndichromate-sulfuric,k.csv,\nnothing,x.csv,\nholmium,,\n';
    expect(problemsOf(text).map(({ where }) => where)).toEqual(['checks.csv:2:3', 'checks.csv:3:1', 'checks.csv:4:2']);
  });
});
