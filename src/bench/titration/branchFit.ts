// What        All end points of a curve at once, from all its branches and jumps, with the electrode's faults fitted beside them.
// Equation    in a step x = L + s·log10((v − a + r)/(b − v)), in excess of titrant x = L + s·log10(v − a), with ±E = x + drift·(v − v̄)
//             − (m/z)·s·log10(1 + βv). Parameters: end points, one level L a branch, slope s, drift, dilution of the acid β = 1/V_beaker;
//             the last three with priors. Second-derivative end points enter as observations. Weights 1/(σ_E² + (dE/dv)²σ_v²); Gauss-Newton.
// Why so      Gran's lines need each other's ends, and diluting the acid by a quarter shifts a two-proton couple by 11 mV, which moves a Gran
//             zero by 1 %; solved together, each error is where it belongs and the end points come with their covariance.
//             Priors as for the modes of a spectrum: no prior eats signal, too small a one biases.
// Valid for   couples that follow Nernst's law. Where no branch can be used the jumps alone speak.
// Units       mL, mV, K.
// Source      Nernst's law and least squares; form and priors are ours.
import { fitLinear, type LinearFit } from '../../numerics/linearFit.ts';
import {
  firstLevels,
  jumpOf,
  middleOf,
  productOf,
  selectReadings,
  slowEffect,
  type BranchState,
  type SelectedBranch,
} from './branchReadings.ts';
import { nernstSlope } from './couples.ts';
import type { Branch, Course } from './course.ts';
import { potentialNoise, type TitrationCurve } from './curve.ts';
import { granEnd, granExcess, granStart, type GranPoint, type GranScatter, type GranZero } from './granFunction.ts';
import type { Jump } from './jumps.ts';

/** What is known of the cell beside the readings. */
export interface TitrationCell {
  /** K */
  readonly temperature: number;
  /** mL in the beaker at the start; null where nobody said */
  readonly beakerVolume: number | null;
  /** mV the electrode moved from start to end in one and the same solution; null where nobody looked */
  readonly driftSeen: number | null;
  /** mL, random error of one reading of the burette */
  readonly readingUncertainty: number;
}

export interface FittedEffect {
  readonly value: number;
  readonly uncertainty: number;
  /** from the prior, in its standard deviations */
  readonly inPriorUnits: number;
}

/** Gran's zeros of one branch, at its start and at its end. */
export interface GranOfBranch {
  readonly branch: Branch;
  readonly start: GranZero | null;
  readonly end: GranZero | null;
}

export interface BranchFit {
  /** mL, one a step */
  readonly endPoints: readonly number[];
  /** row-major, mL² */
  readonly covariance: Float64Array;
  readonly degreesOfFreedom: number;
  readonly gran: readonly GranOfBranch[];
  readonly scatter: GranScatter;
  /** relative error of the electrode's slope */
  readonly slopeError: FittedEffect;
  /** mV/mL */
  readonly drift: FittedEffect;
  /** lag-one correlation of the residuals */
  readonly lagCorrelation: number;
  /** largest residual, in its standard deviations, and its reading; null without branches */
  readonly worst: { readonly index: number; readonly inUnits: number } | null;
}

const SLOPE_PRIOR = 0.01;
/** mV over the whole run, where the electrode was not checked in one solution before and after; and where it was. [practice] */
const DRIFT_PRIOR = { unseen: 3, seen: 1 };
/** 1/mL: some 100 mL where nobody said; 3 % where somebody did. [practice] */
const BEAKER_PRIOR = { assumed: 0.01, uncertainty: 0.005, relative: 0.03 };
/** Readings nearer than this to an end of their branch, in σ_v, say nothing by their logarithm. */
const NEAREST = 6;
/** mV, resolution of any meter */
const LEAST_SCATTER = 0.03;
const ROUNDS = 40;
/** mL */
const SETTLED = 1e-5;

interface Prior {
  readonly mean: number;
  readonly deviation: number;
}

interface Problem {
  readonly curve: TitrationCurve;
  readonly course: Course;
  readonly jumps: readonly Jump[];
  readonly nernst: number;
  readonly readingUncertainty: number;
  /** relative slope error, drift, 1/beaker, and the product at the start where it is unknown */
  readonly priors: readonly Prior[];
}

