// What        Nonlinear least squares: estimates, covariance, and whether they can be believed.
// Equation    δ = −(JᵀJ + λD²)⁻¹Jᵀr, by QR of J stacked on √λ·D; λ so that |Dδ| is the radius within which the last step kept its promise.
// Why so      ml-levenberg-marquardt 5.0.1 gives neither covariance nor a sign of convergence, stops on an absolute sum of squares (1e-7: small
//             data "converge" at once), differentiates with a step of 0.1 whatever the parameter's size, and solves normal equations;
//             5.1.0 moreover weighs wrongly. Measured on NIST StRD from the near and the far start: with its defaults 1 and 0 of 27 right,
//             with steps fitted to each parameter 24 and 18, and nothing in the answer tells which. This one: 27 and 24, and the 3 say so.
//             Converged here means: full rank, and the step to the minimum of the tangent plane is below 1e-8 of a standard deviation
//             (the relative offset of Bates and Watts) or at rounding; and no direction nearby goes down.
//             Anything else says `converged: false` and why.
// Valid for   smooth models, more points than parameters. The minimum found is the one of the start's valley: other starts tell of others.
// Units       those of the parameters. Weights: 1/variance, or relative.
// Source      J. J. Moré, in Numerical Analysis, Lecture Notes in Mathematics 630, 1978, 105; D. M. Bates, D. G. Watts,
//             Technometrics 1981, 23, 179. NIST StRD checks it.
import { conditionOfColumns } from './condition.ts';
import { expectFinite, expectLength, expectPoints, expectPositive } from './expectations.ts';
import { dot, thinQrOfRows, type ThinQr } from './gramSchmidt.ts';
import { fitByQr } from './linearFit.ts';
import { backSubstituted, forwardSubstituted } from './triangle.ts';

/** y = model(x, parameters), with the points and, if wished, ∂model/∂parameters at one x. */
export interface CurveProblem<X> {
  readonly model: (x: X, parameters: readonly number[]) => number;
  readonly jacobian?: (x: X, parameters: readonly number[]) => readonly number[];
  readonly data: { readonly x: readonly X[]; readonly y: readonly number[] };
  readonly weights?: readonly number[];
  readonly start: readonly number[];
}

/** Residuals of any kind, already divided by their deviations if these differ, and, if wished, one row of derivatives for each. */
export interface ResidualProblem {
  readonly residuals: (parameters: readonly number[]) => ArrayLike<number>;
  readonly jacobian?: (parameters: readonly number[]) => readonly (readonly number[])[];
  readonly start: readonly number[];
}

/**
 * `settled`: at a minimum to 1e-8 of a standard deviation. `at-rounding`: no step helps any more and the next would move every parameter by
 * less than 1e-9 of itself, or 1e-4 of a standard deviation. Not converged: `direction-undetermined` (the points say nothing about some
 * combination of parameters), `not-at-minimum` (no step helps, yet the slope is not zero), `saddle` (a direction nearby goes down),
 * `rounds-used-up`.
 */
export type FitReason =
  'settled' | 'at-rounding' | 'direction-undetermined' | 'not-at-minimum' | 'saddle' | 'rounds-used-up';

export interface NonlinearFit {
  readonly estimates: number[];
  /** scaled by the residual variance; NaN without degrees of freedom or where a direction is undetermined */
  readonly covariance: number[][];
  /** (JᵀWJ)⁻¹: the covariance where weights are 1/variance */
  readonly unscaledCovariance: number[][];
  readonly standardDeviations: number[];
  /** Σ w r² */
  readonly residualSumOfSquares: number;
  readonly residualVariance: number;
  readonly degreesOfFreedom: number;
  readonly converged: boolean;
  readonly reason: FitReason;
  readonly iterations: number;
  /** s_max/s_min of the columns of J, each scaled to length 1 */
  readonly condition: number;
}

export interface NonlinearOptions {
  /** evaluations of J at most */
  readonly rounds: number;
}

