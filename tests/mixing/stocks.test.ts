import { describe, expect, test } from 'vitest';
import { expectedColour } from '../../src/bench/mixing/colours.ts';
import { dissolve, type DissolveRequest } from '../../src/bench/mixing/dissolve.ts';
import { electrolyse, type ElectrolysisRequest } from '../../src/bench/mixing/electrolysis.ts';
import { NOTHING, type Stock } from '../../src/bench/mixing/stock.ts';
import { readStocksSheet, readTargetsSheet, TankhueError } from '../../src/index.ts';
import { exactly, measured } from '../../src/numerics/measured.ts';
import { seededRandom } from '../../src/numerics/random.ts';

const salt: DissolveRequest = {
  name: 'S',
  solid: 'vanadyl-sulfate',
  vanadiumFraction: null,
  water: [5, 5],
  state: 'V4',
  total: 1.6,
  sulfate: 4.6,
  volume: 1000,
  acidStock: 18,
  glassClass: 'A',
};

describe('dissolving', () => {
  // VOSO4·5H2O is 253.07 g/mol (handbook): 1.6 mol weigh 404.9 g; its own 1.6 mol of sulfate leave 3.0 mol of acid to add, 166.7 mL of 18 mol/L.
  test('vanadyl sulfate pentahydrate', () => {
    const mixture = dissolve(salt);
    expect(mixture.portions[0]!.mass).toBeCloseTo(404.91, 1);
    expect(mixture.portions[1]!.volume).toBeCloseTo(166.7, 1);
    expect(mixture.freeAcid).toBeCloseTo(3.0, 5);
    expect(mixture).toMatchObject({ state: 'sound', colour: 'bright blue' });
  });

  // Water between 3 and 5: 50.94/217.04 to 50.94/253.07, half width 7.67 % of the middle, over √3: 4.4 %.
  test('unknown water makes the label doubtful by its share', () => {
    const mixture = dissolve({ ...salt, water: [3, 5] });
    const [dry, wet] = [50.9415 / (162.9965 + 3 * 18.015), 50.9415 / (162.9965 + 5 * 18.015)];
    const share = (dry - wet) / (dry + wet) / Math.sqrt(3);
    expect(mixture.totalVanadium.uncertainty! / mixture.totalVanadium.value!).toBeCloseTo(share, 4);
    expect(mixture.findings.map(({ code }) => code)).toEqual(['label-doubtful']);
    const analysed = dissolve({ ...salt, water: [3, 5], vanadiumFraction: { value: 0.214, uncertainty: 0.001 } });
    expect(analysed.findings).toEqual([]);
    expect(analysed.portions[0]!.mass).toBeCloseTo((1.6 * 50.9415) / 0.214, 2);
  });

  // V2O5 181.88 g/mol: 0.8 mol of 99 % weigh 146.97 g. As V(IV) each vanadium takes 1 mol H2SO4, as V(V) half a mol.
  test('vanadium pentoxide, reduced on the way or not', () => {
    const four = dissolve({ ...salt, solid: 'vanadium-pentoxide' });
    expect(four.portions[0]!.mass).toBeCloseTo((0.8 * 181.878) / 0.99, 2);
    // 0.8 mol of oxalic acid dihydrate, 126.064 g/mol, and 1.6 mol of CO2, 39.1 L at 25 °C
    expect(four.portions[1]).toMatchObject({ stock: 'oxalic acid dihydrate', mass: expect.closeTo(100.85, 2) });
    expect(four.steps.join(' ')).toContain('39.1 L of CO2');
    expect(four.cautions.map(({ code }) => code)).toContain('carbon-dioxide');
    expect(four.freeAcid).toBeCloseTo(3.0, 5);
    const five = dissolve({ ...salt, solid: 'vanadium-pentoxide', state: 'V5', total: 0.08 });
    expect(five.freeAcid).toBeCloseTo(4.6 - 0.04, 4);
    expect(five.findings).toEqual([]);
    const much = dissolve({ ...salt, solid: 'vanadium-pentoxide', state: 'V5' });
    expect(much.findings.map(({ code }) => code)).toContain('will-not-dissolve');
  });

  test.each([
    [{ sulfate: 1.2 }, 'acid-short', 'withheld'],
    [{ sulfate: 2.2 }, 'acid-short', 'caution'],
    [{ acidStock: 2 }, 'cannot-be-made', 'withheld'],
  ])('%j gives %s', (change, code, state) => {
    const mixture = dissolve({ ...salt, ...change });
    expect(mixture.findings.map((finding) => finding.code)).toContain(code);
    expect(mixture.state).toBe(state);
  });
});

