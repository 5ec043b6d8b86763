import { readFileSync } from 'node:fs';
import { expect, test } from 'vitest';
import { folderWith, tankhue } from '../support/command.ts';

test('a plan says the cell, the dilution, the fillings, and shows the map', () => {
  const { status, stdout } = tankhue(
    'plan',
    'measurement',
    '--side',
    'negative',
    '--total',
    '1.6 mol/L',
    '--charge',
    '50%',
    '--cells',
    '0.5mm,1mm,10mm',
    '--dilutions',
    '1,20',
  );
  expect(status).toBe(0);
  expect(stdout).toMatch(/^negative, about 1\.6 mol\/L at 50 % — USE the 1 mm cell, undiluted/);
  expect(stdout).toMatch(/dilution\s+1\s+20/);
  expect(stdout).toMatch(/10 mm\s+#/);
});

test('the report holds a field for each cell and dilution', () => {
  const file = folderWith({})('plan.html');
  expect(
    tankhue(
      'plan',
      'measurement',
      '--side',
      'negative',
      '--cells',
      '1mm,10mm',
      '--dilutions',
      '1,5,20',
      '--report',
      file,
    ).status,
  ).toBe(0);
  expect(readFileSync(file, 'utf8').match(/<rect/g)).toHaveLength(6);
});

test('no usable cell is status 4, with what to buy', () => {
  const { status, stdout } = tankhue(
    'plan',
    'measurement',
    '--side',
    'positive',
    '--cells',
    '10mm',
    '--dilutions',
    '1',
  );
  expect(status).toBe(4);
  expect(stdout).toContain('NO CELL AT HAND WILL DO');
  expect(stdout).toMatch(/would help: the 0\.\d mm cell/);
});

test('JSON holds every cell and dilution with its budget', () => {
  const { stdout } = tankhue(
    'plan',
    'measurement',
    '--side',
    'composite',
    '--cells',
    '0.5mm,1mm',
    '--dilutions',
    '1,2',
    '--format',
    'json',
  );
  const plan = JSON.parse(stdout);
  expect(plan.schema).toBe('tankhue/measurement-plan/1');
  expect(plan.candidates).toHaveLength(4);
  expect(plan.candidates[0].budget.length).toBeGreaterThan(5);
});

test.each([
  [['--side', 'positiv']],
  [['--side', 'positive', '--cells', '10']],
  [['--side', 'positive', '--total', '-1 mol/L']],
  [['--side', 'positive', '--dilutions', '0.5']],
  [[]],
])('wrong usage %j is status 2', (options) => {
  expect(tankhue('plan', 'measurement', ...options).status).toBe(2);
});
