import { describe, expect, test } from 'vitest';
import { readTitrations, TankhueError, TankhueErrors, titrate, type TitrationDocument } from '../../src/index.ts';
import { seededRandom } from '../../src/numerics/random.ts';
import { curveCsv, simulatedReadings, type SimulatedBench } from './simulatedRun.ts';

const bytes = (text: string) => ({
  bytes: new TextEncoder().encode(text),
  origin: { file: 'curve.csv', column: '', sha256: '' },
});
const read = (text: string, sheet?: string) => readTitrations([bytes(text)], sheet === undefined ? null : bytes(sheet));

const CELLS = {
  pair: 'V2/V3',
  titrant: 'cerium',
  normality_mol_L: 0.1,
  aliquot_mL: 1,
  inert_gas: 'yes',
  beaker_mL: 100,
  temperature_C: 25,
} as const;
const NEGATIVE: SimulatedBench = { vanadium: { V2: 0.96, V3: 0.64 }, titrant: 'cerium', noise: 0.4, reading: 0.005 };

const csv = (bench: Partial<SimulatedBench> = {}, cells: Record<string, string | number> = {}, seed = 5): string =>
  curveCsv([{ cells: { ...CELLS, ...cells }, ...simulatedReadings({ ...NEGATIVE, ...bench }, seededRandom(seed)) }]);
const evaluate = (text: string): TitrationDocument => titrate(read(text).runs);
const codesOf = (document: TitrationDocument): string[] => document.titrations[0]!.findings.map(({ code }) => code);

const lines = csv().trimEnd().split('\n');
const swapped = [...lines.slice(0, 20), lines[21]!, lines[20]!, ...lines.slice(22)].join('\n');
const twice = [...lines, ...lines.slice(1)].join('\n');
const left = [lines[0]!, ...lines.slice(1).map((line) => line.replace(/^[^,]*/, (v) => String(50 - Number(v))))].join(
  '\n',
);
const volts = [
  lines[0]!,
  ...lines.slice(1).map((line) => line.replace(/,[^,]*/, (E) => `,${Number(E.slice(1)) / 1000}`)),
].join('\n');

describe('curves that cannot be read', () => {
  test.each([
    ['a volume that goes back', swapped, 'volume-turns', 'curve.csv:22'],
    ['what is left in the burette', left, 'volume-turns', 'curve.csv:2'],
    ['two curves without a column run', twice, 'two-curves', `curve.csv:${lines.length + 1}`],
    ['volts in a column of millivolts', volts, 'potential-unit', 'curve.csv:2'],
    ['a few readings only', lines.slice(0, 6).join('\n'), 'points-missing', 'curve.csv:2'],
    ['a reading over range', csv().replace(/\n5\.[^,]*,[^,]*/, '\n5.1,9999'), 'potential-range', 'curve.csv:2'],
    ['no column of potentials', csv().replace('potential_mV', 'pH'), 'column-missing', 'curve.csv'],
    ['no pair', csv({}, { pair: '' }), 'pair-unknown', 'curve.csv:2'],
    ['a misspelt titrant', csv({}, { titrant: 'cerum' }), 'word-unknown', 'curve.csv:2'],
    ['no aliquot', csv({}, { aliquot_mL: '' }), 'cell-empty', 'curve.csv:2'],
    ['a standard without its mass', csv({}, { standard: 'sodium-oxalate' }), 'cell-empty', 'curve.csv:2'],
  ])('%s', (_, text, code, where) => {
    let error: unknown;
    try {
      read(text);
    } catch (thrown) {
      error = thrown;
    }
    expect(error).toBeInstanceOf(TankhueError);
    expect(error).toMatchObject({ code });
    expect((error as TankhueError).where.startsWith(where)).toBe(true);
  });

  test('all problems of a file are told at once', () => {
    const text = csv({}, { titrant: 'cerum', aliquot_mL: -1, temperature_C: 400 });
    try {
      read(text);
      expect.unreachable();
    } catch (error) {
      expect((error as TankhueErrors).all.map(({ code }) => code).sort()).toEqual([
        'out-of-range',
        'out-of-range',
        'word-unknown',
      ]);
    }
  });

  test('two words in one column of a run are refused with both', () => {
    const text = lines.map((line, i) => (i === 4 ? line.replace(/,,/, ',V4/V5,') : line)).join('\n');
    expect(() => read(text)).toThrow(expect.objectContaining({ code: 'run-differs' }));
  });

  test('a sheet of runs describes files of readings, and a name without readings is refused', () => {
    const plain = [
      `volume_mL,potential_mV`,
      ...lines.slice(1).map((line) => line.split(',').slice(0, 2).join(',')),
    ].join('\n');
    const header = `run,${Object.keys(CELLS).join(',')}`;
    const values = Object.values(CELLS).join(',');
    const { runs } = read(plain, `${header}\ncurve,${values}\n`);
    expect(runs[0]).toMatchObject({ run: 'curve', pair: 'V2/V3', titrant: 'cerium' });
    expect(() => read(plain, `${header}\ncurve,${values}\nother,${values}\n`)).toThrow(
      expect.objectContaining({ code: 'run-unknown' }),
    );
  });
});

