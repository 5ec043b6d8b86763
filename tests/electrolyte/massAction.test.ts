import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { boundConcentration } from '../../src/electrolyte/boundConcentration.ts';
import { solveMassAction } from '../../src/electrolyte/massAction.ts';

const total = fc.double({ min: 1e-4, max: 3, noNaN: true });
const constant = fc.double({ min: 1e-6, max: 1e4, noNaN: true });

describe('boundConcentration', () => {
  // K = x/((a − x)(b − x)) = 1.0 L/mol, half and half: shares by hand from the quadratic.
  test.each([
    [1.83, 0.367],
    [1.6, 0.344],
    [0.8, 0.234],
    [0.16, 0.069],
    [0.016, 0.008],
  ])('at %s mol/L half and half and K = 1 the bound share of V(IV) is %s', (c, share) => {
    expect(boundConcentration(c / 2, c / 2, 1) / (c / 2)).toBeCloseTo(share, 3);
  });

  test('no digits are lost when K vanishes: x → K a b', () => {
    expect(boundConcentration(0.3, 0.7, 1e-12) / (1e-12 * 0.3 * 0.7)).toBeCloseTo(1, 9);
  });

  test('diluting a sample sets part of the complex free', () => {
    fc.assert(
      fc.property(total, total, constant, fc.double({ min: 1.01, max: 1000, noNaN: true }), (a, b, K, D) => {
        const share = boundConcentration(a, b, K) / a;
        expect(boundConcentration(a / D, b / D, K) / (a / D)).toBeLessThan(share * (1 + 1e-12));
      }),
    );
  });

  test.each([[-1], [NaN], [Infinity]])('an association constant of %s is refused', (K) => {
    const refusal = { code: 'association-constant', where: 'associations[].associationConstant' };
    expect(() => boundConcentration(1, 1, K)).toThrow(expect.objectContaining(refusal));
  });
});

describe('solveMassAction', () => {
  test('equals the closed form for one 1:1 association', () => {
    fc.assert(
      fc.property(total, total, constant, (a, b, K) => {
        const solved = solveMassAction(a, b, [{ lower: 1, higher: 1, constant: K }]).amount[0]!;
        const closed = boundConcentration(a, b, K);
        expect(Math.abs(solved - closed)).toBeLessThan(1e-10 * closed + 1e-300);
      }),
      { numRuns: 2000 },
    );
  });

  test('keeps both balances and every equilibrium for three associations at once', () => {
    fc.assert(
      fc.property(total, total, constant, constant, constant, (a, b, k1, k2, k3) => {
        const associations = [
          { lower: 1, higher: 1, constant: k1 },
          { lower: 0, higher: 2, constant: k2 },
          { lower: 2, higher: 1, constant: k3 },
        ];
        const { freeLower, freeHigher, amount } = solveMassAction(a, b, associations);
        const balanceA = freeLower + amount[0]! + 2 * amount[2]!;
        const balanceB = freeHigher + amount[0]! + 2 * amount[1]! + amount[2]!;
        expect(Math.abs(balanceA / a - 1)).toBeLessThan(1e-9);
        expect(Math.abs(balanceB / b - 1)).toBeLessThan(1e-9);
        associations.forEach((x, j) => {
          const law = x.constant * freeLower ** x.lower * freeHigher ** x.higher;
          expect(Math.abs(amount[j]! / law - 1)).toBeLessThan(1e-9);
        });
      }),
      { numRuns: 500 },
    );
  });

  test('derivatives by the implicit function theorem agree with differences', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 0.05, max: 2, noNaN: true }),
        fc.double({ min: 0.05, max: 2, noNaN: true }),
        fc.double({ min: 0.01, max: 20, noNaN: true }),
        (a, b, K) => {
          const associations = [
            { lower: 1, higher: 1, constant: K },
            { lower: 0, higher: 2, constant: K / 3 },
          ];
          const at = (p: number, q: number) => solveMassAction(p, q, associations);
          const here = at(a, b);
          const h = 1e-5;
          for (const j of [0, 1]) {
            const byA = (at(a + h, b).amount[j]! - at(a - h, b).amount[j]!) / (2 * h);
            const byB = (at(a, b + h).amount[j]! - at(a, b - h).amount[j]!) / (2 * h);
            expect(here.byLower[j]!).toBeCloseTo(byA, 6);
            expect(here.byHigher[j]!).toBeCloseTo(byB, 6);
          }
        },
      ),
      { numRuns: 300 },
    );
  });
});
