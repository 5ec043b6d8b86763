import * as fc from 'fast-check';
import { expect, test } from 'vitest';
import { boundedLeastSquares } from '../../src/numerics/boundedLeastSquares.ts';

const columnsOf = (rows: readonly (readonly number[])[]): Float64Array[] =>
  rows[0]!.map((_, j) => Float64Array.from(rows, (row) => row[j]!));

test('without limits in the way it is ordinary least squares', () => {
  const { x } = boundedLeastSquares(
    columnsOf([
      [1, 1],
      [1, 2],
      [1, 3],
    ]),
    Float64Array.of(1, 2, 2),
    [-9, -9],
    [9, 9],
  );
  // y = 2/3 + x/2 by hand
  expect(x[0]).toBeCloseTo(2 / 3, 6);
  expect(x[1]).toBeCloseTo(1 / 2, 6);
});

test('an unknown that wants to be negative stays at zero and the other one takes over', () => {
  const { x } = boundedLeastSquares(
    columnsOf([
      [1, 0.9],
      [0, 1],
    ]),
    Float64Array.of(1, -1),
    [0, 0],
    [Infinity, Infinity],
  );
  expect(x[0]).toBeCloseTo(1, 6);
  expect(x[1]).toBe(0);
});

const entry = fc.integer({ min: -100, max: 100 }).map((hundredths) => hundredths / 100);
test('no step inside the limits improves the answer (Kuhn-Tucker), and it never leaves them', () => {
  fc.assert(
    fc.property(
      fc
        .integer({ min: 2, max: 5 })
        .chain((n) =>
          fc.tuple(
            fc.array(fc.array(entry, { minLength: n, maxLength: n }), { minLength: 3, maxLength: 6 }),
            fc.array(fc.double({ min: 0.1, max: 2, noNaN: true }), { minLength: n, maxLength: n }),
            fc.array(entry, { minLength: 6, maxLength: 6 }),
          ),
        ),
      ([rows, high, right]) => {
        const columns = columnsOf(rows);
        const low = high.map(() => 0);
        const { x, residual } = boundedLeastSquares(columns, Float64Array.from(right.slice(0, rows.length)), low, high);
        columns.forEach((column, j) => {
          const gradient = column.reduce((sum, value, i) => sum + value * residual[i]!, 0);
          expect(x[j]).toBeGreaterThanOrEqual(0);
          expect(x[j]).toBeLessThanOrEqual(high[j]!);
          if (x[j]! < high[j]!) expect(gradient).toBeLessThan(1e-5);
          if (x[j]! > 0) expect(gradient).toBeGreaterThan(-1e-5);
        });
      },
    ),
    { numRuns: 300 },
  );
});