/** Everything that is fitted: end points, shared effects in the order of the priors, levels of the branches in use. */
interface Parameters {
  readonly v: readonly number[];
  readonly shared: readonly number[];
  readonly levels: readonly number[];
}

export function fitBranches(
  curve: TitrationCurve,
  course: Course,
  jumps: readonly Jump[],
  cell: TitrationCell,
): BranchFit {
  const needed = jumps.slice(0, course.steps.length);
  const range = curve.volume.at(-1)! - curve.volume[0]!;
  const drift = cell.driftSeen === null ? DRIFT_PRIOR.unseen : DRIFT_PRIOR.seen;
  const problem: Problem = {
    curve,
    course,
    jumps,
    nernst: nernstSlope(cell.temperature),
    readingUncertainty: cell.readingUncertainty,
    priors: [
      { mean: 0, deviation: SLOPE_PRIOR },
      { mean: (cell.driftSeen ?? 0) / range, deviation: drift / range },
      cell.beakerVolume === null
        ? { mean: BEAKER_PRIOR.assumed, deviation: BEAKER_PRIOR.uncertainty }
        : { mean: 1 / cell.beakerVolume, deviation: BEAKER_PRIOR.relative / cell.beakerVolume },
      ...(course.startUnknown ? [{ mean: needed[0]!.volume, deviation: 10 * needed[0]!.volume }] : []),
    ],
  };
  let scatter = Math.max(LEAST_SCATTER, potentialNoise(curve));
  let parameters: Parameters = {
    v: needed.map(({ volume }) => volume),
    shared: problem.priors.map(({ mean }) => mean),
    levels: [],
  };
  let levels = firstLevels(curve, course, jumps, stateOf(problem, parameters, []), problem.nernst);
  let selected: SelectedBranch[] = [];
  const reselect = (): void => {
    selected = selectReadings(
      curve,
      course,
      jumps,
      stateOf(problem, parameters, levels),
      problem.nernst,
      NEAREST * cell.readingUncertainty,
    );
    parameters = { ...parameters, levels: selected.map(({ branch }) => levels[course.branches.indexOf(branch)]!) };
  };
  // Gran's zeros first: their lines stay straight when the jump gave the end 0.2 mL off, logarithms do not.
  for (let round = 0; round < 4; round++) {
    reselect();
    const gran = granOf(problem, selected, parameters, { potential: scatter, volume: cell.readingUncertainty });
    parameters = { ...parameters, v: parameters.v.map((v, j) => granEstimate(problem, gran, j, v)) };
    levels = firstLevels(curve, course, jumps, stateOf(problem, parameters, levels), problem.nernst);
  }
  reselect();
  if (selected.length === 0) return jumpsAlone(problem, scatter);
  let step = linearised(problem, selected, parameters, scatter);
  for (let round = 0; round < ROUNDS; round++) {
    const moved = addTo(parameters, step.fit.coefficients);
    const change = Math.max(...moved.v.map((v, j) => Math.abs(v - parameters.v[j]!)));
    parameters = moved;
    selected.forEach(({ branch }, k) => (levels[course.branches.indexOf(branch)] = parameters.levels[k]!));
    reselect();
    step = linearised(problem, selected, parameters, scatter);
    if (step.freedom > 0) scatter = Math.max(LEAST_SCATTER, scatter * Math.sqrt(step.chiSquare / step.freedom));
    if (change < SETTLED && round > 2) break;
  }
  return describe(problem, selected, parameters, scatter, step);
}

const stateOf = (problem: Problem, { v, shared }: Parameters, levels: readonly number[]): BranchState => ({
  v,
  product: shared[3] ?? 0,
  slope: problem.nernst * (1 + shared[0]!),
  effects: { drift: shared[1]!, beaker: shared[2]! },
  levels,
});

/** The model of one branch: mV, with its sign so that it rises, of a volume (corrected for neighbours) and the volume delivered. */
function branchCurve(
  { course, curve, nernst }: Problem,
  branch: Branch,
  level: number,
  state: BranchState,
): (volume: number, delivered: number) => number {
  const begin = branch.from(state.v) - productOf(course, branch, state);
  const end = branch.to === null ? null : branch.to(state.v);
  const middle = middleOf(curve);
  return (volume, delivered) =>
    level +
    state.slope * Math.log10(end === null ? volume - begin : (volume - begin) / (end - volume)) +
    course.direction * slowEffect(branch, state.effects, nernst, delivered, middle);
}

