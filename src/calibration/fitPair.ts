// What        Spectra of a pair's absorbing amounts, and the systematic directions left over, from standards.
// Equation    minimise Σ_s |Σ^(−½)(A_s − ℓ_s e^(t_s) Eᵀy(c_s))|² + (t_s/u_ℓ)² [+ (c_s − c⁰_s)ᵀU⁻¹(c_s − c⁰_s)] over E, t_s and, where
//             standards may move, c_s.  Modes: principal directions of the residuals, each of one standard deviation.
// Why so      For given paths and labels the spectra are linear least squares; for given spectra each standard is the same small problem as a
//             sample with priors, so the engine of `solve` serves both halves. The first rounds are unweighted: a residual covariance that
//             is too small early sends the paths off.
// Valid for   more independent compositions than absorbing amounts; label errors below about 10 %.
// Units       absorbance, cm, mol/L in the cuvette.
// Source      errors in variables by alternating least squares; ours.
import { TankhueError } from '../errors.ts';
import type { Association } from '../electrolyte/association.ts';
import { amountsOf, newAmounts } from '../electrolyte/forwardModel.ts';
import type { Pair } from '../electrolyte/species.ts';
import type { PairModel } from '../estimation/pairModel.ts';
import { prepare } from '../estimation/prepare.ts';
import { reduce, solve, type Solution } from '../estimation/solve.ts';
import { dot } from '../numerics/gramSchmidt.ts';
import { principalDirections } from '../numerics/principalDirections.ts';
import { fitLinearSpectra, type LinearSpectra } from './linearSpectra.ts';

/** The standards of one pair, on one axis, in the cuvette's own units. */
export interface PairStandards {
  readonly pair: Pair;
  readonly wavelength: Float64Array;
  readonly rows: readonly PairStandard[];
}

export interface PairStandard {
  readonly name: string;
  /** left out together in validation */
  readonly group: string;
  readonly absorbance: Float64Array;
  /** cm */
  readonly pathLength: number;
  /** relative */
  readonly pathUncertainty: number;
  /** mol/L in the cuvette, as labelled */
  readonly lower: number;
  readonly higher: number;
  /** stated standard uncertainty of each concentration, mol/L in the cuvette; 0 where nobody said */
  readonly labelUncertainty: number;
  /** how far each concentration may move where labels move, one standard deviation, mol/L in the cuvette */
  readonly labelFreedom: number;
}

/** What is fitted besides the spectra, and how much of the residuals is called systematic. */
export interface FitChoices {
  readonly associations: readonly Association[];
  readonly labelsMove: boolean;
  /** absorbance, independent from point to point */
  readonly noise: number;
  readonly modeCount: number;
}

export interface PairFit {
  readonly rows: readonly PairStandard[];
  readonly model: PairModel;
  readonly linear: LinearSpectra;
  /** per standard: relative path error, and how far its label moved (mol/L in the cuvette) */
  readonly moved: readonly StandardMove[];
  readonly residuals: readonly Float64Array[];
  readonly converged: boolean;
}

export interface StandardMove {
  readonly path: number;
  readonly lower: number;
  readonly higher: number;
}

const MOST_ROUNDS = 40;
const UNWEIGHTED_ROUNDS = 2;
/** change of a path or label, in units of its uncertainty, below which nothing that matters still moves */
const SETTLED = 0.01;
/** … and above which the fit is said not to have settled */
const UNSETTLED = 0.05;

/** Wavelength errors of single standards are left to the unnamed modes. */
const NO_SHIFT = 0;

/** @throws TankhueError `too-few-compositions` */
export function fitPair(standards: PairStandards, choices: FitChoices): PairFit {
  const { rows } = standards;
  const count = 2 + choices.associations.length;
  if (rows.length < count + 1)
    throw new TankhueError(
      'too-few-compositions',
      `expected more than ${count} standards of ${standards.pair} to fit ${count} spectra; received ${rows.length}`,
      'standards sheet',
      'make more compositions, or leave associations out',
    );
  let moved: StandardMove[] = rows.map(() => ({ path: 0, lower: 0, higher: 0 }));
  let fit = linearFit(standards, choices, moved, true);
  let change = Infinity;
  for (let round = 1; round < MOST_ROUNDS && (round <= UNWEIGHTED_ROUNDS + 1 || change > SETTLED); round++) {
    const next = moveStandards(rows, fit.model, choices, moved);
    change = largestChange(rows, moved, next);
    moved = next;
    fit = linearFit(standards, choices, moved, round < UNWEIGHTED_ROUNDS);
  }
  return { ...fit, rows, moved, converged: change <= UNSETTLED };
}

