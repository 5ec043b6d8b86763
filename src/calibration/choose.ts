// What        Which complexes, which freedom of the labels, how much noise and how many unnamed modes a pair gets.
// Equation    complexes and labels by the root mean square error of the share over left-out groups, and by the left-out misfit; noise and
//             modes by the density that the stated intervals give to the errors made, among choices nearly as accurate as the best.
// Why so      Residuals always fall with more parameters; errors on standards that were not used do not. A complex can be invisible in the
//             shares of undiluted standards and still be needed for a diluted sample: then the misfit of spectra decides. Choices are made in
//             the order in which they matter, so that the cost stays a sum and not a product.
// Valid for   two groups or more; with one group the declared defaults are taken and the record says so.
// Units       share 1, noise absorbance.
// Source      cross-validation by groups; margins ours.
import { associationName, type Association } from '../electrolyte/association.ts';
import type { Pair } from '../electrolyte/species.ts';
import type { ModePriors } from '../estimation/namedModes.ts';
import { withFittedConstant } from './associationConstant.ts';
import type { Evidence } from './calibration.ts';
import type { FitChoices, PairStandards } from './fitPair.ts';
import { leaveGroupsOut, rootMeanSquare, surprise, type LeftOut } from './validate.ts';

/** Complexes that a pair may carry when nobody declares others: each list is one model. Constant −1: to be fitted; 0: weak limit. */
export interface AssociationPlan {
  readonly association: Association;
  readonly fitted: boolean;
}

const COMPLEX: AssociationPlan = {
  association: { name: 'V4·V5', reactants: { V4: 1, V5: 1 }, associationConstant: 1 },
  fitted: true,
};
const DIMER: AssociationPlan = {
  association: { name: '2V5', reactants: { V5: 2 }, associationConstant: 0 },
  fitted: false,
};

/** Models to compare for a pair; `declared` associations that the pair can hold are added to each. */
export function candidateModels(pair: Pair, declared: readonly Association[]): AssociationPlan[][] {
  const own: AssociationPlan[][] = pair === 'V4/V5' ? [[COMPLEX, DIMER], [COMPLEX], [DIMER], []] : [[]];
  const others = declared
    .filter(
      (association) => !own.flat().some((plan) => plan.association.name === associationName(association.reactants)),
    )
    .map((association): AssociationPlan => ({ association, fitted: false }));
  return others.length === 0 ? own : [...own, ...own.map((plans) => [...plans, ...others])];
}

/** Constants fitted on these standards. */
export function associationsFor(standards: PairStandards, plans: readonly AssociationPlan[]): Association[] {
  let associations = plans.map((plan) => plan.association);
  plans.forEach((plan, index) => {
    if (plan.fitted) associations = withFittedConstant(standards, associations, index);
  });
  return associations;
}

export interface Choice {
  readonly plans: readonly AssociationPlan[];
  readonly labelsMove: boolean;
  readonly noise: number;
  readonly modeCount: number;
}

export interface Chosen {
  readonly choice: Choice;
  readonly leftOut: readonly LeftOut[];
  readonly evidence: readonly Evidence[];
}

const DEFAULT_NOISE = 0.001;
const DEFAULT_MODES = 8;
const NOISES = [0.0003, 0.0005, 0.001, 0.002, 0.004];
const MODE_COUNTS = [2, 4, 8, 12];
/** … or unless it lowers the left-out misfit by this part without making shares worse by the next. */
const MARGIN_MISFIT = 0.2;
const TOLERATED_LOSS = 0.1;
/** A model with one complex less is kept unless the richer one is better by this part. */
const MARGIN_COMPLEX = 0.05;
/** Labels are trusted unless moving them is better by this part: a flexible label can swallow the model's error. */
const MARGIN_LABELS = 0.1;

export const modelName = (plans: readonly AssociationPlan[]): string =>
  plans.length === 0 ? 'Beer-Lambert' : plans.map((plan) => plan.association.name).join(' + ');

