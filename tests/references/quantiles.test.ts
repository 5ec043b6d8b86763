import { describe, expect, test } from 'vitest';
import { chiSquareQuantile, fQuantile, normalQuantile, studentQuantile } from '../../src/numerics/distributions.ts';
import { expectPrinted, expectRelative, HAS_REFERENCES, published, WITHOUT_REFERENCES } from './published.ts';

describe.skipIf(!HAS_REFERENCES)(`quantiles ${WITHOUT_REFERENCES}`, () => {
  const file = HAS_REFERENCES ? published('chauvenet_outliers') : null;
  /** The F table is printed to eight figures, the others to ten. */
  const TOLERANCE = { ten: 1e-9, eight: 1e-7 };

  test('Student', () =>
    file.student_t.dof.forEach((freedom: number, i: number) => {
      expectRelative(studentQuantile(0.975, freedom), file.student_t.two_sided_95[i], TOLERANCE.ten);
      expectRelative(studentQuantile(0.95, freedom), file.student_t.one_sided_95[i], TOLERANCE.ten);
    }));

  test('chi-square', () => {
    for (const [p, values] of Object.entries<number[]>(file.chi_squared.probability))
      file.chi_squared.dof.forEach((freedom: number, i: number) =>
        expectRelative(
          chiSquareQuantile(Number(p), freedom),
          values[i]!,
          freedom < 2 ? TOLERANCE.eight : TOLERANCE.ten,
        ),
      );
  });

  test('F', () => {
    for (const [p, rows] of Object.entries<number[][]>(file.f.probability))
      file.f.numerator_dof.forEach((numerator: number, i: number) =>
        file.f.denominator_dof.forEach((denominator: number, j: number) =>
          expectRelative(fQuantile(Number(p), numerator, denominator), rows[i]![j]!, TOLERANCE.eight),
        ),
      );
  });

  // W. Chauvenet, A Manual of Spherical and Practical Astronomy, 1863: reject where n·P(|z| > k) < ½.
  test("Chauvenet's criterion", () =>
    file.chauvenet.n.forEach((n: number, i: number) =>
      expectRelative(normalQuantile(1 - 1 / (4 * n)), file.chauvenet.k[i], 1e-7),
    ));

  // F. E. Grubbs, Technometrics 1969, 11, 1.
  test("Grubbs' limits, one-sided and two-sided", () =>
    file.grubbs.n.forEach((n: number, i: number) => {
      const limit = (p: number): number => {
        const t = studentQuantile(1 - p / n, n - 2);
        return ((n - 1) / Math.sqrt(n)) * Math.sqrt((t * t) / (n - 2 + t * t));
      };
      expectRelative(limit(0.025), file.grubbs.two_sided_95[i], TOLERANCE.ten);
      expectRelative(limit(0.05), file.grubbs.one_sided_95[i], TOLERANCE.ten);
    }));
});

// M. Abramowitz, I. A. Stegun, Handbook of Mathematical Functions, tables 26.8, 26.9, 26.10 (from memory, agree with any other table).
describe('printed tables', () => {
  test.each([
    [0.95, 1, 3.84146, 5],
    [0.95, 10, 18.307, 4],
    [0.99, 5, 15.0863, 4],
    [0.05, 10, 3.9403, 5],
    [0.995, 30, 53.672, 4],
    [0.001, 2, 0.002, 3],
  ])('chi-square: P = %s, ν = %s', (p, freedom, printed, decimals) =>
    expectPrinted(chiSquareQuantile(p, freedom), printed, decimals),
  );

  test.each([
    [0.975, 1, 12.706, 3],
    [0.975, 5, 2.571, 3],
    [0.995, 10, 3.169, 3],
    [0.95, 30, 1.697, 3],
    [0.975, 120, 1.98, 3],
    [0.975, Infinity, 1.96, 3],
  ])('Student: P = %s, ν = %s', (p, freedom, printed, decimals) =>
    expectPrinted(studentQuantile(p, freedom), printed, decimals),
  );

  test.each([
    [0.95, 3, 10, 3.71, 2],
    [0.95, 1, 1, 161.4, 1],
    [0.99, 5, 20, 4.1, 2],
    [0.975, 10, 10, 3.72, 2],
    [0.95, 10, Infinity, 1.83, 2],
  ])('F: P = %s, ν₁ = %s, ν₂ = %s', (p, numerator, denominator, printed, decimals) =>
    expectPrinted(fQuantile(p, numerator, denominator), printed, decimals),
  );
});
test('the normal quantile everybody knows', () => expect(normalQuantile(0.975)).toBeCloseTo(1.959963984540054, 14));