const four: Stock = {
  name: 'IV',
  concentration: { ...NOTHING, V4: measured(1.6, 0.008, 'stock IV:V4') },
  sulfate: 4.6,
  available: Infinity,
  density: null,
  preparation: 'IV',
  where: 's.csv:2',
};
const cell: ElectrolysisRequest = {
  name: 'charged',
  stock: four,
  volume: { value: 100, uncertainty: 0.2 },
  oxidationState: 3.5,
  charge: null,
  efficiency: { value: 1, uncertainty: 0 },
  current: 2,
};

describe('electrolysis', () => {
  // Faraday: 0.16 mol · 26.8015 Ah/mol = 4.288 Ah for one electron each.
  test.each([
    [5, 4.288, ['V(IV)', 'V(V)'], 'yellow'],
    [3, 4.288, ['V(IV)', 'V(III)'], 'green'],
    [2, 8.576, ['V(IV)', 'V(III)', 'V(II)'], 'violet'],
    [3.5, 2.144, ['V(IV)', 'V(III) and V(IV)'], 'dark blue-green'],
  ])('V(IV) to %s takes %s Ah and passes %j', (oxidationState, charge, holds, colour) => {
    const { stages } = electrolyse({ ...cell, oxidationState });
    expect(stages.at(-1)!.charge).toBeCloseTo(charge, 3);
    expect(stages.at(-1)!.hours).toBeCloseTo(charge / 2, 3);
    expect(stages.map((stage) => stage.holds)).toEqual(holds);
    expect(stages.at(-1)!.colour).toBe(colour);
  });

  test('a poor current efficiency asks for more charge', () => {
    const { stages } = electrolyse({ ...cell, oxidationState: 3, efficiency: { value: 0.9, uncertainty: 0.01 } });
    expect(stages.at(-1)!.charge).toBeCloseTo(4.288 / 0.9, 3);
  });

  // The label from the coulombs, drawn from what is stated.
  test('the label holds its interval', () => {
    const random = seededRandom(4);
    const request: ElectrolysisRequest = {
      ...cell,
      oxidationState: null,
      charge: { value: -2.5, uncertainty: 0.01 },
      efficiency: { value: 0.97, uncertainty: 0.01 },
    };
    const { averageOxidationState, concentration } = electrolyse(request).mixture;
    let [inside, inThree] = [0, 0];
    const count = 2000;
    for (let i = 0; i < count; i++) {
      const total = 1.6 + 0.008 * random.normal();
      const moles = (total * (100 + 0.2 * random.normal())) / 1000;
      const charge = (-2.5 + 0.01 * random.normal()) * (0.97 + 0.01 * random.normal());
      const nu = 4 + charge / (moles * 26.8014811454);
      if (Math.abs(nu - averageOxidationState.value!) < 1.96 * averageOxidationState.uncertainty!) inside++;
      if (Math.abs((4 - nu) * total - concentration.V3!.value!) < 1.96 * concentration.V3!.uncertainty!) inThree++;
    }
    for (const hits of [inside, inThree]) {
      expect(hits / count).toBeGreaterThan(0.935);
      expect(hits / count).toBeLessThan(0.965);
    }
  });

  test('the total keeps the uncertainty of the stock, the state gets that of the coulombs', () => {
    const { mixture } = electrolyse({ ...cell, efficiency: { value: 0.98, uncertainty: 0.01 } });
    expect(mixture.totalVanadium.uncertainty).toBeCloseTo(0.008, 9);
    const efficiency = mixture.budget.find(({ source }) => source === 'current efficiency')!;
    expect(efficiency.totalVanadium).toBeLessThan(1e-9);
    expect(efficiency.averageOxidationState).toBeCloseTo((0.5 * 0.01) / 0.98, 6);
    expect(mixture.standardsRow).toMatchObject({ V3_mol_L: expect.closeTo(0.8, 3), preparation: 'IV' });
  });

  test('acid follows the charge: V(V) frees half a mol of H2SO4 a mol, V(III) binds half a mol', () => {
    const acidAt = (oxidationState: number) => electrolyse({ ...cell, oxidationState }).mixture.freeAcid!;
    expect(acidAt(5) - acidAt(4)).toBeCloseTo(0.8, 9);
    expect(acidAt(3) - acidAt(4)).toBeCloseTo(-0.8, 9);
  });

  test('more charge than there is vanadium gives gas, and no label', () => {
    const { mixture } = electrolyse({ ...cell, oxidationState: null, charge: { value: 5, uncertainty: 0.01 } });
    expect(mixture).toMatchObject({ state: 'withheld', standardsRow: null });
    expect(mixture.findings[0]!.code).toBe('overcharged');
  });

  test.each([
    [{ oxidationState: 6 }, 'state-unreachable'],
    [{ stock: { ...four, concentration: NOTHING } }, 'no-vanadium'],
  ])('%j is refused', (change, code) => {
    expect(() => electrolyse({ ...cell, ...change })).toThrow(expect.objectContaining({ code }));
  });
});

