import * as fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { blend, type BlendTarget, type MixingBench } from '../../src/bench/mixing/blend.ts';
import { deliver, flaskUncertainty } from '../../src/bench/mixing/deliver.ts';
import { dilutionSeries } from '../../src/bench/mixing/dilutionSeries.ts';
import { NOTHING, freeAcid, type Stock } from '../../src/bench/mixing/stock.ts';
import { NO_SPECTRUM } from '../../src/bench/standardsRow.ts';
import { oxidationNumber, SPECIES, type Species } from '../../src/electrolyte/species.ts';
import { measured } from '../../src/numerics/measured.ts';
import { seededRandom } from '../../src/numerics/random.ts';

const stock = (name: string, states: Partial<Record<Species, number>>, rest: Partial<Stock> = {}): Stock => ({
  name,
  concentration: {
    ...NOTHING,
    ...Object.fromEntries(
      Object.entries(states).map(([species, value]) => [
        species,
        measured(value, 0.005 * value, `stock ${name}:${species}`),
      ]),
    ),
  },
  sulfate: 4.6,
  available: Infinity,
  density: null,
  preparation: name,
  where: name,
  ...rest,
});
const II = stock('II', { V2: 1.6 });
const III = stock('III', { V3: 1.6 });
const IV = stock('IV', { V4: 1.6 });
const V = stock('V', { V5: 1.6 });
const acid = stock('acid', {});
const water = stock('water', {}, { sulfate: 0 });

const bench = (...stocks: Stock[]): MixingBench => ({ stocks, glassClass: 'A', byMass: false });
const target = (concentration: Partial<Record<Species, number>>, rest: Partial<BlendTarget> = {}): BlendTarget => ({
  name: 'wanted',
  concentration,
  volume: 100,
  sulfate: null,
  spectrum: NO_SPECTRUM,
  ...rest,
});
const volumes = ({ portions }: { portions: readonly { stock: string; volume: number }[] }) =>
  Object.fromEntries(portions.map(({ stock: name, volume }) => [name, volume]));

describe('glassware', () => {
  // ISO 648 and ISO 1042 class A limits (from memory; 1, 5, 10 mL and the flasks as in practice), triangular: tolerance/√6.
  test.each([
    [10, 0.02, '10 mL pipette'],
    [25, 0.03, '25 mL pipette'],
    [50, 0.05, '50 mL pipette'],
    [5, 0.015, '5 mL pipette'],
  ])('%i mL by a one-mark pipette', (volume, tolerance, by) => {
    expect(deliver(volume, 'A')).toMatchObject({ volume, by });
    expect(deliver(volume, 'A').uncertainty).toBeCloseTo(tolerance / Math.sqrt(6), 12);
    expect(deliver(volume, 'B').uncertainty).toBeCloseTo((2 * tolerance) / Math.sqrt(6), 12);
  });

  test.each([
    [50, 0.06],
    [100, 0.1],
    [250, 0.15],
    [1000, 0.4],
  ])('a %i mL flask', (volume, tolerance) => {
    expect(flaskUncertainty(volume, 'A')).toBeCloseTo(tolerance / Math.sqrt(6), 12);
  });

  test('fills of one pipette err together', () => {
    expect(deliver(20.0, 'A')).toMatchObject({ by: '20 mL pipette' });
    expect(deliver(100, 'A')).toMatchObject({ volume: 100, by: '50 mL pipette, twice' });
    expect(deliver(100, 'A').uncertainty).toBeCloseTo((2 * 0.05) / Math.sqrt(6), 12);
  });

  test('what no pipette makes comes from a burette, to half a division', () => {
    expect(deliver(7.337, 'A')).toMatchObject({ volume: 7.34, by: '10 mL burette' });
    expect(deliver(37.33, 'A')).toMatchObject({ volume: 37.35, by: '50 mL burette' });
  });
});

