// What        Mean and standard deviation of a few numbers.
// Equation    x̄ = Σx/n + Σ(x − first mean)/n; s² = Σ(x − x̄)²/(n − 1).
// Why so      two passes: the second takes out what rounding left in the first, so that data which share many digits keep the rest.
// Valid for   n ≥ 1 (mean), n ≥ 2 (deviation).
// Units       those of the numbers.
// Source      any text on statistics; NIST StRD univariate sets check it.

export function mean(values: readonly number[]): number {
  const first = sum(values) / values.length;
  return first + sum(values.map((value) => value - first)) / values.length;
}

export const standardDeviation = (values: readonly number[]): number => {
  const centre = mean(values);
  return Math.sqrt(sumOfSquares(values.map((value) => value - centre)) / (values.length - 1));
};

export const sumOfSquares = (values: readonly number[]): number =>
  values.reduce((total, value) => total + value * value, 0);

const sum = (values: readonly number[]): number => values.reduce((total, value) => total + value, 0);

/**
 * Mean of values of different uncertainty, weighted by 1/u². Where they disagree by more than they should, the uncertainty is
 * widened by the Birge ratio (R. T. Birge, Phys. Rev. 1932, 40, 207).
 */
export function weightedMean(
  values: readonly number[],
  uncertainties: readonly number[],
): { value: number; uncertainty: number } {
  const weights = uncertainties.map((u) => 1 / u ** 2);
  const total = sum(weights);
  const value = sum(values.map((each, i) => weights[i]! * each)) / total;
  const chiSquare = sum(values.map((each, i) => weights[i]! * (each - value) ** 2));
  const birgeSquared = values.length > 1 ? chiSquare / (values.length - 1) : 1;
  return { value, uncertainty: Math.sqrt(Math.max(1, birgeSquared) / total) };
}