describe('routes that do not exist', () => {
  test.each([
    ['IV/V without iron(II)', { pair: 'V4/V5' }, 'iron-missing'],
    ['no strength and no standardisation', { normality_mol_L: '' }, 'strength-missing'],
    ['II/III with iron(II) as titrant', { titrant: 'iron' }, 'route-unknown'],
    ['iron(II) added to II/III', { iron_mL: 20, iron_normality_mol_L: 0.1 }, 'route-unknown'],
    ['total vanadium straight with oxidant', { pair: 'total' }, 'iron-missing'],
  ])('%s', (_, cells, code) => {
    expect(() => evaluate(csv({}, cells))).toThrow(expect.objectContaining({ code, where: 'curve.csv:2' }));
  });

  test('one sample of two pairs', () => {
    const other = simulatedReadings(NEGATIVE, seededRandom(6));
    const text = curveCsv([
      { cells: { run: 'a', sample: 's', ...CELLS }, ...other },
      { cells: { run: 'b', sample: 's', ...CELLS, pair: 'V3/V4' }, ...other },
    ]);
    expect(() => evaluate(text)).toThrow(expect.objectContaining({ code: 'pair-differs' }));
  });
});

describe('results that are withheld', () => {
  const thinned = (text: string, from: number, to: number): string =>
    text
      .split('\n')
      .filter((line) => !(Number(line.split(',')[0]) > from && Number(line.split(',')[0]) < to))
      .join('\n');
  const flat = (text: string, from: number): string => {
    const rows = text.trimEnd().split('\n');
    const stop = rows.findIndex((line, i) => i > 0 && Number(line.split(',')[0]) > from);
    const last = rows[stop]!.split(',')[1]!;
    return rows
      .map((line, i) => (i > stop ? line.replace(/,[^,]*/, `,${Number(last) + 0.02 * (i % 3)}`) : line))
      .join('\n');
  };
  test.each([
    ['the last end point is not reached', csv({ last: 22 }), 'end-point-missing'],
    ['no end point is reached', csv({ last: 8 }), 'end-point-missing'],
    ['the titrant runs out on the way', flat(csv(), 18), 'titrant-used-up'],
    ['hardly any reading lies between two jumps', thinned(csv(), 9.8, 25.4), 'steps-overlap'],
    [
      'the iron(II) left over is less than an addition',
      csv(
        { vanadium: { V4: 0.56, V5: 1.04 }, iron: 1.05, spacing: 0.4 },
        { pair: 'V4/V5', iron_mL: 10.5, iron_normality_mol_L: 0.1 },
      ),
      'end-point-missing',
    ],
    ['a III/IV sample is called II/III', csv({ vanadium: { V3: 0.82, V4: 0.78 } }), 'label-disagrees'],
    ['a II/III sample titrated to V(V) is called III/IV', csv({ last: 48 }, { pair: 'V3/V4' }), 'label-disagrees'],
  ])('when %s then nothing is extrapolated', (_, text, code) => {
    const [titration] = evaluate(text).titrations;
    expect(codesOf(evaluate(text))).toContain(code);
    expect(titration).toMatchObject({ state: 'withheld', standardsRow: null });
    expect(titration!.stateOfCharge.value).toBeNull();
  });
});

