import { expect, test } from 'vitest';
import { gaussLegendre } from '../../src/numerics/gaussLegendre.ts';
import { fitLinear } from '../../src/numerics/linearFit.ts';
import { solveSquare } from '../../src/numerics/matrix.ts';

// M. Abramowitz, I. A. Stegun, Handbook of Mathematical Functions, table 25.4, n = 3: 0.774596669241483, 5/9 and 8/9.
test('Gauss-Legendre nodes of order 3', () => {
  const { nodes, weights } = gaussLegendre(3, -1, 1);
  [-0.774596669241483, 0, 0.774596669241483].forEach((x, i) => expect(nodes[i]).toBeCloseTo(x, 14));
  [5 / 9, 8 / 9, 5 / 9].forEach((w, i) => expect(weights[i]).toBeCloseTo(w, 14));
});

test('order 80 integrates the normal density over nine standard deviations to 1 less its tails', () => {
  const { nodes, weights } = gaussLegendre(80, -9, 9);
  const area = nodes.reduce((sum, x, i) => sum + (weights[i]! * Math.exp(-0.5 * x * x)) / Math.sqrt(2 * Math.PI), 0);
  expect(area).toBeCloseTo(1, 13);
});

// JCGM 100:2008 (GUM), H.3: thermometer correction against temperature; y₁ = −0.1712 (0.0029), slope 0.00218 (0.00067),
// s = 0.0035, correlation −0.930.
test('a straight line: GUM H.3', () => {
  const t = [21.521, 22.012, 22.512, 23.003, 23.507, 23.999, 24.513, 25.002, 25.503, 26.01, 26.511];
  const b = [-0.171, -0.169, -0.166, -0.159, -0.164, -0.165, -0.156, -0.157, -0.159, -0.161, -0.16];
  const fit = fitLinear([new Float64Array(11).fill(1), Float64Array.from(t, (x) => x - 20)], Float64Array.from(b));
  expect(fit.coefficients[0]).toBeCloseTo(-0.17120379013, 9);
  expect(fit.standardErrors[0]).toBeCloseTo(0.00287759784, 9);
  expect(fit.coefficients[1]).toBeCloseTo(0.00218269774, 9);
  expect(fit.standardErrors[1]).toBeCloseTo(0.000667939, 8);
  expect(Math.sqrt(fit.residualSumOfSquares / fit.degreesOfFreedom)).toBeCloseTo(0.00349756396, 9);
  expect(fit.covariance[1]! / (fit.standardErrors[0]! * fit.standardErrors[1]!)).toBeCloseTo(-0.930429603, 7);
});

test.each([
  [
    'columns-dependent',
    () => fitLinear([Float64Array.of(1, 2, 3), Float64Array.of(2, 4, 6)], Float64Array.of(1, 2, 4)),
  ],
  ['points-missing', () => fitLinear([Float64Array.of(1)], Float64Array.of(1))],
  [
    'system-singular',
    () =>
      solveSquare(
        [
          [1, 1],
          [1, 1],
        ],
        [1, 2],
      ),
  ],
])('%s is refused', (code, act) => {
  expect(act).toThrow(expect.objectContaining({ code }));
});