/** Residual sum of squares of an unweighted fit with free paths: what association constants are profiled on. */
export function residualSumOfSquares(standards: PairStandards, associations: readonly Association[]): number {
  const choices: FitChoices = { associations, labelsMove: false, noise: 0, modeCount: 0 };
  let moved: StandardMove[] = standards.rows.map(() => ({ path: 0, lower: 0, higher: 0 }));
  let fit = linearFit(standards, choices, moved, true);
  for (let round = 0; round < UNWEIGHTED_ROUNDS; round++) {
    moved = moveStandards(standards.rows, fit.model, choices, moved);
    fit = linearFit(standards, choices, moved, true);
  }
  return fit.residuals.reduce((sum, row) => sum + dot(row, row), 0);
}

/** Spectra and modes for standards as they stand now. */
function linearFit(
  standards: PairStandards,
  choices: FitChoices,
  moved: readonly StandardMove[],
  unweighted: boolean,
): Omit<PairFit, 'rows' | 'moved' | 'converged'> {
  const { rows } = standards;
  const amounts = amountsOf(standards.pair, choices.associations);
  const out = newAmounts(2 + choices.associations.length);
  const design = rows.map((row, s) => {
    const scale = row.pathLength * Math.exp(moved[s]!.path);
    return amounts(row.lower + moved[s]!.lower, row.higher + moved[s]!.higher, out).amount.map((y) => y * scale);
  });
  const linear = fitLinearSpectra(
    design,
    rows.map((row) => row.absorbance),
  );
  const freedom = Math.max(1, rows.length - design[0]!.length);
  const square = linear.residuals.reduce((sum, row) => sum + dot(row, row), 0);
  const plain = Math.sqrt(square / (freedom * standards.wavelength.length));
  return {
    linear,
    residuals: linear.residuals,
    model: {
      pair: standards.pair,
      wavelength: standards.wavelength,
      associations: choices.associations,
      spectra: linear.spectra,
      noise: unweighted ? Math.max(plain, choices.noise) : choices.noise,
      modes: unweighted ? [] : principalDirections(linear.residuals, freedom, choices.modeCount),
      designInverse: linear.inverse,
    },
  };
}

function moveStandards(
  rows: readonly PairStandard[],
  model: PairModel,
  choices: FitChoices,
  moved: readonly StandardMove[],
): StandardMove[] {
  const prepared = prepare(model, []);
  const next = rows.map((row, s) => {
    const held = choices.labelsMove ? row.labelFreedom : 0;
    const precision = 1 / Math.max(held, 1e-7 * (row.lower + row.higher)) ** 2;
    const solution: Solution = solve(prepared, reduce(prepared, row.absorbance), {
      pathLength: row.pathLength,
      pathUncertainty: row.pathUncertainty,
      wavelengthUncertainty: NO_SHIFT,
      label: { lower: row.lower, higher: row.higher, precision: Float64Array.of(precision, 0, 0, precision) },
    });
    return solution.converged
      ? { path: solution.pathShift, lower: solution.lower - row.lower, higher: solution.higher - row.higher }
      : moved[s]!;
  });
  return withoutCommonPath(rows, next);
}

/** A path error common to all standards is the same thing as larger spectra; the optimum has none, and alternation finds that slowly. */
function withoutCommonPath(rows: readonly PairStandard[], moved: readonly StandardMove[]): StandardMove[] {
  const weights = rows.map((row) => 1 / Math.max(row.pathUncertainty, 1e-9) ** 2);
  const common =
    weights.reduce((sum, weight, s) => sum + weight * moved[s]!.path, 0) /
    weights.reduce((sum, weight) => sum + weight, 0);
  return moved.map((move) => ({ ...move, path: move.path - common }));
}

function largestChange(
  rows: readonly PairStandard[],
  before: readonly StandardMove[],
  after: readonly StandardMove[],
): number {
  return Math.max(
    ...rows.map((row, s) => {
      const a = before[s]!;
      const b = after[s]!;
      const label = Math.max(row.labelFreedom, 1e-4 * (row.lower + row.higher));
      return Math.max(
        Math.abs(a.path - b.path) / Math.max(row.pathUncertainty, 1e-4),
        Math.abs(a.lower - b.lower) / label,
        Math.abs(a.higher - b.higher) / label,
      );
    }),
  );
}
