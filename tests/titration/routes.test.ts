import { describe, expect, test } from 'vitest';
import { readTitrations, titrate, type TitrationDocument } from '../../src/index.ts';
import { seededRandom } from '../../src/numerics/random.ts';
import { curveCsv, simulatedReadings, type SimulatedBench } from './simulatedRun.ts';

const random = seededRandom(21);
const scatter = { noise: 0.4, reading: 0.005 };
const run = (cells: Record<string, string | number>, bench: SimulatedBench) => ({
  cells: { beaker_mL: 100, temperature_C: 25, ...cells },
  ...simulatedReadings({ ...scatter, ...bench }, random),
});
const evaluate = (...runs: Parameters<typeof curveCsv>[0]): TitrationDocument =>
  titrate(
    readTitrations(
      [{ bytes: new TextEncoder().encode(curveCsv(runs)), origin: { file: 'c.csv', column: '', sha256: '' } }],
      null,
    ).runs,
  );
const near = ({ value, uncertainty }: { value: number | null; uncertainty: number | null }, truth: number): void => {
  expect(Math.abs(value! - truth)).toBeLessThan(3 * uncertainty!);
};

describe('iron(II) as titrant', () => {
  // All vanadium made V(V) beforehand: 1.6 mmol takes 16 mL of 0.1 mol/L.
  test('total vanadium', () => {
    const [titration] = evaluate(
      run(
        { run: 't', pair: 'total', titrant: 'iron', normality_mol_L: 0.1, aliquot_mL: 1 },
        { vanadium: { V5: 1.6 }, titrant: 'iron', last: 22, acid: 4 },
      ),
    ).titrations;
    near(titration!.totalVanadium, 1.6);
    expect(titration!.totalVanadium.uncertainty! / 1.6).toBeLessThan(0.006);
    expect(titration).toMatchObject({ pair: null, state: 'sound', standardsRow: null });
    expect(titration!.stateOfCharge.value).toBeNull();
  });

  // One portion gives V(V), another the total: together the state of charge.
  test('V(V) in one run and the total in another make one sample', () => {
    const common = { sample: 's', titrant: 'iron', normality_mol_L: 0.1, aliquot_mL: 1 };
    const [titration] = evaluate(
      run(
        { run: 'five', pair: 'V4/V5', ...common },
        { vanadium: { V4: 0.56, V5: 1.04 }, titrant: 'iron', last: 16, acid: 4 },
      ),
      run({ run: 'all', pair: 'total', ...common }, { vanadium: { V5: 1.6 }, titrant: 'iron', last: 22, acid: 4 }),
    ).titrations;
    expect(titration!.runs).toEqual(['five', 'all']);
    near(titration!.stateOfCharge, 0.65);
    near(titration!.totalVanadium, 1.6);
    // Pipette and titrant are the same in both and cancel in the state of charge.
    expect(titration!.stateOfCharge.uncertainty!).toBeLessThan(0.003);
  });

  test('excess cerium(IV), titrated back: II/III without inert gas in the burette', () => {
    const [titration] = evaluate(
      run(
        {
          run: 'b',
          pair: 'V2/V3',
          titrant: 'iron',
          normality_mol_L: 0.1,
          aliquot_mL: 1,
          oxidant: 'cerium',
          oxidant_mL: 50,
          oxidant_normality_mol_L: 0.1,
          inert_gas: 'yes',
        },
        {
          vanadium: { V2: 0.96, V3: 0.64 },
          titrant: 'iron',
          oxidant: { kind: 'cerium', electrons: 5 },
          last: 30,
        },
      ),
    ).titrations;
    near(titration!.stateOfCharge, 0.6);
    near(titration!.totalVanadium, 1.6);
  });
});

