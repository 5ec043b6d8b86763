// What        Propagation of uncertainty through any functions of correlated quantities, by first derivatives.
// Equation    U_y = J U_x Jᵀ, J by central differences; ν_eff = u⁴/Σ(u_i⁴/ν_i).
// Why so      Differences need no algebra by hand, and several results at once keep the covariance between them. The step is the
//             larger of ε^⅓ of the value, where cutting and rounding errors are about equal, and a thousandth of the uncertainty, over
//             which the function must be straight anyway.
// Valid for   functions that are nearly straight over ± u; monteCarlo.ts tells whether they are.
// Units       covariance: product of the units of its two quantities.
// Source      JCGM 100:2008 (GUM), 5.2.2 and G.4.1.
import { TankhueError } from '../errors.ts';
import { expectFinite, expectLength, expectPositive } from './expectations.ts';
import type { Rows } from './matrix.ts';

export interface Propagated {
  readonly value: number;
  /** standard uncertainty, k = 1 */
  readonly uncertainty: number;
  /** ∂f/∂x_i */
  readonly sensitivities: number[];
}

export interface PropagatedTogether {
  readonly values: number[];
  readonly uncertainties: number[];
  readonly covariance: number[][];
  /** NaN beside a result without uncertainty */
  readonly correlation: number[][];
  /** one row a result */
  readonly sensitivities: number[][];
}

const STEP = { ofValue: Math.cbrt(Number.EPSILON), ofUncertainty: 1e-3 };

/** @throws TankhueError `length-differs`, `not-finite`, `variance-negative` */
export function propagate(f: (x: readonly number[]) => number, means: readonly number[], covariance: Rows): Propagated {
  const { values, uncertainties, sensitivities } = propagateTogether((x) => [f(x)], means, covariance);
  return { value: values[0]!, uncertainty: uncertainties[0]!, sensitivities: sensitivities[0]! };
}

/** Several results of the same quantities, with the covariance between them. @throws as `propagate` */
export function propagateTogether(
  f: (x: readonly number[]) => readonly number[],
  means: readonly number[],
  covariance: Rows,
): PropagatedTogether {
  expectFinite(means, 'means');
  expectLength(covariance, means.length, 'covariance');
  covariance.forEach((row, i) => {
    expectLength(row, means.length, `covariance[${i}]`);
    expectFinite(row, `covariance[${i}]`);
    if (row[i]! < 0)
      throw new TankhueError(
        'variance-negative',
        `expected a variance of 0 or more; received ${row[i]}`,
        `covariance[${i}][${i}]`,
        'give the square of the standard uncertainty',
      );
  });
  const values = [...f(means)];
  expectFinite(values, 'result');
  // One column an input; an input known exactly is not moved.
  const columns = means.map((mean, i) => {
    const u = Math.sqrt(covariance[i]![i]!);
    if (u === 0) return values.map(() => 0);
    const h = Math.max(STEP.ofValue * Math.abs(mean), STEP.ofUncertainty * u);
    const moved = (by: number): readonly number[] => f(means.map((x, k) => (k === i ? x + by : x)));
    const [up, down] = [moved(h), moved(-h)];
    const width = mean + h - (mean - h);
    return values.map((_, k) => (up[k]! - down[k]!) / width);
  });
  const sensitivities = values.map((_, k) => columns.map((column) => column[k]!));
  sensitivities.forEach((row, k) => expectFinite(row, `sensitivities[${k}]`));
  const between = (a: readonly number[], b: readonly number[]): number =>
    a.reduce((sum, x, i) => sum + x * b.reduce((inner, y, j) => inner + y * covariance[i]![j]!, 0), 0);
  const result = sensitivities.map((a) => sensitivities.map((b) => between(a, b)));
  const uncertainties = result.map((row, k) => Math.sqrt(Math.max(0, row[k]!)));
  return {
    values,
    uncertainties,
    covariance: result,
    correlation: result.map((row, i) => row.map((value, j) => value / (uncertainties[i]! * uncertainties[j]!))),
    sensitivities,
  };
}

/**
 * Effective degrees of freedom of a sum of independent contributions.
 * @param contributions standard uncertainty of each, in the unit of the result
 * @param degreesOfFreedom of each; Infinity where the uncertainty itself is known
 * @returns Infinity where every contribution with finite degrees is 0
 * @throws TankhueError `length-differs`, `not-finite`, `degrees-of-freedom`
 */
export function welchSatterthwaite(contributions: readonly number[], degreesOfFreedom: readonly number[]): number {
  expectLength(degreesOfFreedom, contributions.length, 'degreesOfFreedom');
  expectFinite(contributions, 'contributions');
  degreesOfFreedom.forEach((freedom, i) => {
    if (!(freedom > 0))
      throw new TankhueError(
        'degrees-of-freedom',
        `expected degrees of freedom above 0; received ${freedom}`,
        `degreesOfFreedom[${i}]`,
        'measure more points: a scatter needs at least one repeat',
      );
  });
  const u = Math.hypot(...contributions);
  if (u === 0) return Infinity;
  return 1 / contributions.reduce((sum, part, i) => sum + (part / u) ** 4 / degreesOfFreedom[i]!, 0);
}

/** Covariance of independent quantities. @throws TankhueError `not-finite`, `not-positive` */
export function independent(uncertainties: readonly number[]): number[][] {
  expectPositive(
    uncertainties.filter((u) => u !== 0),
    'uncertainties',
  );
  return uncertainties.map((u, i) => uncertainties.map((_, j) => (i === j ? u * u : 0)));
}
