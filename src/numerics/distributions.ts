/** Distribution functions, one adapter on the @stdlib packages (CommonJS: the default export is the function itself). */
import chiSquareCdf from '@stdlib/stats-base-dists-chisquare-cdf';
import chiSquareInverse from '@stdlib/stats-base-dists-chisquare-quantile';
import fisherCdf from '@stdlib/stats-base-dists-f-cdf';
import fisherInverse from '@stdlib/stats-base-dists-f-quantile';
import gaussCdf from '@stdlib/stats-base-dists-normal-cdf';
import gaussInverse from '@stdlib/stats-base-dists-normal-quantile';
import studentCumulative from '@stdlib/stats-base-dists-t-cdf';
import studentInverse from '@stdlib/stats-base-dists-t-quantile';

export const normalCdf = (x: number): number => gaussCdf(x, 0, 1);
export const normalQuantile = (p: number): number => gaussInverse(p, 0, 1);
export const studentCdf = (x: number, degreesOfFreedom: number): number => studentCumulative(x, degreesOfFreedom);
export const studentQuantile = (p: number, degreesOfFreedom: number): number => studentInverse(p, degreesOfFreedom);
/** Probability of a larger chi-square. */
export const chiSquareSurvival = (x: number, degreesOfFreedom: number): number => 1 - chiSquareCdf(x, degreesOfFreedom);
export const chiSquareQuantile = (p: number, degreesOfFreedom: number): number => chiSquareInverse(p, degreesOfFreedom);
/** Probability of a larger variance ratio. */
export const fSurvival = (x: number, numerator: number, denominator: number): number =>
  1 - fisherCdf(x, numerator, denominator);
export const fQuantile = (p: number, numerator: number, denominator: number): number =>
  fisherInverse(p, numerator, denominator);