/** @param progress called with the share of the work done, 0…1 */
export function choose(
  standards: PairStandards,
  models: readonly (readonly AssociationPlan[])[],
  labelsMayMove: boolean,
  priors: ModePriors,
  progress: (done: number) => void,
): Chosen {
  const evidence: Evidence[] = [];
  const steps = models.length + 1 + NOISES.length * MODE_COUNTS.length;
  const constants = new Map<string, Association[]>();
  const attempt = (choice: Choice): Attempt | null => {
    progress(evidence.length / steps);
    if (standards.rows.length <= 4 + choice.plans.length) return null;
    try {
      const leftOut = leaveGroupsOut(standards, (subset) => fitChoicesFor(subset, choice, constants), priors);
      const rmse = rootMeanSquare(leftOut.map((x) => x.shareError));
      const { labelsMove: labelsMoved, noise, modeCount } = choice;
      evidence.push({
        model: modelName(choice.plans),
        labelsMoved,
        noise,
        modeCount,
        rmse,
        surprise: surprise(leftOut),
      });
      return { choice, leftOut, rmse };
    } catch {
      // A subset that cannot determine this model rules the model out; the record shows what could be compared.
      return null;
    }
  };
  const base = { labelsMove: false, noise: DEFAULT_NOISE, modeCount: DEFAULT_MODES };
  const compared = models
    .map((plans) => attempt({ ...base, plans }))
    .filter((result) => result !== null)
    .sort((a, b) => a.choice.plans.length - b.choice.plans.length);
  if (compared.length === 0) return { choice: { ...base, plans: models[0]! }, leftOut: [], evidence };
  let best = compared[0]!;
  for (const result of compared.slice(1)) if (isBetterModel(result, best)) best = result;
  if (labelsMayMove) {
    const moved = attempt({ ...best.choice, labelsMove: true });
    if (moved && labelsShouldMove(standards, moved, best)) best = moved;
  }
  const tuned = NOISES.flatMap((noise) =>
    MODE_COUNTS.map((modeCount) => attempt({ ...best.choice, noise, modeCount })),
  );
  best = leastSurprising([best, ...tuned.filter((result) => result !== null)]);
  evidence.sort((a, b) => a.rmse - b.rmse);
  return { choice: best.choice, leftOut: best.leftOut, evidence };
}

interface Attempt {
  readonly choice: Choice;
  readonly leftOut: readonly LeftOut[];
  readonly rmse: number;
}

function isBetterModel(one: Attempt, best: Attempt): boolean {
  const richer = one.choice.plans.length > best.choice.plans.length;
  if (one.rmse < best.rmse * (richer ? 1 - MARGIN_COMPLEX : 1)) return true;
  const misfit = (attempt: Attempt): number => rootMeanSquare(attempt.leftOut.map((x) => x.misfit));
  return misfit(one) < misfit(best) * (1 - MARGIN_MISFIT) && one.rmse < best.rmse * (1 + TOLERATED_LOSS);
}

/**
 * Stated label uncertainties are evidence of their own: labels move when that describes the errors made at least as well. Unstated ones
 * have to earn it by accuracy.
 */
function labelsShouldMove(standards: PairStandards, moved: Attempt, held: Attempt): boolean {
  if (moved.rmse < held.rmse * (1 - MARGIN_LABELS)) return true;
  const stated = standards.rows.every((row) => row.labelUncertainty > 0);
  return stated && moved.rmse < held.rmse * (1 + TOLERATED_LOSS) && surprise(moved.leftOut) < surprise(held.leftOut);
}

/** Among the nearly most accurate the one whose intervals describe the errors made best. */
function leastSurprising(attempts: readonly Attempt[]): Attempt {
  const least = Math.min(...attempts.map((attempt) => attempt.rmse));
  return attempts
    .filter((attempt) => attempt.rmse <= least * (1 + TOLERATED_LOSS))
    .map((attempt) => ({ attempt, surprise: surprise(attempt.leftOut) }))
    .sort((a, b) => a.surprise - b.surprise)[0]!.attempt;
}

/** Constants depend on the standards and the plans alone, so one fit of them serves every choice of noise and modes. */
export function fitChoicesFor(
  standards: PairStandards,
  choice: Choice,
  constants: Map<string, Association[]> = new Map(),
): FitChoices {
  const key = `${modelName(choice.plans)}|${standards.rows.map((row) => row.name).join('|')}`;
  const associations = constants.get(key) ?? associationsFor(standards, choice.plans);
  constants.set(key, associations);
  return { associations, labelsMove: choice.labelsMove, noise: choice.noise, modeCount: choice.modeCount };
}