describe('strength of titrants', () => {
  test('iron(II) against potassium dichromate', () => {
    // 0.0981 g: 6 · 98.1/294.181 = 2.0008 mmol of electrons, 20.0 mL
    const document = evaluate(
      run(
        { run: 'k', standard: 'potassium-dichromate', standard_g: 0.0981, titrant: 'iron' },
        {
          vanadium: {},
          titrant: 'iron',
          oxidant: { kind: 'dichromate', electrons: (6 * 98.1) / 294.181 },
          acid: 3,
          last: 26,
        },
      ),
    );
    near(document.titrants[0]!.strength, 0.1);
    expect(document.titrants[0]!.strength.uncertainty! / 0.1).toBeLessThan(0.004);
  });

  // Oxalate sets no potential of its own: readings before the end are a slow mixed potential, and only the jump can be used.
  test('permanganate against sodium oxalate, by the jump alone', () => {
    const end = 20; // 0.13400 g: 2 · 134.00/133.998 = 2.0000 mmol
    const volume = [
      ...Array.from({ length: 39 }, (_, i) => i / 2),
      ...Array.from({ length: 21 }, (_, i) => 19.5 + i / 20),
      21,
      22,
      23,
    ];
    const potential = volume.map((v) =>
      v < end - 1e-9
        ? 650 + 4 * v - 12 * Math.log10(Math.max(0.003, 1 - v / end))
        : 1180 + 30 * Math.log10(v - end + 0.02),
    );
    const document = evaluate({
      cells: {
        run: 'o',
        standard: 'sodium-oxalate',
        standard_g: 0.134,
        titrant: 'permanganate',
        beaker_mL: 100,
        temperature_C: 70,
      },
      volume,
      potential: potential.map((E, i) => E + 0.3 * Math.sin(7 * i)),
    });
    const [strength] = document.titrants;
    near(strength!.strength, 0.1);
    expect(document.runs[0]!.endPoints[0]!.methods.map(({ method }) => method)).toEqual(['second derivative']);
    expect(strength!.budget.map(({ source }) => source)).toEqual(
      expect.arrayContaining(['burette', 'end points', 'purity', 'weighing', 'molar mass']),
    );
  });

  test('a standardised strength carries its weighing into the samples, and two samples share it', () => {
    const document = evaluate(
      run(
        { run: 'k', standard: 'iron-ammonium-sulfate', standard_g: 0.8, standard_u_g: 0.004, titrant: 'cerium' },
        { vanadium: {}, iron: 800 / 392.125, titrant: 'cerium' },
      ),
      ...['a', 'b'].map((sample) =>
        run(
          { run: sample, sample, pair: 'V3/V4', titrant: 'cerium', aliquot_mL: 1 },
          { vanadium: { V3: 0.82, V4: 0.78 }, titrant: 'cerium' },
        ),
      ),
    );
    const [a, b] = document.titrations;
    const weighing = a!.errorSources.find(({ source }) => source === 'weighing')!;
    expect(weighing.effect.V3! / a!.concentration.V3!.value!).toBeCloseTo(0.005, 4);
    expect(b!.errorSources.map(({ key }) => key)).toContain(weighing.key);
    // The strength scales both states alike: it moves the total, not the mean oxidation state.
    const line = a!.budget.find(({ source }) => source === 'weighing')!;
    expect(line.averageOxidationState).toBeLessThan(1e-9);
    expect(line.totalVanadium).toBeGreaterThan(0.007);
  });
});

test('a blank run is taken off the samples of the same titrant', () => {
  const sample = run(
    { run: 's', pair: 'V3/V4', titrant: 'cerium', normality_mol_L: 0.1, aliquot_mL: 1 },
    { vanadium: { V3: 0.82, V4: 0.78 }, titrant: 'cerium' },
  );
  // 0.02 mmol of something iron-like in the acid: 0.2 mL
  const blank = run(
    { run: 'blank', task: 'blank', titrant: 'cerium' },
    { vanadium: {}, iron: 0.02, titrant: 'cerium', spacing: 0.04, last: 1, reading: 0.001 },
  );
  const [without] = evaluate(sample).titrations;
  const document = evaluate(sample, blank);
  const found = document.runs.find(({ task }) => task === 'blank')!.endPoints[0]!;
  expect(Math.abs(found.volume - 0.2)).toBeLessThan(3 * found.uncertainty);
  expect(without!.totalVanadium.value! - document.titrations[0]!.totalVanadium.value!).toBeCloseTo(
    found.volume / 10,
    6,
  );
});
