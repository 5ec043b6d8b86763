// What        Normal, Student, chi-square and F distribution: probabilities and quantiles.
// Equation    all by the incomplete gamma and beta functions; a quantile is the root of its tail probability on a logarithmic scale.
// Why so      Written out because the packages that offer the same load 236 files in 90 ms, a quarter of what a whole assay may take, and give the
//             upper tail as 1 − cdf, which is 0 from chi-square 80 on. Here both tails keep their digits.
// Valid for   any degrees of freedom above 0, whole or not; Infinity is the limit (normal, or a known variance).
//             What lies outside is refused; NaN gives NaN, because a number that is not known is no mistake in itself.
// Units       none.
// Source      M. Abramowitz, I. A. Stegun, Handbook of Mathematical Functions, chapter 26; its tables check it.
import { TankhueError } from '../errors.ts';
import { expectProbability } from './expectations.ts';
import { incompleteBeta, incompleteGamma, type Tails } from './incompleteGammaBeta.ts';
import { findRoot } from './root.ts';

/** Beyond this a Student or F distribution equals its limit in all digits a double has. */
const PRACTICALLY_INFINITE = 1e16;

const UNKNOWN: Tails = { below: NaN, above: NaN };

export function normalCdf(x: number): number {
  if (Number.isNaN(x)) return NaN;
  const { below, above } = incompleteGamma(0.5, (x * x) / 2);
  return x < 0 ? above / 2 : 0.5 + below / 2;
}

/** @throws TankhueError `probability-range` */
export function normalQuantile(p: number): number {
  if (Number.isNaN(p)) return NaN;
  expectProbability(p, 'p');
  if (p === 0.5) return 0;
  if (p > 0.5) return -normalQuantile(1 - p);
  return -positiveRoot((x) => incompleteGamma(0.5, (x * x) / 2).above / 2, p, 'falling', 1);
}

/** @throws TankhueError `degrees-of-freedom` */
export function studentCdf(x: number, degreesOfFreedom: number): number {
  expectFreedom(degreesOfFreedom, 'degreesOfFreedom');
  if (Number.isNaN(x) || Number.isNaN(degreesOfFreedom)) return NaN;
  const above = studentTail(Math.abs(x), degreesOfFreedom);
  return x < 0 ? above : 1 - above;
}

/** @throws TankhueError `probability-range`, `degrees-of-freedom` */
export function studentQuantile(p: number, degreesOfFreedom: number): number {
  if (Number.isNaN(p + degreesOfFreedom)) return NaN;
  expectFreedom(degreesOfFreedom, 'degreesOfFreedom');
  expectProbability(p, 'p');
  if (degreesOfFreedom > PRACTICALLY_INFINITE) return normalQuantile(p);
  if (p === 0.5) return 0;
  if (p < 0.5) return -positiveRoot((t) => studentTail(t, degreesOfFreedom), p, 'falling', 1);
  return positiveRoot((t) => studentTail(t, degreesOfFreedom), 1 - p, 'falling', 1);
}

/** Probability of a smaller chi-square. @throws TankhueError `degrees-of-freedom` */
export const chiSquareCdf = (x: number, degreesOfFreedom: number): number => chiSquareTails(x, degreesOfFreedom).below;

/** Probability of a larger chi-square. @throws TankhueError `degrees-of-freedom` */
export const chiSquareSurvival = (x: number, degreesOfFreedom: number): number =>
  chiSquareTails(x, degreesOfFreedom).above;

/** @throws TankhueError `probability-range`, `degrees-of-freedom` */
export const chiSquareQuantile = (p: number, degreesOfFreedom: number): number =>
  quantileOf((x) => chiSquareTails(x, degreesOfFreedom), p, degreesOfFreedom);

/** Probability of a smaller variance ratio. @throws TankhueError `degrees-of-freedom` */
export const fCdf = (x: number, numerator: number, denominator: number): number =>
  fTails(x, numerator, denominator).below;

/** Probability of a larger variance ratio. @throws TankhueError `degrees-of-freedom` */
export const fSurvival = (x: number, numerator: number, denominator: number): number =>
  fTails(x, numerator, denominator).above;

/** @throws TankhueError `probability-range`, `degrees-of-freedom` */
export const fQuantile = (p: number, numerator: number, denominator: number): number =>
  quantileOf((x) => fTails(x, numerator, denominator), p, 1);

/** Probability of a value above t ≥ 0. */
function studentTail(t: number, degreesOfFreedom: number): number {
  if (degreesOfFreedom > PRACTICALLY_INFINITE) return normalCdf(-t);
  const square = t * t;
  const total = degreesOfFreedom + square;
  if (total === Infinity) return 0;
  return incompleteBeta(degreesOfFreedom / 2, 0.5, degreesOfFreedom / total, square / total).below / 2;
}

function chiSquareTails(x: number, degreesOfFreedom: number): Tails {
  expectFreedom(degreesOfFreedom, 'degreesOfFreedom', PRACTICALLY_INFINITE);
  if (Number.isNaN(x) || Number.isNaN(degreesOfFreedom)) return UNKNOWN;
  return incompleteGamma(degreesOfFreedom / 2, x / 2);
}

function fTails(x: number, numerator: number, denominator: number): Tails {
  expectFreedom(numerator, 'numerator', PRACTICALLY_INFINITE);
  expectFreedom(denominator, 'denominator');
  if ([x, numerator, denominator].some(Number.isNaN)) return UNKNOWN;
  if (x <= 0) return { below: 0, above: 1 };
  // The limit of a known variance in the denominator.
  if (denominator > PRACTICALLY_INFINITE) return chiSquareTails(x * numerator, numerator);
  const total = numerator * x + denominator;
  if (total === Infinity) return { below: 1, above: 0 };
  return incompleteBeta(numerator / 2, denominator / 2, (numerator * x) / total, denominator / total);
}

/** The value with probability `p` below it; asked of the smaller tail, whose digits are its own. */
function quantileOf(tails: (x: number) => Tails, p: number, start: number): number {
  if (Number.isNaN(p + tails(start).below)) return NaN;
  expectProbability(p, 'p');
  return p <= 0.5
    ? positiveRoot((x) => tails(x).below, p, 'rising', start)
    : positiveRoot((x) => tails(x).above, 1 - p, 'falling', start);
}

/** x > 0 with tail(x) = p, both on logarithmic scales, where every distribution here is nearly straight. */
function positiveRoot(tail: (x: number) => number, p: number, course: 'rising' | 'falling', start: number): number {
  const sign = course === 'rising' ? 1 : -1;
  const miss = (logarithm: number): number => {
    const probability = tail(Math.exp(logarithm));
    return sign * Math.log((probability > 0 ? probability : Number.MIN_VALUE) / p);
  };
  let low = Math.log(start);
  let high = low;
  let reach = 0.5;
  while (miss(low) > 0 && low > -700) low -= reach *= 1.6;
  reach = 0.5;
  while (miss(high) < 0 && high < 700) high += reach *= 1.6;
  return Math.exp(findRoot(miss, low, high));
}

function expectFreedom(degreesOfFreedom: number, where: string, most = Infinity): void {
  if (degreesOfFreedom <= 0 || degreesOfFreedom > most)
    throw new TankhueError(
      'degrees-of-freedom',
      `expected degrees of freedom above 0; received ${degreesOfFreedom}`,
      where,
      'measure more points: a scatter needs at least one repeat',
    );
}