describe('a blend', () => {
  test('of neighbours: half of each, made up with acid', () => {
    const { mixture } = blend(target({ V4: 0.4, V5: 0.4 }), bench(II, III, IV, V, acid));
    expect(volumes(mixture)).toEqual({ IV: 25, V: 25, acid: 50 });
    expect(mixture).toMatchObject({ state: 'sound', heat: expect.closeTo(0, 9), reactions: [] });
  });

  // Equal litres of V(III) and V(V) make V(IV): 64.4 kJ per mol of reaction, 80 mmol in 100 mL: 5.2 kJ, 11.9 K over 4.33 kJ/(L·K).
  test('of states that cannot coexist: they react, it warms, and the order says so', () => {
    const { mixture } = blend(target({ V4: 1.6 }), bench(III, V, acid));
    expect(volumes(mixture)).toMatchObject({ III: 50, V: 50 });
    expect(mixture.reactions).toEqual([
      { equation: 'V(III) + V(V) → 2 V(IV)', extent: expect.closeTo(0.08, 6), heat: expect.closeTo(5.15, 2) },
    ]);
    expect(mixture.warming).toBeCloseTo(11.9, 1);
    expect(mixture.findings.map(({ code }) => code)).toContain('mixing-heat');
    expect(mixture.steps.join(' ')).toContain('ice bath');
    expect(mixture.colour).toBe('bright blue');
  });

  test('stocks of the wanted pair come before those that would react', () => {
    const { mixture } = blend(target({ V3: 0.4, V4: 0.4 }), bench(II, V, III, IV, acid));
    expect(Object.keys(volumes(mixture)).sort()).toEqual(['III', 'IV', 'acid']);
  });

  test('V(II) goes in last and under inert gas; the weaker liquid goes in first', () => {
    const { mixture } = blend(target({ V2: 0.4, V3: 0.4 }, { sulfate: 4 }), bench(II, III, acid, water));
    const where = (text: string): number => mixture.steps.findIndex((step) => step.includes(text));
    expect(where('sparge')).toBe(0);
    expect(where(' of III ')).toBeLessThan(where(' of II '));
    expect(where('water')).toBeLessThan(where('put in about a third of the acid'));
    expect(mixture.sulfate).toBeCloseTo(4, 1);
  });

  test('the label is that of the volumes that can be measured out, not of the wish', () => {
    const { mixture } = blend(target({ V4: 0.437, V5: 0.263 }, { volume: 50 }), bench(IV, V, acid));
    const by = volumes(mixture);
    expect(mixture.concentration.V4!.value).toBeCloseTo((by['IV']! * 1.6) / 50, 12);
    expect(by['IV']! * 100).toBeCloseTo(Math.round(by['IV']! * 100), 9);
  });

  test('acid: neutral solutions keep the books (practice: V2O5 takes half a mol H2SO4, oxidation of V(IV) sets half a mol free)', () => {
    const of = (species: Species) => freeAcid({ V2: 0, V3: 0, V4: 0, V5: 0, [species]: 1 }, 4);
    expect(of('V4')).toBe(3);
    expect(of('V5')).toBe(3.5);
    expect(of('V3')).toBe(2.5);
    expect(of('V2')).toBe(3);
  });

  test('by mass where the density is known: the balance replaces the burette', () => {
    const dense = { ...IV, density: 1.34 };
    const { mixture } = blend(target({ V4: 0.8 }, { volume: 50 }), { ...bench(dense, acid), byMass: true });
    expect(mixture.portions[0]).toMatchObject({ stock: 'IV', unit: 'g', by: 'balance' });
    expect(mixture.portions[0]!.mass).toBeCloseTo(25 * 1.34, 2);
  });
});

describe('what cannot be made', () => {
  test.each([
    ['a state above every stock', target({ V5: 0.8 }), [III, IV, acid], 'a stock with V(V)'],
    ['a state below every stock', target({ V2: 0.8 }), [III, IV, acid], 'a stock with V(II)'],
    [
      'more than the stocks hold',
      target({ V4: 2.0 }),
      [IV, acid],
      'the most they give at this oxidation state is 1.600 mol/L',
    ],
    [
      'more than there is',
      target({ V4: 0.8 }),
      [{ ...IV, available: 20 }, acid],
      'make a smaller volume, or more of that stock',
    ],
    ['an acid out of reach', target({ V4: 0.8 }, { sulfate: 8 }), [IV, acid], 'an acid of another strength'],
  ])('%s: says what is missing, and the nearest', (_, wish, stocks, hint) => {
    const { mixture } = blend(wish, bench(...stocks));
    expect(mixture).toMatchObject({ state: 'withheld', standardsRow: null });
    const finding = mixture.findings.find(({ code }) => code === 'cannot-be-made')!;
    expect(finding.hint).toContain(hint);
    expect(finding.message).toContain('nearest:');
    expect(mixture.portions.length).toBeGreaterThan(0);
  });

  test.each([
    [target({}), 'no-vanadium'],
    [target({ V4: 0.8 }, { volume: 0 }), 'volume-missing'],
    [target({ V4: 0.8 }, { sulfate: 4 }), 'sulfate-unknown'],
  ])('%j is refused', (wish, code) => {
    expect(() => blend(wish, bench({ ...IV, sulfate: null }, acid))).toThrow(expect.objectContaining({ code }));
  });
});

