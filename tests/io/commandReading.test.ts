import { readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { folderWith, tankhue } from '../support/command.ts';

/** A band that no vanadium has, over the calibration's range: the reading is under test here, not the result. */
const axis = Array.from({ length: 521 }, (_, i) => 430 + i);
const absorbance = (nm: number): number => 0.6 * Math.exp(-((nm - 765) ** 2) / (2 * 60 ** 2));
const columns = (separator: string, decimal: string): string =>
  axis.map((nm) => `${nm}.0${separator}${absorbance(nm).toFixed(5)}`.replaceAll('.', decimal)).join('\n');

const at = folderWith({
  'good.csv': `nm,A\n${columns(',', '.')}\n`,
  'comma.csv': columns(',', ','),
  'percent.csv': axis.map((nm) => `${nm};${(100 * 10 ** -absorbance(nm)).toFixed(3)}`).join('\n'),
  'dark.csv': `nm,A\n${axis.map((nm) => `${nm},OVER`).join('\n')}\n`,
  'point.csv': 'nm,A\n500,0.1\n',
  'turning.csv': 'nm,A\n500,0.1\n510,0.2\n505,0.3\n',
  'empty.csv': '',
  'binary.csv': '\u0000\u0001\u0002\u0003',
  'samples.csv':
    'sample,side,file,column,path_mm\n' +
    'good,positive,good.csv,,0.2\nmissing,positive,goood.csv,,0.2\nwrong column,positive,good.csv,B,0.2\n' +
    'dark,positive,dark.csv,,0.2\nnegative path,positive,good.csv,,-1\nlast,positive,good.csv,A,0.2\n',
});

describe('tankhue assay', () => {
  test.each([
    ['comma.csv', 'decimal-mark', '--decimal comma'],
    ['percent.csv', 'value-unit', '--unit %T'],
    ['dark.csv', 'no-values', 'thinner cell'],
    ['point.csv', 'points-missing', 'whole scan'],
    ['turning.csv', 'axis-turns', 'sort the points'],
    ['empty.csv', 'file-empty', 'export'],
    ['binary.csv', 'binary', 'export'],
    ['none.csv', 'file-missing', 'check the name'],
    ['', 'is-directory', 'name the file inside it'],
  ])('%s is unreadable: status 3, one clear error, nothing on stdout', (name, code, hint) => {
    const { status, stdout, stderr } = tankhue('assay', at(name), '--side', 'positive', '--path', '0.2mm');
    expect([status, stdout]).toEqual([3, '']);
    expect(stderr).toContain(`code ${code}`);
    expect(stderr).toContain(hint);
    expect(stderr).not.toContain('defect');
  });

  test.each([
    ['comma.csv', ['--decimal', 'comma']],
    ['percent.csv', ['--unit', '%T']],
  ])('%s is read when a person decides', (name, options) => {
    const words = ['--side', 'positive', '--path', '0.2mm', '--format', 'json'];
    const decided = JSON.parse(tankhue('assay', at(name), ...words, ...options).stdout);
    const plain = JSON.parse(tankhue('assay', at('good.csv'), ...words).stdout);
    const [a, b] = [decided.assays[0], plain.assays[0]].map((assay) => assay.unreported ?? assay);
    expect(a.totalVanadium.value).toBeCloseTo(b.totalVanadium.value, 3);
  });

  test('of a batch the readable samples get their results, and each other one its reason', () => {
    const { status, stdout, stderr } = tankhue('assay', '--sheet', at('samples.csv'), '--format', 'json');
    expect(status).toBe(3);
    expect(JSON.parse(stdout).assays.map(({ sample }: { sample: string }) => sample)).toEqual(['good', 'last']);
    for (const reason of ['file-missing', 'did you mean', 'column-unknown', 'no-values', 'out-of-range'])
      expect(stderr).toContain(reason);
  });

  test('what was understood is told on stderr', () => {
    const { stderr } = tankhue('assay', at('good.csv'), '--side', 'positive', '--path', '0.2mm');
    expect(stderr).toContain('521 points, 430.0 to 950.0 nm every 1.00 nm, rising, read as A');
  });

  test('an input is never written over', () => {
    const before = readFileSync(at('samples.csv'));
    const { status, stderr } = tankhue('calibrate', at('samples.csv'), '--out', at('samples.csv'));
    expect(status).toBe(3);
    expect(stderr).toContain('would-overwrite-input');
    expect(readFileSync(at('samples.csv'))).toEqual(before);
  });
});
