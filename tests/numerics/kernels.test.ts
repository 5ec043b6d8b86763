import { array, assert, integer, property } from 'fast-check';
import { describe, expect, test } from 'vitest';
import { dot, thinQrOfRows } from '../../src/numerics/gramSchmidt.ts';
import { choleskyLower, solveCholesky, symmetricEigen } from '../../src/numerics/matrix.ts';
import { factorPacked, solvePacked } from '../../src/numerics/packedCholesky.ts';
import { principalDirections } from '../../src/numerics/principalDirections.ts';
import { seededRandom } from '../../src/numerics/random.ts';
import { factorInPlace, inverseOf, solveInPlace } from '../../src/numerics/smallCholesky.ts';

const seed = integer({ min: 1, max: 1e9 });
const rowsOf = (from: number, count: number, length: number): Float64Array[] => {
  const random = seededRandom(from);
  return Array.from({ length: count }, () => Float64Array.from({ length }, () => random.normal()));
};
/** Symmetric and positive definite. */
const gramOf = (rows: readonly Float64Array[]): number[][] => rows.map((a) => rows.map((b) => dot(a, b)));

describe('kernels that allocate nothing agree with the decompositions of a library', () => {
  test('Cholesky of any size, its solution and its inverse', () => {
    assert(
      property(seed, integer({ min: 1, max: 6 }), (from, size) => {
        const gram = gramOf(rowsOf(from, size, 12));
        const right = Array.from({ length: size }, (_, i) => i - 1.5);
        const expected = solveCholesky(choleskyLower(gram), right);
        const factor = Float64Array.from(gram.flat());
        expect(factorInPlace(factor, size)).toBe(true);
        const solved = Float64Array.from(right);
        solveInPlace(factor, size, solved);
        const inverse = inverseOf(Float64Array.from(gram.flat()), size)!;
        expected.forEach((value, i) => {
          expect(solved[i]).toBeCloseTo(value, 9);
          expect(right.reduce((sum, r, j) => sum + r * inverse[i * size + j]!, 0)).toBeCloseTo(value, 9);
        });
      }),
    );
  });

  test('packed 4 × 4, from any offset, its diagonal stretched', () => {
    assert(
      property(seed, (from) => {
        const gram = gramOf(rowsOf(from, 4, 12));
        const packed = Float64Array.from([9, 9, 9, ...gram.flatMap((row, i) => row.slice(0, i + 1))]);
        const factor = new Float64Array(10);
        expect(factorPacked(packed, 3, 1.1, factor)).toBe(true);
        const solved = Float64Array.of(1, -2, 3, 0.5);
        solvePacked(factor, solved);
        const stretched = gram.map((row, i) => row.map((value, j) => (i === j ? 1.1 * value : value)));
        solveCholesky(choleskyLower(stretched), [1, -2, 3, 0.5]).forEach((value, i) =>
          expect(solved[i]).toBeCloseTo(value, 9),
        );
      }),
    );
  });

  test('what is not positive definite is said, not answered', () => {
    expect(factorInPlace(Float64Array.of(1, 2, 2, 1), 2)).toBe(false);
    expect(inverseOf(Float64Array.of(1, 1, 1, 1), 2)).toBeNull();
    expect(inverseOf(Float64Array.of(NaN), 1)).toBeNull();
    const factor = new Float64Array(10);
    expect(factorPacked(Float64Array.of(1, 2, 1, 0, 0, 1, 0, 0, 0, 1), 0, 1, factor)).toBe(false);
    expect(factorPacked(Float64Array.of(1, 0, 1, 0, 0, 1, 0, 0, 0, -1), 0, 1, factor)).toBe(false);
  });
});

describe('Gram-Schmidt, twice', () => {
  test('rows are orthonormal to rounding, however close the vectors were', () => {
    assert(
      property(seed, integer({ min: 0, max: 10 }), (from, digits) => {
        const [a, b, c] = rowsOf(from, 3, 40);
        const vectors = [a!, a!.map((x, i) => x + 10 ** -digits * b![i]!), c!];
        const { q, r, dependent } = thinQrOfRows(vectors);
        expect(dependent).toEqual([]);
        q.forEach((one, i) =>
          q.forEach((other, j) => expect(Math.abs(dot(one, other) - (i === j ? 1 : 0))).toBeLessThan(1e-14)),
        );
        vectors.forEach((vector, j) =>
          vector.forEach((value, l) =>
            expect(Math.abs(q.reduce((sum, row, i) => sum + r[i * 3 + j]! * row[l]!, 0) - value)).toBeLessThan(1e-13),
          ),
        );
      }),
    );
  });

  test('a dependent vector gets a zero row, its parts are still right', () => {
    const [a, b] = rowsOf(5, 2, 10);
    const sum = a!.map((x, i) => 2 * x - b![i]!);
    const { q, dependent } = thinQrOfRows([a!, b!, sum, new Float64Array(10)]);
    expect(dependent).toEqual([2, 3]);
    expect(q[2]!.every((value) => value === 0)).toBe(true);
  });
});

describe('principal directions', () => {
  test('all of them together give RᵀR over the degrees of freedom; the first are the largest', () => {
    assert(
      property(seed, (from) => {
        const rows = rowsOf(from, 4, 9);
        const directions = principalDirections(rows, 3, 4);
        for (let k = 0; k < 9; k++)
          for (let l = 0; l < 9; l++) {
            const expected = rows.reduce((sum, row) => sum + row[k]! * row[l]!, 0) / 3;
            expect(directions.reduce((sum, g) => sum + g[k]! * g[l]!, 0)).toBeCloseTo(expected, 10);
          }
        const lengths = directions.map((g) => dot(g, g));
        expect(lengths).toEqual([...lengths].sort((a, b) => b - a));
        symmetricEigen(gramOf(rows)).values.forEach((value, i) => expect(lengths[i]).toBeCloseTo(value / 3, 10));
      }),
      { numRuns: 30 },
    );
  });

  test('as many as asked for, none of nothing', () => {
    expect(principalDirections(rowsOf(1, 5, 8), 4, 2)).toHaveLength(2);
    expect(principalDirections([new Float64Array(3)], 1, 1)).toEqual([]);
    expect(principalDirections([], 1, 3)).toEqual([]);
    assert(
      property(array(integer({ min: 1, max: 5 }), { minLength: 3, maxLength: 3 }), (factors) => {
        // Rows along one direction have one.
        const rows = factors.map((factor) => Float64Array.of(factor, 2 * factor, -factor));
        expect(principalDirections(rows, 2, 3)).toHaveLength(1);
      }),
    );
  });
});