describe('laws', () => {
  const amount = fc.integer({ min: 5, max: 60 }).map((hundredths) => hundredths / 100);
  test('vanadium and electrons of the portions are those of the label', () => {
    fc.assert(
      fc.property(fc.constantFrom(0, 1, 2), amount, amount, (pair, low, high) => {
        const [lower, higher] = [SPECIES[pair]!, SPECIES[pair + 1]!];
        const stocks = [II, III, IV, V, acid];
        const { mixture } = blend(target({ [lower]: low, [higher]: high }, { volume: 250 }), bench(...stocks));
        const by = volumes(mixture);
        let [vanadium, electrons] = [0, 0];
        for (const one of stocks)
          for (const species of SPECIES) {
            const millimol = (by[one.name] ?? 0) * one.concentration[species].value;
            vanadium += millimol;
            electrons += millimol * oxidationNumber(species);
          }
        expect(mixture.totalVanadium.value! * 250).toBeCloseTo(vanadium, 9);
        expect(mixture.averageOxidationState.value!).toBeCloseTo(electrons / vanadium, 9);
        expect(Math.abs(mixture.totalVanadium.value! / (low + high) - 1)).toBeLessThan(0.02);
      }),
      { numRuns: 60 },
    );
  });

  // Stocks, burettes and flask drawn from what is stated: the label's uncertainties must hold.
  test('labels hold their 95 % intervals', () => {
    const random = seededRandom(8);
    const { mixture } = blend(target({ V4: 0.437, V5: 0.263 }), bench(IV, V, acid));
    const by = Object.fromEntries(mixture.portions.map((portion) => [portion.stock, portion]));
    let [inTotal, inShare] = [0, 0];
    const count = 2000;
    for (let i = 0; i < count; i++) {
      const millimol = (name: string): number =>
        1.6 * (1 + 0.005 * random.normal()) * (by[name]!.volume + by[name]!.uncertainty * random.normal());
      const [four, five] = [millimol('IV'), millimol('V')];
      const volume = 100 + mixture.volume.uncertainty! * random.normal();
      const { totalVanadium, averageOxidationState } = mixture;
      if (Math.abs((four + five) / volume - totalVanadium.value!) < 1.96 * totalVanadium.uncertainty!) inTotal++;
      if (Math.abs(4 + five / (four + five) - averageOxidationState.value!) < 1.96 * averageOxidationState.uncertainty!)
        inShare++;
    }
    for (const inside of [inTotal, inShare]) {
      expect(inside / count).toBeGreaterThan(0.935);
      expect(inside / count).toBeLessThan(0.965);
    }
  });
});

describe('a dilution series', () => {
  test('comes from the stock, and from an earlier bottle where the pipette would be too small', () => {
    const series = dilutionSeries(IV, [0.02, 0.8, 0.1], 50, bench(IV, acid));
    expect(series.map(({ name, portions }) => [name, portions[0]!.stock])).toEqual([
      ['IV 0.8', 'IV'],
      ['IV 0.1', 'IV'],
      ['IV 0.02', 'IV 0.1'],
    ]);
    for (const { sulfate } of series) expect(sulfate).toBeCloseTo(4.6, 6);
    // The error of the stock stays the same share of every bottle.
    for (const { budget, totalVanadium } of series)
      expect(budget.find(({ source }) => source === 'stock IV')!.totalVanadium / totalVanadium.value!).toBeCloseTo(
        0.005,
        6,
      );
  });

  test('another acid is told, a stronger wish and a sheet without acid are refused', () => {
    const [mixture] = dilutionSeries(IV, [0.8], 50, bench(IV, water));
    expect(mixture!.findings.map(({ code }) => code)).toContain('wrong-matrix');
    expect(() => dilutionSeries(IV, [2], 50, bench(IV, acid))).toThrow(
      expect.objectContaining({ code: 'stronger-than-stock' }),
    );
    expect(() => dilutionSeries(IV, [0.8], 50, bench(IV, V))).toThrow(
      expect.objectContaining({ code: 'diluent-missing' }),
    );
  });
});
