// What        Variance between groups whose own uncertainties differ, and the consensus mean.
// Equation    τ² such that Σ w (x − x̄)² = n − 1 with w = 1/(u² + τ²); x̄ = Σwx/Σw, u(x̄) = 1/√Σw.
//             Start: τ² = (Q − (n−1))/(Σw − Σw²/Σw) with w = 1/u².
// Why so      Chooses the smallest extra variance that makes the groups agree with their stated uncertainties; Q falls steadily with τ²,
//             so the root is the only one.
// Valid for   two groups or more with uncertainties above 0. τ² = 0 where the groups agree as they are.
// Units       τ²: those of the means, squared.
// Source      J. Mandel, R. C. Paule, Anal. Chem. 1970, 42, 1194; R. C. Paule, J. Mandel, J. Res. NBS 1982, 87, 377; start:
//             R. DerSimonian, N. Laird, Control. Clin. Trials 1986, 7, 177.
import { expectFinite, expectLength, expectPoints, expectPositive } from './expectations.ts';
import { findRoot } from './root.ts';

export interface BetweenGroup {
  /** τ², never negative */
  readonly betweenVariance: number;
  readonly mean: number;
  /** standard uncertainty of the mean, τ² included */
  readonly uncertainty: number;
}

/** @throws TankhueError `points-missing`, `length-differs`, `not-finite`, `not-positive` */
export function mandelPaule(means: readonly number[], uncertainties: readonly number[]): BetweenGroup {
  const start = derSimonianLaird(means, uncertainties);
  const excess = (variance: number): number => heterogeneity(means, uncertainties, variance).sum - (means.length - 1);
  if (!(excess(0) > 0)) return consensus(means, uncertainties, 0);
  let high = Math.max(start.betweenVariance, Number.MIN_VALUE);
  while (excess(high) > 0) high *= 4;
  return consensus(means, uncertainties, findRoot(excess, 0, high));
}

/** The moment estimate in closed form, clipped at 0 as published. @throws as `mandelPaule` */
export function derSimonianLaird(means: readonly number[], uncertainties: readonly number[]): BetweenGroup {
  expectPoints(means.length, 2, 'means');
  expectLength(uncertainties, means.length, 'uncertainties');
  expectFinite(means, 'means');
  expectPositive(uncertainties, 'uncertainties');
  const { sum, weights, total } = heterogeneity(means, uncertainties, 0);
  const squares = weights.reduce((all, w) => all + w * w, 0);
  return consensus(means, uncertainties, Math.max(0, (sum - (means.length - 1)) / (total - squares / total)));
}

function heterogeneity(
  means: readonly number[],
  uncertainties: readonly number[],
  variance: number,
): { sum: number; weights: number[]; total: number; mean: number } {
  const weights = uncertainties.map((u) => 1 / (u * u + variance));
  const total = weights.reduce((all, w) => all + w, 0);
  const mean = means.reduce((all, x, i) => all + (weights[i]! / total) * x, 0);
  return { sum: means.reduce((all, x, i) => all + weights[i]! * (x - mean) ** 2, 0), weights, total, mean };
}

function consensus(means: readonly number[], uncertainties: readonly number[], betweenVariance: number): BetweenGroup {
  const { mean, total } = heterogeneity(means, uncertainties, betweenVariance);
  return { betweenVariance, mean, uncertainty: 1 / Math.sqrt(total) };
}