describe('results with a doubt', () => {
  const spoilt = (text: string, line: number, by: number): string =>
    text
      .split('\n')
      .map((one, i) => (i === line ? one.replace(/,(-?[\d.]+)/, (_, E: string) => `,${Number(E) + by}`) : one))
      .join('\n');
  test.each([
    ['readings are coarse at the jumps', csv({ spacing: 0.9 }, {}, 3), 'coarse-steps'],
    ['the electrode drifts by 30 mV', csv({ drift: 30 }), 'electrode-drift'],
    ['the beaker was at 60 °C and the sheet says 25', csv({ temperature: 333.15 }), 'electrode-slope'],
    ['one reading is 8 mV off', spoilt(csv(), 40, 8), 'stray-reading'],
    ['the burette held 25 mL', csv({}, { burette_mL: 25 }), 'burette-refilled'],
    ['V(II) was titrated in air', csv({}, { inert_gas: 'no' }), 'air-exposure'],
  ])('when %s then a caution says so and the number stays', (_, text, code) => {
    const [titration] = evaluate(text).titrations;
    expect(titration!.findings.map((finding) => finding.code)).toContain(code);
    expect(titration!.state).toBe('caution');
    expect(Math.abs(titration!.stateOfCharge.value! - 0.6)).toBeLessThan(4 * titration!.stateOfCharge.uncertainty!);
  });

  test('a drift seen in one solution before and after is taken off without a caution', () => {
    const document = evaluate(csv({ drift: 12 }, { check_before_mV: 430, check_after_mV: 442 }));
    expect(codesOf(document)).toEqual(['single-run']);
    expect(document.runs[0]!.electrode!.drift.value).toBeCloseTo(12 / 30, 1);
  });

  test('replicates of one sample that differ by a spill are told apart from their uncertainty', () => {
    const spilt = { V2: 0.9, V3: 0.6 };
    const text = curveCsv([
      { cells: { run: 'a', sample: 's', ...CELLS }, ...simulatedReadings(NEGATIVE, seededRandom(1)) },
      {
        cells: { run: 'b', sample: 's', ...CELLS },
        ...simulatedReadings({ ...NEGATIVE, vanadium: spilt }, seededRandom(2)),
      },
    ]);
    const [titration] = evaluate(text).titrations;
    expect(titration!.findings[0]!.code).toBe('replicates-disagree');
    expect(titration!.totalVanadium.uncertainty).toBeGreaterThan(0.04);
  });

  test('one run that shows no end does not withhold what the other gives', () => {
    const text = curveCsv([
      { cells: { run: 'a', sample: 's', ...CELLS }, ...simulatedReadings(NEGATIVE, seededRandom(1)) },
      { cells: { run: 'b', sample: 's', ...CELLS }, ...simulatedReadings({ ...NEGATIVE, last: 20 }, seededRandom(2)) },
    ]);
    const [titration] = evaluate(text).titrations;
    expect(titration).toMatchObject({ state: 'caution' });
    expect(titration!.stateOfCharge.value).toBeCloseTo(0.6, 2);
  });

  test('an over-discharged negative side is reported below zero, not clipped', () => {
    const text = csv({ vanadium: { V3: 1.36, V4: 0.24 }, last: 34 }, { pair: 'V3/V4', side: 'negative' });
    const [titration] = evaluate(text).titrations;
    expect(titration!.stateOfCharge.value).toBeCloseTo(-0.15, 2);
    expect(titration!.findings[0]!.code).toBe('over-discharged');
  });
});

describe('what a blank does', () => {
  test('a blank that was measured is taken off the last end point', () => {
    const [with_] = evaluate(csv({}, { blank_mL: 0.1 })).titrations;
    const [without] = evaluate(csv()).titrations;
    expect(without!.totalVanadium.value! - with_!.totalVanadium.value!).toBeCloseTo(0.01, 6);
    expect(with_!.assumed.join()).toContain('before the last end point');
  });
});
