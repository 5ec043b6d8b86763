// What        Propagation of distributions by drawing: mean, standard deviation and 95 % intervals of a result.
// Equation    y_r = f(x_r), sorted; symmetric interval y_(r) … y_(r+q), r = (M − q)/2, q = ⌊0.95 M + ½⌋; shortest: the r with least width.
// Why so      Needs no derivatives and no symmetry, so it judges the linear rule: both must agree within δ = ½·10^l where u = c·10^l.
// Valid for   trials large enough for the tails: 10⁴/(1 − 0.95) = 2·10⁵ by 7.2.1, 10⁶ for two digits of u and its interval.
// Units       those of the result.
// Source      JCGM 101:2008, 7.2, 7.6, 7.7, 7.9.2 and 8.1.
import { TankhueError } from '../errors.ts';
import { expectFinite } from './expectations.ts';
import type { Random } from './random.ts';

export interface Drawn {
  readonly mean: number;
  readonly standardDeviation: number;
  /** 2.5 % of the draws lie below, 2.5 % above */
  readonly interval: [number, number];
  /** the narrowest interval that holds 95 % */
  readonly shortestInterval: [number, number];
  readonly trials: number;
}

const COVERAGE = 0.95;
const LEAST_TRIALS = 100;

/**
 * @param f result of one draw
 * @param draw one set of inputs from their joint distribution
 * @param trials 100 or more
 * @throws TankhueError `trials-few`, `not-finite` (a draw for which f has no value: the model does not hold over its inputs)
 */
export function monteCarlo<Inputs>(
  f: (inputs: Inputs) => number,
  draw: (random: Random) => Inputs,
  trials: number,
  random: Random,
): Drawn {
  if (!(Number.isInteger(trials) && trials >= LEAST_TRIALS))
    throw new TankhueError(
      'trials-few',
      `expected a whole number of trials, ${LEAST_TRIALS} or more; received ${trials}`,
      'trials',
      'write 200000 for a 95 % interval that can be reported',
    );
  const values = new Float64Array(trials);
  for (let r = 0; r < trials; r++) values[r] = f(draw(random));
  expectFinite(values, 'draws');
  return summaryOfDraws(values);
}

/** Mean, deviation and intervals of draws, which are sorted in place. */
export function summaryOfDraws(values: Float64Array): Drawn {
  values.sort();
  const trials = values.length;
  // Two passes, as the draws often share their leading digits.
  const middle = values[trials >> 1]!;
  let sum = 0;
  for (const value of values) sum += value - middle;
  const mean = middle + sum / trials;
  let squares = 0;
  for (const value of values) squares += (value - mean) ** 2;
  const width = Math.floor(COVERAGE * trials + 0.5);
  const first = Math.floor((trials - width + 1) / 2) - 1;
  let shortest = 0;
  for (let r = 1; r + width < trials; r++)
    if (values[r + width]! - values[r]! < values[shortest + width]! - values[shortest]!) shortest = r;
  return {
    mean,
    standardDeviation: Math.sqrt(squares / (trials - 1)),
    interval: [values[first]!, values[first + width]!],
    shortestInterval: [values[shortest]!, values[shortest + width]!],
    trials,
  };
}

/**
 * Half a unit of the last digit of a standard uncertainty written with `digits` significant digits (JCGM 101, 7.9.2): 0.05 for 1.0 and 2
 * digits.
 * @throws TankhueError `not-positive`, `digits-range`
 */
export function numericalTolerance(uncertainty: number, digits: number): number {
  if (!(uncertainty > 0 && uncertainty < Infinity))
    throw new TankhueError(
      'not-positive',
      `expected a finite standard uncertainty above 0; received ${uncertainty}`,
      'uncertainty',
      'a result without uncertainty needs no tolerance',
    );
  if (!(Number.isInteger(digits) && digits >= 1 && digits <= 15))
    throw new TankhueError(
      'digits-range',
      `expected 1 to 15 significant digits; received ${digits}`,
      'digits',
      'one or two are usual',
    );
  // Through the written form: 9.97 with two digits is 10, whose last digit is worth 1.
  const exponent = Number(uncertainty.toExponential(digits - 1).split('e')[1]);
  return 0.5 * 10 ** (exponent - digits + 1);
}

export interface Agreement {
  readonly agrees: boolean;
  /** |low − low| and |high − high| */
  readonly differences: [number, number];
  readonly tolerance: number;
}

/** Whether the linear rule may be used: both ends of its interval within δ of those drawn (JCGM 101, 8.1). */
export function compareIntervals(
  linear: readonly [number, number],
  drawn: readonly [number, number],
  tolerance: number,
): Agreement {
  const differences: [number, number] = [Math.abs(linear[0] - drawn[0]), Math.abs(linear[1] - drawn[1])];
  return { agrees: Math.max(...differences) <= tolerance, differences, tolerance };
}