interface Linearised {
  readonly fit: LinearFit;
  readonly chiSquare: number;
  readonly freedom: number;
  readonly residuals: readonly { readonly index: number; readonly inUnits: number }[];
}

/** One Gauss-Newton step: coefficients are the changes of end points, shared effects and levels. */
function linearised(
  problem: Problem,
  selected: readonly SelectedBranch[],
  parameters: Parameters,
  scatter: number,
): Linearised {
  const { curve, course, jumps, nernst, readingUncertainty, priors } = problem;
  const { v, shared } = parameters;
  const size = v.length + shared.length + selected.length;
  const steps = [...v.map(() => 1e-6), 1e-7, 1e-7, 1e-9, 1e-6].slice(0, v.length + shared.length);
  const count = selected.reduce((sum, { readings }) => sum + readings.length, 0) + v.length + shared.length;
  const columns = Array.from({ length: size }, () => new Float64Array(count));
  const right = new Float64Array(count);
  let row = 0;
  const residuals: { index: number; inUnits: number }[] = [];
  selected.forEach(({ branch, readings }, k) => {
    const modelOf = (p: Parameters) => branchCurve(problem, branch, parameters.levels[k]!, stateOf(problem, p, []));
    const model = modelOf(parameters);
    const nudged = steps.map((h, j) => {
      const change = new Float64Array(size);
      change[j] = h;
      return modelOf(addTo(parameters, change));
    });
    for (const { index, volume, formed, left } of readings) {
      const delivered = curve.volume[index]!;
      const expected = model(volume, delivered);
      // A reading on the far side of an end that is still on its way has no logarithm yet.
      if (!Number.isFinite(expected)) continue;
      const weight = 1 / Math.hypot(scatter, (nernst / Math.LN10) * (1 / formed + 1 / left) * readingUncertainty);
      const inUnits = (course.direction * curve.potential[index]! - expected) * weight;
      nudged.forEach((shifted, j) => {
        columns[j]![row] = ((shifted(volume, delivered) - expected) / steps[j]!) * weight;
      });
      columns[steps.length + k]![row] = weight;
      right[row++] = inUnits;
      residuals.push({ index, inUnits });
    }
  });
  const observe = (j: number, difference: number, deviation: number): void => {
    columns[j]![row] = 1 / deviation;
    right[row++] = difference / deviation;
  };
  v.forEach((value, j) => observe(j, jumps[j]!.volume - value, jumps[j]!.uncertainty));
  priors.forEach(({ mean, deviation }, j) => observe(v.length + j, mean - shared[j]!, deviation));
  return {
    fit: fitLinear(columns, right),
    chiSquare: residuals.reduce((sum, { inUnits }) => sum + inUnits * inUnits, 0),
    freedom: residuals.length - v.length - selected.length,
    residuals,
  };
}

function addTo({ v, shared, levels }: Parameters, change: ArrayLike<number>): Parameters {
  const part = (values: readonly number[], offset: number): number[] =>
    values.map((value, j) => value + change[offset + j]!);
  return { v: part(v, 0), shared: part(shared, v.length), levels: part(levels, v.length + shared.length) };
}

function granOf(
  problem: Problem,
  selected: readonly SelectedBranch[],
  parameters: Parameters,
  scatter: GranScatter,
): GranOfBranch[] {
  const { curve, course, nernst } = problem;
  const state = stateOf(problem, parameters, []);
  return selected.map(({ branch, readings }) => {
    const points = readings.map(({ index, volume, formed, left }): GranPoint => ({
      volume,
      formed,
      left,
      potential:
        course.direction *
        (curve.potential[index]! - slowEffect(branch, state.effects, nernst, curve.volume[index]!, middleOf(curve))),
    }));
    const from = branch.from(state.v);
    if (branch.to === null) return { branch, start: granExcess(points, state.slope, scatter), end: null };
    const product = productOf(course, branch, state);
    return {
      branch,
      start: granStart(points, branch.to(state.v), state.slope, scatter),
      end: granEnd(points, from - product, state.slope, scatter),
    };
  });
}

