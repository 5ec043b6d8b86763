import { readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import type { InstrumentRecord } from '../../src/assay/instrumentRecord.ts';
import { folderWith, tankhue } from '../support/command.ts';
import { normalDeviates } from './simulated.ts';

const BANDS = [333.48, 345.38, 361.26, 385.62, 416.25, 451.43, 467.82, 485.23, 536.56, 640.5];

const spectrumFile = (from: number, to: number, step: number, ...laws: ((nm: number) => number)[]) => {
  const count = Math.round((to - from) / step) + 1;
  const rows = Array.from({ length: count }, (_, i) => {
    const nm = from + i * step;
    return [nm.toFixed(2), ...laws.map((law) => law(nm).toFixed(6))].join(',');
  });
  return [['wavelength_nm', ...laws.map((_, j) => `scan ${j + 1}`)].join(','), ...rows, ''].join('\n');
};

const holmium = (shift: number) => (nm: number) =>
  BANDS.reduce((sum, band) => sum + 0.5 * Math.exp(-4 * Math.LN2 * ((nm - band - shift) / 4) ** 2), 0.05);
const noisy = (seed: number, level = 0.0003) => {
  const draw = normalDeviates(seed);
  return () => level * draw();
};
const gap = (path: number) => (nm: number) => 0.03 + 0.03 * Math.cos((4 * Math.PI * path * 1e7) / nm);

const files = folderWith({
  'ho.csv': spectrumFile(330, 700, 0.5, holmium(0.4)),
  'ho-bad.csv': spectrumFile(330, 700, 0.5, holmium(2.2)),
  'blanks.csv': spectrumFile(400, 900, 1, noisy(1), noisy(2), noisy(3), noisy(4)),
  'nitrite.csv': spectrumFile(330, 400, 1, () => 3.3 + noisy(9, 0.02)()),
  'empty.csv': spectrumFile(400, 900, 0.2, gap(0.0103)),
  'checks.csv': [
    'test,file,column,cell,path_mm,solution,minutes,operator',
    'holmium,ho.csv,,,,,,kim',
    ...[1, 2, 3, 4].map((n) => `blank,blanks.csv,scan ${n},,,,${10 * n},kim`),
    'cut-off,nitrite.csv,,,,sodium-nitrite,,kim',
    'empty-cell,empty.csv,,thin 7,0.1,,,kim',
    '',
  ].join('\n'),
  'broken.csv': 'test,file\nholmuim,ho.csv\nblank,nowhere.csv\n',
});

describe('tankhue verify', () => {
  test('a sheet of scans gives a verdict, a record and what it means for an assay', () => {
    const { status, stdout, stderr } = tankhue(
      'verify',
      files('checks.csv'),
      '--name',
      'bench 2',
      '--out',
      files('bench-2.json'),
      '--report',
      files('bench-2.html'),
    );
    expect(status).toBe(0);
    expect(stdout).toMatch(/^bench 2 — PASSED/);
    expect(stdout).toContain('536.56 nm band');
    expect(stdout).toMatch(/cell thin 7: 0\.103\d* ± /);
    expect(stdout).toMatch(/positive, 50 %, 1\.6 mol\/L, 0\.1 mm/);
    expect(stderr).toContain('columns kept but not used: operator');
    const record = JSON.parse(readFileSync(files('bench-2.json'), 'utf8')) as InstrumentRecord;
    expect(record.schema).toBe('tankhue/instrument/1');
    expect(readFileSync(files('bench-2.html'), 'utf8').match(/<circle/g)).toHaveLength(record.tests.length);
    expect(record.wavelengthShift!.value).toBeCloseTo(0.4, 2);
    expect(record.cells[0]!.pathLength).toBeCloseTo(0.0103, 5);
    expect(record.consequences).toHaveLength(3);
    expect(record.inputs.every(({ sha256 }) => /^[0-9a-f]{64}$/.test(sha256))).toBe(true);
  });

  test('the record serves the plan', () => {
    tankhue('verify', files('checks.csv'), '--out', files('record.json'));
    const plan = tankhue(
      'plan',
      'measurement',
      '--side',
      'positive',
      '--instrument',
      files('record.json'),
      '--format',
      'json',
    );
    expect(plan.status).toBe(0);
    const { candidates } = JSON.parse(plan.stdout);
    expect(new Set(candidates.map(({ cell }: { cell: string }) => cell))).toEqual(new Set(['thin 7']));
  });

  test('files with --test: every column is a scan', () => {
    const { status, stdout } = tankhue('verify', '--test', 'blank', files('blanks.csv'), '--format', 'json');
    expect(status).toBe(0);
    expect(JSON.parse(stdout).noise.constant).toBeCloseTo(0.0003, 4);
  });

  test('a photometer past a limit fails with status 4', () => {
    const { status, stdout } = tankhue('verify', '--test', 'holmium', files('ho-bad.csv'));
    expect(status).toBe(4);
    expect(stdout).toMatch(/^photometer — FAILED/);
  });

  test('limits can be stated, with their unit', () => {
    expect(tankhue('verify', '--test', 'blank', files('blanks.csv'), '--noise-limit', '0.1 mA').status).toBe(4);
    expect(tankhue('verify', '--test', 'blank', files('blanks.csv'), '--noise-limit', '0.1 nm').status).toBe(2);
  });

  test('all problems of a sheet at once, status 3, nothing on stdout', () => {
    const { status, stdout, stderr } = tankhue('verify', files('broken.csv'));
    expect([status, stdout]).toEqual([3, '']);
    expect(stderr).toContain('code unknown-test');
    expect(stderr).toContain('code file-missing');
    expect(stderr).toContain('broken.csv:2:1');
  });

  test('a missing option of a test is asked for by its name', () => {
    const { status, stderr } = tankhue('verify', '--test', 'dichromate-sulfuric', files('ho.csv'));
    expect(status).toBe(3);
    expect(stderr).toContain('at --concentration');
  });

  test('an input is never overwritten', () => {
    const { status, stderr } = tankhue('verify', '--test', 'blank', files('blanks.csv'), '--out', files('blanks.csv'));
    expect(status).toBe(3);
    expect(stderr).toContain('would-overwrite-input');
  });

  test('wrong usage is status 2', () => {
    expect(tankhue('verify', files('ho.csv'), files('ho-bad.csv')).status).toBe(2);
    expect(tankhue('verify', files('checks.csv'), '--format', 'yaml').status).toBe(2);
  });
});
