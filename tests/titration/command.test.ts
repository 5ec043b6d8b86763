import { readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { readStandardsSheet, readTitrations, titrate } from '../../src/index.ts';
import { seededRandom } from '../../src/numerics/random.ts';
import { folderWith, tankhue } from '../support/command.ts';
import { curveCsv, simulatedReadings, type SimulatedBench } from './simulatedRun.ts';

const random = seededRandom(11);
const run = (cells: Record<string, string | number>, bench: SimulatedBench) => ({
  cells: { beaker_mL: 100, temperature_C: 25, ...cells },
  ...simulatedReadings({ noise: 0.4, reading: 0.005, normality: 0.1003, ...bench }, random),
});
const ironSalt = (grams: number): number => (1000 * grams) / 392.125;

const day = curveCsv([
  run(
    { run: 'std-1', standard: 'iron-ammonium-sulfate', standard_g: 0.8012, titrant: 'cerium' },
    { vanadium: {}, iron: ironSalt(0.8012), titrant: 'cerium' },
  ),
  run(
    { run: 'neg-1', sample: 'neg', pair: 'V2/V3', titrant: 'cerium', aliquot_mL: 1, inert_gas: 'yes' },
    { vanadium: { V2: 0.96, V3: 0.64 }, titrant: 'cerium' },
  ),
  run(
    { run: 'neg-2', sample: 'neg', pair: 'II/III', titrant: 'cerium', aliquot_mL: 1, inert_gas: 'yes' },
    { vanadium: { V2: 0.96, V3: 0.64 }, titrant: 'cerium' },
  ),
  run(
    {
      run: 'pos-1',
      sample: 'pos',
      pair: 'V4/V5',
      titrant: 'cerium',
      aliquot_mL: 1,
      iron_mL: 20,
      iron_normality_mol_L: 0.1,
      spectrum_file: 'pos.csv',
      path_mm: 1,
    },
    { vanadium: { V4: 0.56, V5: 1.04 }, iron: 2, titrant: 'cerium' },
  ),
]);

const assay = (stateOfCharge: number): string =>
  JSON.stringify({
    schema: 'tankhue/assay/1',
    calibration: { name: 'c', sha256: '' },
    assays: [
      {
        sample: 'neg',
        system: '',
        pair: 'V2/V3',
        totalVanadium: { value: 1.61, uncertainty: 0.02 },
        averageOxidationState: { value: 3 - stateOfCharge, uncertainty: 0.01 },
        stateOfCharge: { value: stateOfCharge, uncertainty: 0.01, interval: [0.5, 0.7] },
      },
    ],
  });

describe('tankhue titrate', () => {
  test('when a sheet holds standardisation and samples then each sample gets numbers from the strength found', () => {
    const at = folderWith({ 'day.csv': day });
    const { status, stdout } = tankhue('titrate', at('day.csv'), '--format', 'json');
    expect(status).toBe(0);
    const document = JSON.parse(stdout);
    expect(document.schema).toBe('tankhue/titration/1');
    expect(document.titrants[0]).toMatchObject({ titrant: 'cerium', origin: 'standardised', runs: ['std-1'] });
    expect(Math.abs(document.titrants[0].strength.value - 0.1003)).toBeLessThan(
      3 * document.titrants[0].strength.uncertainty,
    );
    const [neg, pos] = document.titrations;
    expect(neg.runs).toEqual(['neg-1', 'neg-2']);
    for (const [result, truth] of [
      [neg, 0.6],
      [pos, 0.65],
    ] as const) {
      expect(Math.abs(result.stateOfCharge.value - truth)).toBeLessThan(3 * result.stateOfCharge.uncertainty);
      expect(Math.abs(result.totalVanadium.value - 1.6)).toBeLessThan(3 * result.totalVanadium.uncertainty);
    }
  });

  test('when rows for a standards sheet are asked for then the calibrator can read them', () => {
    const at = folderWith({ 'day.csv': day });
    const { status } = tankhue('titrate', at('day.csv'), '--standards', at('standards.csv'));
    expect(status).toBe(0);
    const text = readFileSync(at('standards.csv'), 'utf8');
    const [header, , positive] = text.split('\n');
    const { rows } = readStandardsSheet(new TextEncoder().encode(`${header}\n${positive}\n`), 'standards.csv');
    expect(rows[0]).toMatchObject({ name: 'pos', file: 'pos.csv', preparation: 'pos', role: 'calibration' });
    expect(rows[0]!.concentration.V5).toBeCloseTo(1.04, 1);
    expect(rows[0]!.concentrationUncertainty).toBeGreaterThan(0.001);
  });

  test('when a sheet of standards is relabelled then its own cells stay and the titrated label comes in', () => {
    const sheet = `standard,file,column,path_mm,V4_mol_L,V5_mol_L,u_mol_L,preparation,role,colour
other,o.csv,x,1,0.8,0.8,0.01,o,calibration,dark
pos,pos.csv,y,0.5,0.6,1.0,0.03,mixed,check,dark
`;
    const at = folderWith({ 'day.csv': day, 'mixed.csv': sheet });
    const { status, stderr } = tankhue(
      'titrate',
      at('day.csv'),
      '--relabel',
      at('mixed.csv'),
      '--standards',
      at('out.csv'),
    );
    expect(status).toBe(0);
    expect(stderr).toContain('pos: label was V4 0.6, V5 1.0, is V4 0.5');
    const [, other, pos, neg] = readFileSync(at('out.csv'), 'utf8').split('\n');
    expect(other).toBe('other,o.csv,x,1,0.8,0.8,0.01,o,calibration,dark,,');
    expect(pos).toMatch(/^pos,pos\.csv,y,0\.5,0\.5\d+,1\.0\d+,0\.00\d+,pos,check,dark,0,0$/);
    expect(neg).toMatch(/^neg,,,/);
  });

  test('when a report is asked for then one HTML file holds text and a picture of every curve', () => {
    const at = folderWith({ 'day.csv': day });
    const { status } = tankhue('titrate', at('day.csv'), '--report', at('report.html'));
    expect(status).toBe(0);
    const html = readFileSync(at('report.html'), 'utf8');
    expect(html.match(/<svg /g)?.length).toBe(4);
    expect(html).toContain('II/III with oxidant');
    expect(html).not.toMatch(/NaN|undefined|<script|https?:\/\/(?!www\.w3\.org)/);
  });

  test.each([
    [0.605, 'they agree', true],
    [0.66, 'they do NOT agree', false],
  ])('when an assay says %s then the screen says "%s"', (stateOfCharge, words, agrees) => {
    const at = folderWith({ 'day.csv': day, 'assay.json': assay(stateOfCharge) });
    const { stdout } = tankhue('titrate', at('day.csv'), '--against', at('assay.json'));
    expect(stdout.split('\n').find((line) => line.includes('assay, S'))).toContain('E_n');
    expect(stdout).toContain(words);
    const { stdout: json } = tankhue('titrate', at('day.csv'), '--against', at('assay.json'), '--format', 'json');
    const agreement = JSON.parse(json).titrations[0].agreement;
    expect(agreement[0]).toMatchObject({ quantity: 'stateOfCharge', agrees });
  });

  test('when the assays are of other samples then that is said with the names there are', () => {
    const at = folderWith({ 'day.csv': day, 'assay.json': assay(0.6).replace('"neg"', '"other"') });
    const { status, stderr } = tankhue('titrate', at('day.csv'), '--against', at('assay.json'));
    expect(status).toBe(3);
    expect(stderr).toContain('received assays of other');
    expect(stderr).toContain('code sample-unknown');
  });

  // A command has 0.5 s, of which the start of the process takes 0.3; the best of a few, because the machine may be busy.
  test('a day of titrations is evaluated in less than 0.2 s of processor time', () => {
    const origin = { file: 'day.csv', column: '', sha256: '' };
    const times = Array.from({ length: 4 }, () => {
      const before = process.cpuUsage();
      titrate(readTitrations([{ bytes: new TextEncoder().encode(day), origin }], null).runs);
      return process.cpuUsage(before).user / 1000;
    });
    expect(Math.min(...times)).toBeLessThan(200);
  });
});
