import { execFileSync, spawnSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, expect, test } from 'vitest';
import type { AssayDocument } from '../../src/index.ts';

const folder = mkdtempSync(join(tmpdir(), 'tankhue-simulate-'));
afterAll(() => rmSync(folder, { recursive: true }));

const tankhue = (...args: string[]): string =>
  execFileSync(process.execPath, ['dist/cli/main.js', ...args], {
    encoding: 'utf8',
    stdio: ['ignore', 'pipe', 'pipe'],
  });
const refused = (...args: string[]) => spawnSync(process.execPath, ['dist/cli/main.js', ...args], { encoding: 'utf8' });

test.each(['csv', 'jcamp'])('what simulate writes as %s, assay reads back within its uncertainty', (format) => {
  const spectra = join(folder, `positive.${format}`);
  const sheet = join(folder, `sheet-${format}.csv`);
  const chosen = ['--side', 'positive', '--total', '1.6mol/L', '--state-of-charge', '20%,50%,80%', '--path', '0.2mm'];
  tankhue(
    'simulate',
    ...chosen,
    '--noise',
    '0.3mA',
    '--seed',
    '3',
    '--format',
    format,
    '--out',
    spectra,
    '--sheet',
    sheet,
  );
  const document = JSON.parse(tankhue('assay', '--sheet', sheet, '--format', 'json')) as AssayDocument;
  const found = document.assays.map((assay) => assay.stateOfCharge);
  [0.2, 0.5, 0.8].forEach((truth, i) => {
    expect(Math.abs(found[i]!.value! - truth)).toBeLessThan(2 * found[i]!.uncertainty!);
    // Nothing but 0.3 mA of noise is wrong with these, so they must be much better than the uncertainty allows for.
    expect(Math.abs(found[i]!.value! - truth)).toBeLessThan(0.003);
  });
});

test('the same seed writes the same file, another seed another', () => {
  const make = (seed: string) =>
    tankhue('simulate', '--composition', 'V2=1,V3=0.6', '--path', '1mm', '--noise', '1mA', '--seed', seed);
  expect(make('5')).toBe(make('5'));
  expect(make('5')).not.toBe(make('6'));
});

test('with a volume the sheet is one of tanks, the truth in its note', () => {
  const sheet = join(folder, 'tanks.csv');
  const out = join(folder, 'tank.csv');
  tankhue(
    'simulate',
    '--composition',
    'V2=1,V3=0.6',
    '--path',
    '1mm',
    '--out',
    out,
    '--sheet',
    sheet,
    '--volume',
    '2m3',
  );
  expect(readFileSync(sheet, 'utf8')).toBe(
    'sample,side,file,column,path_mm,dilution,volume_L,note\n' +
      'simulated,negative,tank.csv,simulated,1,1,2000,simulated from V2 1 mol/L and V3 0.6 mol/L; seed 1\n',
  );
});

test.each([
  [['--composition', 'V2=1,V3=0.6', '--path', '1'], 2, 'unit-missing'],
  [['--composition', 'V2=1;V3=0.6', '--path', '1mm'], 2, 'composition-unclear'],
  [['--composition', 'V2=1', '--path', '1mm', '--bubble', '0.02'], 2, 'unit-missing'],
  [['--composition', 'V2=1', '--path', '1mm', '--offset', '2V'], 2, 'unit-unknown'],
  [['--composition', 'V2=1', '--side', 'negative', '--total', '1M', '--path', '1mm'], 2, 'both or neither'],
  [['--path', '1mm'], 2, 'both or neither'],
  [['--composition', 'V2=1,V4=1', '--path', '1mm'], 3, 'cannot-coexist'],
  [['--composition', 'V2=1', '--path', '1mm', '--from', '200nm'], 3, 'axis-outside'],
])('simulate %j ends with status %s and says %s', (args, status, said) => {
  const result = refused('simulate', ...args);
  expect(result.stderr).toContain(said);
  expect(result.status).toBe(status);
  expect(result.stdout).toBe('');
});
