import { array, assert, double, property } from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  choleskyLower,
  singularValueDecomposition,
  singularValues,
  solveCholesky,
  solveSquare,
  symmetricEigen,
  thinQr,
  type Rows,
} from '../../src/numerics/matrix.ts';
import { expectRefusal } from '../support/refusal.ts';

// Measured numbers: steps of 1e-9. Entries near the smallest double overflow inside the library's own scaling.
const entry = double({ min: -5, max: 5, noNaN: true }).map((value) => Math.round(value * 1e9) / 1e9);
const tall = array(array(entry, { minLength: 3, maxLength: 3 }), { minLength: 5, maxLength: 5 });

const product = (a: Rows, b: Rows): number[][] =>
  a.map((row) => b[0]!.map((_, j) => row.reduce((sum, value, k) => sum + value * b[k]![j]!, 0)));
const transpose = (a: Rows): number[][] => a[0]!.map((_, j) => a.map((row) => row[j]!));
/** AᵀA + 1: symmetric and positive definite whatever A is. */
const definite = (a: Rows): number[][] =>
  product(transpose(a), a).map((row, i) => row.map((value, j) => value + (i === j ? 1 : 0)));

function expectSame(found: Rows, expected: Rows): void {
  const scale = Math.max(1, ...expected.flat().map(Math.abs));
  expected.forEach((row, i) =>
    row.forEach((value, j) => expect(Math.abs(found[i]![j]! - value)).toBeLessThan(1e-12 * scale)),
  );
}

describe('decompositions put together again', () => {
  test('Cholesky, lower triangle, and solving with it', () => {
    assert(
      property(tall, (a) => {
        const matrix = definite(a);
        const lower = choleskyLower(matrix);
        lower.forEach((row, i) => row.forEach((value, j) => j > i && expect(value).toBe(0)));
        expectSame(product(lower, transpose(lower)), matrix);
        const x = solveCholesky(lower, [1, -2, 3]);
        expectSame(product(matrix, transpose([x])), [[1], [-2], [3]]);
      }),
    );
  });

  test('eigenvalues fall, vectors have length 1', () => {
    assert(
      property(tall, (a) => {
        const matrix = definite(a);
        const { values, vectors } = symmetricEigen(matrix);
        expect(values).toEqual([...values].sort((x, y) => y - x));
        expectSame(product(vectors, transpose(vectors)), [
          [1, 0, 0],
          [0, 1, 0],
          [0, 0, 1],
        ]);
        expectSame(
          product(
            transpose(vectors),
            vectors.map((v, i) => v.map((x) => values[i]! * x)),
          ),
          matrix,
        );
      }),
    );
  });

  test('QR is thin', () => {
    assert(
      property(tall, (a) => {
        const { q, r } = thinQr(a);
        expect([q.length, q[0]!.length, r.length, r[0]!.length]).toEqual([5, 3, 3, 3]);
        expectSame(product(q, r), a);
        r.forEach((row, i) => row.forEach((value, j) => j < i && expect(value).toBe(0)));
      }),
    );
  });

  test('singular values fall and are never negative', () => {
    assert(
      property(tall, (a) => {
        const { values, left, right } = singularValueDecomposition(a);
        expect(values).toEqual([...values].sort((x, y) => y - x));
        expect(values[2]).toBeGreaterThanOrEqual(0);
        expectSame(
          product(
            transpose(left),
            right.map((v, i) => v.map((x) => values[i]! * x)),
          ),
          a,
        );
      }),
    );
  });
});

// Hilbert matrix of order 3; its eigenvalues as printed in many texts: 1.40831893, 0.12232707, 0.00268734. Singular values are the same.
test('Hilbert matrix of order 3', () => {
  const hilbert = [0, 1, 2].map((i) => [0, 1, 2].map((j) => 1 / (i + j + 1)));
  [1.40831893, 0.12232707, 0.00268734].forEach((value, i) => {
    expect(symmetricEigen(hilbert).values[i]).toBeCloseTo(value, 8);
    expect(singularValues(hilbert)[i]).toBeCloseTo(value, 8);
  });
  // Its inverse has whole numbers: first column 9, −36, 30.
  solveSquare(hilbert, [1, 0, 0]).forEach((value, i) => expect(value).toBeCloseTo([9, -36, 30][i]!, 10));
});

describe('what the library answers in silence is refused', () => {
  const square = [
    [1, 2],
    [2, 4],
  ];
  test.each<[string, string, () => unknown]>([
    [
      'not-positive-definite',
      'matrix',
      () =>
        choleskyLower([
          [1, 2],
          [2, 1],
        ]),
    ],
    [
      'not-positive-definite',
      'matrix',
      () =>
        choleskyLower([
          [0, 0],
          [0, 1],
        ]),
    ],
    [
      'not-symmetric',
      'matrix[1][0]',
      () =>
        choleskyLower([
          [1, 0.1],
          [0.2, 1],
        ]),
    ],
    [
      'not-symmetric',
      'matrix[1][0]',
      () =>
        symmetricEigen([
          [1, 0.1],
          [0.2, 1],
        ]),
    ],
    [
      'not-finite',
      'matrix[0][1]',
      () =>
        symmetricEigen([
          [1, NaN],
          [NaN, 1],
        ]),
    ],
    ['length-differs', 'matrix[1]', () => symmetricEigen([[1, 0], [0]])],
    [
      'points-missing',
      'matrix',
      () =>
        thinQr([
          [1, 2, 3],
          [4, 5, 6],
        ]),
    ],
    ['points-missing', 'matrix', () => singularValues([[1, 2]])],
    ['points-missing', 'matrix', () => singularValues([])],
    ['not-finite', 'matrix[1][0]', () => singularValues([[1], [Infinity]])],
    ['system-singular', 'system', () => solveSquare(square, [1, 2])],
    ['length-differs', 'system', () => solveSquare(square, [1, 2, 3])],
    ['length-differs', 'matrix[0]', () => solveSquare([[1], [2]], [1, 2])],
    ['not-finite', 'right[0]', () => solveSquare(square, [NaN, 2])],
    ['length-differs', 'right', () => solveCholesky([[1]], [1, 2])],
  ])('%s at %s', (code, where, act) => expectRefusal(act, code, where));

  test('rounding alone does not make a matrix unsymmetric', () => {
    expect(
      symmetricEigen([
        [2, 0.1],
        [0.1 + 1e-17, 1],
      ]).values,
    ).toHaveLength(2);
  });
});
