import { readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { readStandardsSheet } from '../../src/index.ts';
import { folderWith, tankhue } from '../support/command.ts';

const stocks = `stock,V2_mol_L,V3_mol_L,V4_mol_L,V5_mol_L,u_mol_L,acid_mol_L,available_mL,density_g_mL
N,1.52,0.08,0,0,0.008,4.6,200,
III,0,1.6,0,0,0.008,4.6,200,1.35
IV,0,0,1.6,0,0.008,4.6,200,1.34
V,0,0,0,1.6,0.008,4.6,200,1.34
acid,0,0,0,0,,4.6,1000,
`;
const at = folderWith({
  'stocks.csv': stocks,
  'targets.csv': `standard,V4_mol_L,V5_mol_L,volume_mL,spectrum_file,path_mm
A-25,0.6,0.2,50,a.csv,1
A-50,0.4,0.4,50,a.csv,1
`,
});

const json = (...words: string[]) => JSON.parse(tankhue('mix', ...words, '--format', 'json').stdout);

describe('tankhue mix', () => {
  test('when a blend of neighbours is wanted then volumes, label and steps come out', () => {
    const document = json('blend', at('stocks.csv'), '--target', 'V4=0.4,V5=0.4', '--volume', '100mL');
    expect(document.schema).toBe('tankhue/mix/1');
    const [mixture] = document.mixtures;
    expect(mixture.portions.map(({ stock, volume }: { stock: string; volume: number }) => [stock, volume])).toEqual([
      ['IV', 25],
      ['V', 25],
      ['acid', 50],
    ]);
    expect(mixture.stateOfCharge.value).toBeCloseTo(0.5, 6);
    expect(mixture.reactions).toEqual([]);
    expect(mixture.steps.length).toBeGreaterThan(4);
    expect(mixture.cautions.map(({ code }: { code: string }) => code)).toContain('acid');
  });

  test('when several standards are asked for then their rows can be read by the calibrator', () => {
    const { status } = tankhue(
      'mix',
      'blend',
      at('stocks.csv'),
      '--targets',
      at('targets.csv'),
      '--standards',
      at('out.csv'),
    );
    expect(status).toBe(0);
    const { rows } = readStandardsSheet(readFileSync(at('out.csv')), 'out.csv');
    expect(rows.map(({ name, file, preparation, acid }) => [name, file, preparation, acid])).toEqual([
      ['A-25', 'a.csv', 'IV+V', 4.6],
      ['A-50', 'a.csv', 'IV+V', 4.6],
    ]);
  });

  test('when a report is asked for then one HTML file holds the steps and the portions', () => {
    const words = ['--target', 'V4=0.4,V5=0.4', '--volume', '100mL', '--report', at('mix.html')];
    expect(tankhue('mix', 'blend', at('stocks.csv'), ...words).status).toBe(0);
    const html = readFileSync(at('mix.html'), 'utf8');
    expect(html).toContain('fill to the mark');
    expect(html).toContain('IV 25 mL');
    expect(html).not.toMatch(/NaN|undefined|<script/);
  });

  test('when a state is wanted that no stock reaches then the nearest is shown and the missing stock named', () => {
    const { status, stdout } = tankhue('mix', 'blend', at('stocks.csv'), '--target', 'V2=0.8', '--volume', '50mL');
    expect(status).toBe(4);
    expect(stdout).toContain('WITHHELD');
    expect(stdout).toContain('what is missing is a stock with V(II)');
    expect(stdout).toContain('nearest');
    expect(stdout).not.toContain('for the standards sheet');
  });

  test.each([
    [['blend', 'stocks.csv', '--target', 'V4=0.4'], 2, 'expected --volume'],
    [['blend', 'stocks.csv', '--target', 'V4=0.4', '--volume', '100'], 2, 'write for example 100mL'],
    [['dilute', 'stocks.csv', '--stock', 'VI', '--to', '0.8', '--volume', '50mL'], 3, 'did you mean IV?'],
    [['dilute', 'stocks.csv', '--stock', 'IV', '--to', '2.0', '--volume', '50mL'], 3, 'cannot be stronger'],
    [['charge', 'stocks.csv', '--stock', 'IV', '--volume', '50mL'], 2, '--to or --passed'],
    [['charge', 'stocks.csv', '--stock', 'IV', '--volume', '50mL', '--to', 'V7'], 2, 'expected V2, V3, V4, V5'],
    [
      ['charge', 'stocks.csv', '--stock', 'acid', '--volume', '50mL', '--to', 'V3'],
      3,
      'expected a stock with vanadium',
    ],
    [['dissolve', '--solid', 'salt', '--total', '1', '--acid', '3', '--volume', '1L'], 2, 'vanadyl-sulfate or'],
  ])('%j exits %i and says %s', (words, status, text) => {
    const result = tankhue('mix', ...words.map((word) => (word === 'stocks.csv' ? at(word) : word)));
    expect(result.stderr).toContain(text);
    expect(result.status).toBe(status);
  });

  test('when vanadyl sulfate of unknown water is dissolved then the label says how little that is worth', () => {
    const [mixture] = json(
      'dissolve',
      '--solid',
      'vanadyl-sulfate',
      '--total',
      '1.6',
      '--acid',
      '4.6',
      '--volume',
      '500mL',
    ).mixtures;
    expect(mixture.findings[0]).toMatchObject({ code: 'label-doubtful', severity: 'caution' });
    expect(mixture.totalVanadium.uncertainty / mixture.totalVanadium.value).toBeCloseTo(0.044, 2);
  });
});