const DEFAULT_ROUNDS = 500;
/** Bates and Watts stop at 1e-3; here the digits of the estimate are wanted, not only of its uncertainty. */
const OFFSET = 1e-8;
/** Where rounding ends the descent before that, this much is still a minimum. */
const AT_ROUNDING = { offset: 1e-4, step: 1e-9 };
/** Standard deviations to either side at which a minimum must have risen. */
const PROBE = 0.3;
const STEP = Math.cbrt(Number.EPSILON);
/** Condition beyond which a direction counts as undetermined: differences know a derivative to some ten digits only. */
const RANK_LIMIT = { stated: 1e12, differences: 1e8 };
const SMALLEST_STEP = 1e-13;

type Point = {
  readonly parameters: number[];
  readonly residuals: Float64Array;
  readonly sum: number;
};

/** @throws TankhueError `points-missing`, `length-differs`, `not-finite`, `not-positive` */
export function fitNonlinear<X>(
  problem: CurveProblem<X> | ResidualProblem,
  { rounds = DEFAULT_ROUNDS }: Partial<NonlinearOptions> = {},
): NonlinearFit {
  const { residuals, jacobian, start } = 'model' in problem ? asResiduals(problem) : problem;
  expectPoints(start.length, 1, 'start');
  expectFinite(start, 'start');
  const evaluate = (parameters: number[]): Point => {
    const r = Float64Array.from(residuals(parameters));
    const sum = dot(r, r);
    return { parameters, residuals: r, sum: Number.isFinite(sum) ? sum : Infinity };
  };
  const columnsAt = (point: Point): Float64Array[] =>
    jacobian ? transposed(jacobian(point.parameters), point) : centralDifferences(residuals, point);
  let here = evaluate([...start]);
  expectFinite(here.residuals, 'residuals at the start');
  expectPoints(here.residuals.length, start.length, 'residuals');
  let columns = columnsAt(here);
  const scale = columns.map(lengthOr1);
  let radius = 100 * weightedLength(here.parameters, scale) || 100;
  let iterations = 1;
  for (; ; iterations++) {
    const qr = thinQrOfRows(columns);
    const tangent = qr.q.map((row) => dot(row, here.residuals));
    if (isAtMinimum(qr, tangent, here, OFFSET) || iterations >= rounds) break;
    columns.forEach((column, j) => (scale[j] = Math.max(scale[j]!, Math.sqrt(dot(column, column)))));
    const next = descend(qr, tangent);
    if (!next) break;
    here = next;
    columns = columnsAt(here);
  }
  return judged(here, columns, evaluate, iterations, rounds, jacobian ? RANK_LIMIT.stated : RANK_LIMIT.differences);

  /** The next point with a smaller sum, or null where rounding leaves none. */
  function descend(qr: ThinQr, tangent: readonly number[]): Point | null {
    for (;;) {
      const { step, damping } = stepWithin(qr, tangent, scale, radius);
      const length = weightedLength(step, scale);
      const next = evaluate(here.parameters.map((b, j) => b + step[j]!));
      const linear = squareOfProduct(qr, step);
      const promised = linear + 2 * damping * length * length;
      const gain = here.sum - next.sum;
      const ratio = promised > 0 ? gain / promised : 0;
      if (!(ratio > 0.25))
        radius = Math.min(radius, 10 * length) * shrinkage(gain, linear, damping * length * length, here.sum);
      else if (damping === 0 || ratio > 0.75) radius = 2 * length;
      if (ratio > 1e-4 && gain > 0) return next;
      if (step.every((change, j) => Math.abs(change) <= SMALLEST_STEP * Math.abs(here.parameters[j]!)) || !(radius > 0))
        return null;
    }
  }
}

/** Between 0.1 and 0.5: where the parabola through the sum of squares along the step has its minimum. */
function shrinkage(gain: number, linear: number, damped: number, sum: number): number {
  if (gain >= 0) return 0.5;
  if (!(gain > -99 * sum)) return 0.1;
  const slope = -(linear + damped);
  return Math.min(0.5, Math.max(0.1, (0.5 * slope) / (slope + 0.5 * gain)));
}

