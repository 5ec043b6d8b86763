import * as fc from 'fast-check';
import { expect, test } from 'vitest';
import { mixStates, warmingOf } from '../../src/electrolyte/mixStates.ts';
import { SPECIES, oxidationNumber } from '../../src/electrolyte/species.ts';

const none = { V2: 0, V3: 0, V4: 0, V5: 0 };

// Formation enthalpies from memory of the NBS tables: −91.2, −64.4, −155.6 kJ/mol follow by hand.
test.each([
  [{ V2: 1, V4: 1 }, { V3: 2 }, 91.2, 2],
  [{ V3: 1, V5: 1 }, { V4: 2 }, 64.4, 0],
  [{ V2: 1, V5: 1 }, { V3: 1, V4: 1 }, 155.6, 2],
  [{ V2: 2, V5: 1 }, { V3: 3 }, 246.8, 4],
  [{ V2: 1, V5: 2 }, { V4: 3 }, 220, 2],
])('%j react to %j', (before, after, heat, protons) => {
  const mixed = mixStates({ ...none, ...before });
  for (const species of SPECIES) expect(mixed.amounts[species]).toBeCloseTo({ ...none, ...after }[species], 12);
  expect(mixed.heat).toBeCloseTo(heat, 9);
  expect(mixed.protonsConsumed).toBeCloseTo(protons, 12);
});

test('neighbours only mix: nothing reacts, nothing warms', () => {
  expect(mixStates({ ...none, V4: 0.3, V5: 0.5 })).toMatchObject({ pair: 'V4/V5', reactions: [] });
  expect(mixStates({ ...none, V4: 0.3, V5: 0.5 }).heat).toBeCloseTo(0, 12);
});

// Equal litres of both sides at 1.6 mol/L and 50 % SOC: the heat 155.6 · 0.5 · 0.8 kJ per litre over 4.33 kJ/(L·K) is 14.4 K.
test('equal tanks at half charge warm by 14.4 K', () => {
  const mixed = mixStates({ V2: 0.8, V3: 0.8, V4: 0.8, V5: 0.8 });
  expect(warmingOf(mixed.heat, 2)).toBeCloseTo(14.4, 1);
  expect(mixed.averageOxidationState).toBeCloseTo(3.5, 12);
});

const amount = fc.double({ min: 0, max: 1000, noNaN: true });
test('mixing keeps vanadium and electrons, leaves neighbours only, and its reactions add up to its heat', () => {
  fc.assert(
    fc.property(amount, amount, amount, amount, (V2, V3, V4, V5) => {
      const before = { V2, V3, V4, V5 };
      const total = V2 + V3 + V4 + V5;
      fc.pre(total > 1e-6);
      const mixed = mixStates(before);
      const sum = (weight: (species: (typeof SPECIES)[number]) => number, of: Readonly<Record<string, number>>) =>
        SPECIES.reduce((s, species) => s + weight(species) * of[species]!, 0);
      expect(sum(() => 1, mixed.amounts) / total).toBeCloseTo(1, 12);
      expect(sum(oxidationNumber, mixed.amounts) / total).toBeCloseTo(sum(oxidationNumber, before) / total, 12);
      expect(mixed.reactions.reduce((s, { heat }) => s + heat, 0) / total).toBeCloseTo(mixed.heat / total, 8);
      for (const species of SPECIES) expect(mixed.amounts[species] / total).toBeGreaterThan(-1e-12);
      expect(mixed.heat).toBeGreaterThan(-1e-9 * total);
    }),
  );
});

test('a measured amount slightly below zero goes through, nothing is clipped', () => {
  const mixed = mixStates({ ...none, V4: 1, V5: -0.01 });
  expect(mixed.averageOxidationState).toBeLessThan(4);
  expect(mixed.amounts.V3).toBeCloseTo(0.01, 12);
});

test.each([
  [{ ...none, V2: NaN }, 'not-finite', 'amounts.V2'],
  [{ ...none, V5: Infinity }, 'not-finite', 'amounts.V5'],
  [none, 'no-vanadium', 'amounts'],
])('%j is refused', (amounts, code, where) => {
  expect(() => mixStates(amounts)).toThrow(expect.objectContaining({ code, where }));
});
