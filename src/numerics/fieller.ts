// What        Interval of a ratio of two correlated normal quantities.
// Equation    all ρ with (N − ρD)² ≤ t² (V_N − 2ρC + ρ²V_D).
// Why so      Exact, and lopsided as it should be when D is poorly known, which value ± t·u cannot show.
// Valid for   |D| > t·√V_D; otherwise D may be zero, the set is unbounded and null is returned.
// Units       those of N over those of D.
// Source      E. C. Fieller, J. R. Stat. Soc. B 1954, 16, 175.

export interface Ratio {
  readonly numerator: number;
  readonly denominator: number;
  readonly numeratorVariance: number;
  readonly denominatorVariance: number;
  readonly covariance: number;
}

/** @param quantile Student's or the normal one, 1.96 for 95 % */
export function fiellerInterval(ratio: Ratio, quantile: number): [number, number] | null {
  const { numerator, denominator, denominatorVariance, covariance } = ratio;
  const q = quantile * quantile;
  const a = denominator * denominator - q * denominatorVariance;
  if (!(a > 0)) return null;
  const value = numerator / denominator;
  // (a)(ρ − value)² in powers of the departure from N/D: what is left under the root is a sum, not a difference of large squares.
  const slope = q * (covariance - value * denominatorVariance);
  const spread = q * varianceOfRatio(ratio) * denominator * denominator;
  const root = Math.sqrt(Math.max(0, slope * slope + a * spread));
  return [value - (slope + root) / a, value + (root - slope) / a];
}

/** First-order variance of N/D. */
export function varianceOfRatio(ratio: Ratio): number {
  const value = ratio.numerator / ratio.denominator;
  return Math.max(
    0,
    (ratio.numeratorVariance - 2 * value * ratio.covariance + value * value * ratio.denominatorVariance) /
      ratio.denominator ** 2,
  );
}