/** δ that minimises |J δ + r|² within |Dδ| ≤ radius (to a tenth), and its λ. */
function stepWithin(
  { q, r }: ThinQr,
  tangent: readonly number[],
  scale: readonly number[],
  radius: number,
): { step: number[]; damping: number } {
  const count = q.length;
  // Columns of R and Qᵀr on top, √λ·D and 0 below.
  const solve = (damping: number): { step: number[]; stacked: ThinQr } => {
    const stacked = thinQrOfRows(
      scale.map((d, j) =>
        Float64Array.from({ length: 2 * count }, (_, i) =>
          i < count ? r[i * count + j]! : i - count === j ? Math.sqrt(damping) * d : 0,
        ),
      ),
    );
    const right = stacked.q.map((row) => -tangent.reduce((sum, t, i) => sum + t * row[i]!, 0));
    return { step: backSubstituted(stacked.r, right), stacked };
  };
  const full = solve(0);
  if (full.stacked.dependent.length === 0 && weightedLength(full.step, scale) <= 1.1 * radius)
    return { step: full.step, damping: 0 };
  // |Dδ| falls with λ, between 0 and |D⁻¹Jᵀr|/radius.
  const gradient = scale.map((d, j) => tangent.reduce((sum, t, i) => sum + t * r[i * count + j]!, 0) / d);
  let low = 0;
  let high = Math.hypot(...gradient) / radius;
  let damping = high > 0 ? high * 1e-3 : 1;
  let step = full.step;
  for (let round = 0; round < 60; round++) {
    const solved = solve(damping);
    step = solved.step;
    const length = weightedLength(step, scale);
    const excess = length - radius;
    if (Math.abs(excess) <= 0.1 * radius) break;
    if (excess > 0) low = damping;
    else high = damping;
    // Newton on 1/|Dδ|, which is nearly straight in λ.
    const w = forwardSubstituted(
      solved.stacked.r,
      step.map((value, j) => (scale[j]! ** 2 * value) / length),
    );
    const newton = damping + excess / radius / w.reduce((sum, value) => sum + value * value, 0);
    damping = newton > low && newton < high ? newton : Math.max(Math.sqrt(low * high), 1e-3 * high);
  }
  return { step, damping };
}

function isAtMinimum(qr: ThinQr, tangent: readonly number[], here: Point, limit: number): boolean {
  if (qr.dependent.length > 0) return false;
  return relativeOffset(tangent, here) <= limit || isStepBelow(SMALLEST_STEP, qr, tangent, here);
}

/** Length of the residuals' part in the tangent plane over that outside it, each per degree of freedom. */
function relativeOffset(tangent: readonly number[], { sum, residuals }: Point): number {
  const inside = tangent.reduce((total, t) => total + t * t, 0);
  const freedom = residuals.length - tangent.length;
  return freedom > 0 ? Math.sqrt(inside / tangent.length / (Math.max(0, sum - inside) / freedom)) : Infinity;
}

/** Whether the full step would move every parameter by less than `share` of itself. */
function isStepBelow(share: number, { r }: ThinQr, tangent: readonly number[], { parameters }: Point): boolean {
  const step = backSubstituted(
    r,
    tangent.map((t) => -t),
  );
  return step.every((change, j) => Math.abs(change) <= share * Math.abs(parameters[j]!));
}