test.each([
  [2, 'violet'],
  [3.01, 'green'],
  [4, 'bright blue'],
  [4.3, 'very dark green, nearly black'],
  [5, 'yellow'],
])('a solution of mean oxidation state %s looks %s', (nu, colour) => {
  expect(expectedColour(nu)).toBe(colour);
});

describe('sheets', () => {
  const bytes = (text: string) => new TextEncoder().encode(text);
  test('a stock without uncertainty is taken at 1 % and says so; a pure one is pure to 0.002 in oxidation state', () => {
    const { stocks, assumed } = readStocksSheet(bytes('stock,V4_mol_L,acid_mol_L\nIV,1.6,4.6\nacid,0,4.6\n'), 's.csv');
    expect(assumed).toEqual(['IV known to 1 %, because the sheet does not say']);
    const [, five] = [stocks[0]!.concentration.V4, stocks[0]!.concentration.V5];
    expect(five.value).toBe(0);
    expect(Math.hypot(...five.effects.values())).toBeCloseTo(0.0032, 12);
    expect(stocks[1]!.concentration.V4).toEqual(exactly(0));
  });

  test.each([
    ['stock,V4_mol_L\n,1.6\n', 'name-missing'],
    ['stock,V4_mol_L\nA,1.6\nA,1.6\n', 'name-repeats'],
    ['stock,V4_mol_L\nA,-1\n', 'out-of-range'],
    ['stock,V4_mM\nA,1600\n', 'column-unit'],
  ])('stocks %j', (text, code) => {
    expect(() => readStocksSheet(bytes(text), 's.csv')).toThrow(TankhueError);
    expect(() => readStocksSheet(bytes(text), 's.csv')).toThrow(expect.objectContaining({ code }));
  });

  test('a target needs a name and a volume', () => {
    expect(() => readTargetsSheet(bytes('standard,V4_mol_L,volume_mL\n,0.8,\n'), 't.csv')).toThrow(
      expect.objectContaining({ code: 'name-missing' }),
    );
  });
});
