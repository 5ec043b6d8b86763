import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { parseAssociation } from '../../src/electrolyte/association.ts';
import { amountsOf, newAmounts } from '../../src/electrolyte/forwardModel.ts';

const COMPLEX = { name: 'V4·V5', reactants: { V4: 1, V5: 1 }, associationConstant: 1.2 };
const DIMER_LAW = { name: '2V5', reactants: { V5: 2 }, associationConstant: 0 };
const total = fc.double({ min: 0.01, max: 2, noNaN: true });

describe('amountsOf', () => {
  test('without associations the amounts are the totals: Beer-Lambert', () => {
    const { amount, byLower, byHigher } = amountsOf('V2/V3', [])(0.4, 0.9, newAmounts(2));
    expect([...amount, ...byLower, ...byHigher]).toEqual([0.4, 0.9, 1, 0, 0, 1]);
  });

  test('closed form and general solver give the same amounts and derivatives', () => {
    // A second strong association of vanishing constant sends the same chemistry through the general solver.
    const trace = { name: '2V5', reactants: { V5: 2 }, associationConstant: 1e-12 };
    const closed = amountsOf('V4/V5', [COMPLEX]);
    const general = amountsOf('V4/V5', [COMPLEX, trace]);
    fc.assert(
      fc.property(total, total, (a, b) => {
        const x = closed(a, b, newAmounts(3));
        const y = general(a, b, newAmounts(4));
        expect(y.amount[2]!).toBeCloseTo(x.amount[2]!, 9);
        expect(y.byLower[2]!).toBeCloseTo(x.byLower[2]!, 7);
        expect(y.byHigher[2]!).toBeCloseTo(x.byHigher[2]!, 7);
      }),
    );
  });

  test('the weak limit is the product of totals, with its derivatives', () => {
    const { amount, byLower, byHigher } = amountsOf('V4/V5', [DIMER_LAW])(0.5, 0.3, newAmounts(3));
    expect(amount[2]).toBeCloseTo(0.09, 12);
    expect(byLower[2]).toBe(0);
    expect(byHigher[2]).toBeCloseTo(0.6, 12);
  });

  test('an association of species outside the pair is refused', () => {
    expect(() => amountsOf('V2/V3', [COMPLEX])).toThrow(
      expect.objectContaining({ code: 'association-outside-pair', where: 'associations[0]' }),
    );
  });
});

describe('parseAssociation', () => {
  test.each([
    ['V4+V5', 'V4·V5', { V4: 1, V5: 1 }],
    [' 2V5', '2V5', { V5: 2 }],
    ['V5 + V5', '2V5', { V5: 2 }],
  ])('%s', (text, name, reactants) => {
    expect(parseAssociation(text, 'x')).toEqual({ name, reactants, associationConstant: 0 });
  });

  test.each([['V6'], ['V4-V5'], [''], ['0V5']])('"%s" is refused', (text) => {
    expect(() => parseAssociation(text, '--association')).toThrow(
      expect.objectContaining({ code: 'unknown-association', where: '--association' }),
    );
  });
});
