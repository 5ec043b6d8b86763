// What        One-way analysis of variance, and how uncertain the variances of any nested analysis are.
// Equation    F = MS_between/MS_within; u²(Σ w MS) = Σ w² · 2 MS²/(ν + 2).
// Why so      A between-group variance from three groups is hardly known at all; without its uncertainty it looks like a number.
//             ν + 2 makes the estimate of 2σ⁴/ν unbiased. Mean squares are taken as independent: exact when groups are of one size.
// Valid for   normal effects; the uncertainty of a variance near 0 is not a basis for an interval by itself.
// Units       those of the data, squared.
// Source      S. R. Searle, G. Casella, C. E. McCulloch, Variance Components, 1992, 3.5 and 4.5; nestedAnova.ts for the analysis. NIST StRD
//             checks it.
import { fSurvival } from './distributions.ts';
import { expectFinite, expectPoints } from './expectations.ts';
import { nestedAnova, type NestedLevel } from './nestedAnova.ts';

export interface OneWayAnova {
  readonly between: NestedLevel;
  readonly within: NestedLevel;
  /** Infinity where groups differ and their members do not; NaN where nothing differs */
  readonly fStatistic: number;
  /** probability of a larger F if groups are alike */
  readonly probability: number;
  /** share of the total sum of squares between groups */
  readonly rSquared: number;
  /** standard uncertainties of the two variances */
  readonly betweenVarianceUncertainty: number;
  readonly withinVarianceUncertainty: number;
}

/** @throws TankhueError `points-missing` (two groups, and one with two members), `level-confounded`, `not-finite` */
export function oneWayAnova(groups: readonly (readonly number[])[]): OneWayAnova {
  expectPoints(groups.length, 2, 'groups');
  groups.forEach((members, g) => {
    expectPoints(members.length, 1, `groups[${g}]`);
    expectFinite(members, `groups[${g}]`);
  });
  const levels = nestedAnova(
    groups.flatMap((members, g) => members.map(() => ['all', String(g)])),
    groups.flat(),
  );
  const [between, within] = levels as [NestedLevel, NestedLevel];
  const fStatistic = between.meanSquare / within.meanSquare;
  const [betweenVarianceUncertainty, withinVarianceUncertainty] = varianceUncertainties(levels) as [number, number];
  return {
    between,
    within,
    fStatistic,
    probability: Number.isNaN(fStatistic)
      ? NaN
      : fSurvival(fStatistic, between.degreesOfFreedom, within.degreesOfFreedom),
    rSquared: between.sumOfSquares / (between.sumOfSquares + within.sumOfSquares),
    betweenVarianceUncertainty,
    withinVarianceUncertainty,
  };
}

/** Standard uncertainty of each level's variance, in the order of `nestedAnova`. */
export const varianceUncertainties = (levels: readonly NestedLevel[]): number[] =>
  levels.map(({ fromMeanSquares }) =>
    Math.sqrt(
      levels.reduce(
        (sum, { meanSquare, degreesOfFreedom }, m) =>
          sum + (2 * (fromMeanSquares[m]! * meanSquare) ** 2) / (degreesOfFreedom + 2),
        0,
      ),
    ),
  );