function judged(
  here: Point,
  columns: readonly Float64Array[],
  evaluate: (parameters: number[]) => Point,
  iterations: number,
  rounds: number,
  rankLimit: number,
): NonlinearFit {
  const count = columns.length;
  const degreesOfFreedom = here.residuals.length - count;
  const condition = conditionOfColumns(columns).ratio;
  const residualVariance = degreesOfFreedom > 0 ? here.sum / degreesOfFreedom : NaN;
  const isDetermined = condition < rankLimit;
  const qr = thinQrOfRows(columns);
  const unscaled =
    isDetermined && qr.dependent.length === 0
      ? fitByQr(qr, here.residuals).unscaledCovariance
      : new Float64Array(count * count).fill(NaN);
  const unscaledCovariance = columns.map((_, i) => Array.from(unscaled.subarray(i * count, (i + 1) * count)));
  const covariance = unscaledCovariance.map((row) => row.map((value) => value * residualVariance));
  const tangent = qr.q.map((row) => dot(row, here.residuals));
  const reason = reasonOf();
  return {
    estimates: here.parameters,
    covariance,
    unscaledCovariance,
    standardDeviations: covariance.map((row, i) => Math.sqrt(row[i]!)),
    residualSumOfSquares: here.sum,
    residualVariance,
    degreesOfFreedom,
    converged: reason === 'settled' || reason === 'at-rounding',
    reason,
    iterations,
    condition,
  };

  function reasonOf(): FitReason {
    if (!isDetermined || qr.dependent.length > 0) return 'direction-undetermined';
    const offset = relativeOffset(tangent, here);
    if (offset <= OFFSET) return isLowestNearby() ? 'settled' : 'saddle';
    if (iterations >= rounds) return 'rounds-used-up';
    if (!(offset <= AT_ROUNDING.offset || isStepBelow(AT_ROUNDING.step, qr, tangent, here))) return 'not-at-minimum';
    return isLowestNearby() ? 'at-rounding' : 'saddle';
  }

  /** J alone cannot tell a minimum from a saddle: look to both sides along p directions that are independent in the residuals. */
  function isLowestNearby(): boolean {
    return columns.every((_, k) => {
      const unit = columns.map((__, i) => (i === k ? PROBE * Math.sqrt(here.sum / Math.max(1, degreesOfFreedom)) : 0));
      const step = backSubstituted(qr.r, unit);
      return [1, -1].every(
        (sign) => !(evaluate(here.parameters.map((b, j) => b + sign * step[j]!)).sum < here.sum * (1 - 1e-9)),
      );
    });
  }
}

function asResiduals<X>({ model, jacobian, data, weights, start }: CurveProblem<X>): ResidualProblem {
  const { x, y } = data;
  expectLength(y, x.length, 'data.y');
  expectFinite(y, 'data.y');
  if (weights) {
    expectLength(weights, x.length, 'weights');
    expectPositive(weights, 'weights');
  }
  const root = Float64Array.from({ length: x.length }, (_, i) => Math.sqrt(weights?.[i] ?? 1));
  return {
    residuals: (parameters) => root.map((w, i) => w * (model(x[i]!, parameters) - y[i]!)),
    ...(jacobian && {
      jacobian: (parameters: readonly number[]) =>
        x.map((at, i) => jacobian(at, parameters).map((value) => root[i]! * value)),
    }),
    start,
  };
}

function transposed(rows: readonly (readonly number[])[], { parameters, residuals }: Point): Float64Array[] {
  expectLength(rows, residuals.length, 'jacobian');
  return parameters.map((_, j) => Float64Array.from(rows, (row) => row[j]!));
}

function centralDifferences(residuals: ResidualProblem['residuals'], { parameters }: Point): Float64Array[] {
  return parameters.map((value, j) => {
    const h = STEP * (Math.abs(value) || 1);
    const moved = (by: number): ArrayLike<number> => residuals(parameters.map((b, k) => (k === j ? b + by : b)));
    const [up, down] = [moved(h), moved(-h)];
    const width = value + h - (value - h);
    return Float64Array.from(up, (high, i) => (high - down[i]!) / width);
  });
}

const lengthOr1 = (column: Float64Array): number => Math.sqrt(dot(column, column)) || 1;

const weightedLength = (vector: readonly number[], scale: readonly number[]): number =>
  Math.hypot(...vector.map((value, j) => value * scale[j]!));

/** |J δ|² */
function squareOfProduct({ q, r }: ThinQr, step: readonly number[]): number {
  const count = q.length;
  let sum = 0;
  for (let i = 0; i < count; i++) {
    let row = 0;
    for (let j = i; j < count; j++) row += r[i * count + j]! * step[j]!;
    sum += row * row;
  }
  return sum;
}