/** Weighted mean of the Gran zeros that name end point `j`; the value so far where none does. */
function granEstimate({ course }: Problem, gran: readonly GranOfBranch[], j: number, soFar: number): number {
  const zeros = zerosOf(course, gran, j);
  const weight = zeros.reduce((sum, { zero }) => sum + 1 / zero.uncertainty ** 2, 0);
  return weight > 0 ? zeros.reduce((sum, { zero }) => sum + zero.volume / zero.uncertainty ** 2, 0) / weight : soFar;
}

/** Gran's zeros of one end point, from the branch before it and the branch after it. */
export function zerosOf(
  course: Course,
  gran: readonly GranOfBranch[],
  j: number,
): { side: 'before' | 'after'; zero: GranZero }[] {
  const names = (bound: Branch['to']): boolean => bound !== null && jumpOf(course, bound) === j;
  return gran.flatMap(({ branch, start, end }) => [
    ...(end && names(branch.to) ? [{ side: 'before' as const, zero: end }] : []),
    ...(start && names(branch.from) ? [{ side: 'after' as const, zero: start }] : []),
  ]);
}

/** Without a branch that obeys Nernst's law nothing is known but the jumps. */
function jumpsAlone({ jumps, course, priors, readingUncertainty }: Problem, scatter: number): BranchFit {
  const needed = jumps.slice(0, course.steps.length);
  const count = needed.length;
  const unfitted = (j: number): FittedEffect => ({
    value: priors[j]!.mean,
    uncertainty: priors[j]!.deviation,
    inPriorUnits: 0,
  });
  return {
    endPoints: needed.map(({ volume }) => volume),
    covariance: Float64Array.from({ length: count * count }, (_, m) =>
      Math.floor(m / count) === m % count ? needed[m % count]!.uncertainty ** 2 : 0,
    ),
    // the width of an interval is known, not estimated from scatter
    degreesOfFreedom: Infinity,
    gran: [],
    scatter: { potential: scatter, volume: readingUncertainty },
    slopeError: unfitted(0),
    drift: unfitted(1),
    lagCorrelation: 0,
    worst: null,
  };
}

function describe(
  problem: Problem,
  selected: readonly SelectedBranch[],
  parameters: Parameters,
  scatter: number,
  step: Linearised,
): BranchFit {
  const { fit, residuals } = step;
  const size = fit.coefficients.length;
  const count = parameters.v.length;
  const lagCorrelation = lagOne(residuals.map(({ inUnits }) => inUnits));
  // Readings that err together count for fewer.
  const inflation = lagCorrelation > 2 / Math.sqrt(residuals.length) ? (1 + lagCorrelation) / (1 - lagCorrelation) : 1;
  const variance = (i: number, j: number): number => fit.unscaledCovariance[i * size + j]! * inflation;
  const effect = (j: number): FittedEffect => ({
    value: parameters.shared[j]!,
    uncertainty: Math.sqrt(variance(count + j, count + j)),
    inPriorUnits: (parameters.shared[j]! - problem.priors[j]!.mean) / problem.priors[j]!.deviation,
  });
  const spread = { potential: scatter, volume: problem.readingUncertainty };
  return {
    endPoints: parameters.v,
    covariance: Float64Array.from({ length: count * count }, (_, m) => variance(Math.floor(m / count), m % count)),
    degreesOfFreedom: Math.max(1, step.freedom),
    gran: granOf(problem, selected, parameters, spread),
    scatter: spread,
    slopeError: effect(0),
    drift: effect(1),
    lagCorrelation,
    worst:
      residuals.length === 0 ? null : residuals.reduce((a, b) => (Math.abs(b.inUnits) > Math.abs(a.inUnits) ? b : a)),
  };
}

function lagOne(residuals: readonly number[]): number {
  let product = 0;
  let square = 0;
  residuals.forEach((r, i) => {
    square += r * r;
    if (i > 0) product += r * residuals[i - 1]!;
  });
  return square > 0 ? product / square : 0;
}
