import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  chargeOffsetOf,
  netOxidationOf,
  usableChargeOf,
  vanadiumOf,
  vanadiumShiftOf,
} from '../../src/tanks/imbalance.ts';
import { giveElectrons, mixAndSplit, transfer, type Plant } from '../../src/tanks/plant.ts';
import { cellVoltage, predictedOpenCircuit } from '../../src/tanks/openCircuit.ts';
import { MOLAR_GAS_VOLUME, REDUCTANTS, weighable } from '../../src/tanks/reductants.ts';

const share = fc.double({ min: 0.02, max: 0.98, noNaN: true });
const vanadium = fc.double({ min: 100, max: 3000, noNaN: true });
const plant = fc
  .record({ n: vanadium, p: vanadium, sn: share, sp: share, vn: vanadium, vp: vanadium })
  .map(({ n, p, sn, sp, vn, vp }): Plant => ({
    amounts: {
      negative: { V2: n * sn, V3: n * (1 - sn), V4: 0, V5: 0 },
      positive: { V2: 0, V3: 0, V4: p * (1 - sp), V5: p * sp },
    },
    volume: { negative: vn, positive: vp },
  }));

describe('laws of balance', () => {
  test('X = M + offset, always', () => {
    fc.assert(
      fc.property(plant, ({ amounts }) => {
        expect(netOxidationOf(amounts)).toBeCloseTo(vanadiumShiftOf(amounts) + chargeOffsetOf(amounts), 6);
      }),
    );
  });

  test('moving and mixing keep vanadium and electrons; dosing keeps vanadium and takes what was given', () => {
    fc.assert(
      fc.property(plant, share, fc.constantFrom('negative' as const, 'positive' as const), (before, part, side) => {
        const all = ({ amounts }: Plant) => vanadiumOf(amounts.negative) + vanadiumOf(amounts.positive);
        const moved = transfer(before, side, part * before.volume[side]).plant;
        const mixed = mixAndSplit(before).plant;
        const dose = part * 50;
        const dosed = giveElectrons(before, side, dose);
        for (const after of [moved, mixed, dosed]) expect(all(after) / all(before)).toBeCloseTo(1, 9);
        for (const after of [moved, mixed])
          expect(netOxidationOf(after.amounts) - netOxidationOf(before.amounts)).toBeCloseTo(0, 5);
        expect(netOxidationOf(before.amounts) - netOxidationOf(dosed.amounts)).toBeCloseTo(dose, 5);
        expect(moved.volume.negative + moved.volume.positive).toBeCloseTo(
          before.volume.negative + before.volume.positive,
          6,
        );
      }),
    );
  });

  test('usable charge in closed form equals a search over what can be charged and discharged', () => {
    fc.assert(
      fc.property(plant, (one) => {
        const { negative, positive } = one.amounts;
        const n = vanadiumOf(negative);
        const p = vanadiumOf(positive);
        const discharge = Math.min(negative.V2, positive.V5);
        const charge = Math.min(n - negative.V2, p - positive.V5);
        expect(usableChargeOf(one.amounts)).toBeCloseTo(discharge + charge, 6);
      }),
    );
  });

  test('mixing leaves N/2 − |X| of usable charge', () => {
    fc.assert(
      fc.property(plant, (one) => {
        const total = vanadiumOf(one.amounts.negative) + vanadiumOf(one.amounts.positive);
        const expected = Math.max(0, total / 2 - Math.abs(netOxidationOf(one.amounts)));
        expect(usableChargeOf(mixAndSplit(one).plant.amounts)).toBeCloseTo(expected, 5);
      }),
    );
  });
});

describe('reductants', () => {
  // H2C2O4 → 2 CO2 + 2 H+ + 2 e−; HCOOH → CO2 + 2 H+ + 2 e−: carbon from the formula, electrons from the oxidation number of carbon.
  test.each([
    ['oxalic acid dihydrate', 2, 2 * (4 - 3)],
    ['formic acid', 1, 1 * (4 - 2)],
  ])('%s: carbon and electrons balance', (name, carbon, electrons) => {
    const reductant = REDUCTANTS.find((one) => one.name === name)!;
    expect(reductant.carbonDioxide).toBe(carbon);
    expect(reductant.electrons).toBe(electrons);
  });

  test('a weighable dose is never more than was asked', () => {
    fc.assert(
      fc.property(fc.double({ min: 0.2, max: 2000, noNaN: true }), (electrons) => {
        for (const reductant of REDUCTANTS) {
          const kilograms = weighable(reductant, electrons);
          expect((1000 * kilograms * reductant.electrons) / reductant.molarMass).toBeLessThanOrEqual(
            electrons * (1 + 1e-9),
          );
        }
      }),
    );
  });

  // RT/p at 25 °C and 101.325 kPa: 24.465 L/mol (CODATA 2018 gas constant).
  test('molar volume of an ideal gas', () => expect(MOLAR_GAS_VOLUME).toBeCloseTo(24.465, 3));
});

describe('rest voltage', () => {
  // E(90 %) − E(10 %) = 4 (RT/F) ln 9 = 225.8 mV at 25 °C, both sides equal (Nernst, CODATA 2018).
  test('ninety against ten per cent', () => {
    expect(predictedOpenCircuit(1.4, 0.9, 0.9) - predictedOpenCircuit(1.4, 0.1, 0.1)).toBeCloseTo(0.2258, 4);
  });
  test('the voltage of a stack is recognised by its size', () => {
    expect(cellVoltage(28.4, 20)).toEqual({ voltage: 1.42, stack: true });
    expect(cellVoltage(1.42, 20)).toEqual({ voltage: 1.42, stack: false });
  });
});
