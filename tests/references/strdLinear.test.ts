import { describe, expect, test } from 'vitest';
import { solveLeastSquares } from '../../src/numerics/leastSquares.ts';
import { digits, HAS_REFERENCES, published, WITHOUT_REFERENCES } from './published.ts';

/** Powers by multiplication, as the data were made. */
const power = (x: number, n: number): number => Array.from({ length: n }).reduce<number>((p) => p * x, 1);

function designOf(set: { data: Record<string, number[]>; parameters: string[] }): number[][] {
  const { y, ...predictors } = set.data;
  const columns = Object.values(predictors);
  if (columns.length > 1) return y!.map((_, i) => [1, ...columns.map((column) => column[i]!)]);
  // Parameters are called after their power: B0, B1, … (NoInt1 and NoInt2 begin at B1).
  return predictors.x!.map((x) => set.parameters.map((name) => power(x, Number(name.slice(1)))));
}

// NIST StRD, linear regression, certified to 15 digits. Digits asked for: what Householder QR in doubles can reach, as each file states; the
// normal equations would give none for Filip and at most one for Wampler5.
describe.skipIf(!HAS_REFERENCES)(`NIST StRD, linear ${WITHOUT_REFERENCES}`, () => {
  test.each([
    'Norris',
    'Pontius',
    'NoInt1',
    'NoInt2',
    'Filip',
    'Longley',
    'Wampler1',
    'Wampler2',
    'Wampler3',
    'Wampler4',
    'Wampler5',
  ])('%s', (name) => {
    const set = published(`strd/${name}`);
    const { certified, tolerance } = set;
    const fit = solveLeastSquares(designOf(set), set.data.y);
    expect(fit.degreesOfFreedom).toBe(certified.degrees_of_freedom);
    expect(digits(fit.coefficients, certified.value)).toBeGreaterThan(-Math.log10(tolerance.relative_value));
    // Wampler1 and 2 are exact: their standard deviations are certified 0, ours are rounding.
    const scale = Math.max(...set.data.y.map(Math.abs));
    if (certified.residual_sum_of_squares === 0) {
      expect(Math.sqrt(fit.residualVariance) / scale).toBeLessThan(1e-14);
      return;
    }
    expect(digits(fit.standardDeviations, certified.standard_deviation)).toBeGreaterThan(
      -Math.log10(tolerance.relative_standard_deviation),
    );
    // The standard deviations are this times numbers known better, so it has their digits (Filip: powers up to x¹⁰ are rounded in the data).
    expect(digits([Math.sqrt(fit.residualVariance)], [certified.residual_standard_deviation])).toBeGreaterThan(
      -Math.log10(tolerance.relative_standard_deviation),
    );
  });
});

// NIST StRD, Longley.dat (J. W. Longley, J. Am. Stat. Assoc. 1967, 62, 819), retyped: runs without the files.
test('Longley: six predictors that nearly make each other up', () => {
  const rows: readonly (readonly number[])[] = [
    [60323, 83.0, 234289, 2356, 1590, 107608, 1947],
    [61122, 88.5, 259426, 2325, 1456, 108632, 1948],
    [60171, 88.2, 258054, 3682, 1616, 109773, 1949],
    [61187, 89.5, 284599, 3351, 1650, 110929, 1950],
    [63221, 96.2, 328975, 2099, 3099, 112075, 1951],
    [63639, 98.1, 346999, 1932, 3594, 113270, 1952],
    [64989, 99.0, 365385, 1870, 3547, 115094, 1953],
    [63761, 100.0, 363112, 3578, 3350, 116219, 1954],
    [66019, 101.2, 397469, 2904, 3048, 117388, 1955],
    [67857, 104.6, 419180, 2822, 2857, 118734, 1956],
    [68169, 108.4, 442769, 2936, 2798, 120445, 1957],
    [66513, 110.8, 444546, 4681, 2637, 121950, 1958],
    [68655, 112.6, 482704, 3813, 2552, 123366, 1959],
    [69564, 114.2, 502601, 3931, 2514, 125368, 1960],
    [69331, 115.7, 518173, 4806, 2572, 127852, 1961],
    [70551, 116.9, 554894, 4007, 2827, 130081, 1962],
  ];
  const fit = solveLeastSquares(
    rows.map(([, ...predictors]) => [1, ...predictors]),
    rows.map((row) => row[0]!),
  );
  const certified = [
    -3482258.63459582, 15.0618722713733, -0.035819179292591, -2.02022980381683, -1.03322686717359, -0.0511041056535807,
    1829.15146461355,
  ];
  const deviations = [
    890420.383607373, 84.9149257747669, 0.0334910077722432, 0.488399681651699, 0.214274163161675, 0.22607320006937,
    455.478499142212,
  ];
  expect(digits(fit.coefficients, certified)).toBeGreaterThan(10);
  expect(digits(fit.standardDeviations, deviations)).toBeGreaterThan(10);
  expect(digits([Math.sqrt(fit.residualVariance)], [304.854073561965])).toBeGreaterThan(10);
  // The intercept against the year is what the years cannot tell.
  expect(fit.condition).toBeGreaterThan(1e4);
  expect(Math.abs(fit.weakDirection![0]!)).toBeGreaterThan(0.5);
  expect(Math.abs(fit.weakDirection![6]!)).toBeGreaterThan(0.5);
});
