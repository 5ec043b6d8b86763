// What        Which standards disagree with the others, judged by a fit that does not contain them.
// Equation    suspicion = largest of |Δshare|/limit, |Δtotal|/limit, misfit/limit over left-out predictions; the worst are taken out, the
//             rest fitted again, until nobody is above 1; those taken out are then predicted by that fit, and accused if still above 1.
//             Limits: share 3 × robust scatter, at least 1 point; total 4 × stated uncertainty; misfit 5 × its median.
// Why so      A fit that contains a bad standard bends towards it, and its modes learn it: the culprit looks innocent and its neighbours do
//             not. Taking out the worst first and looking again clears the neighbours.
// Valid for   five standards or more; at most a third of them bad. Nobody is dropped: the calibration keeps all.
// Units       share 1, total relative, misfit absorbance.
// Source      forward search for outliers; limits ours.
import { TankhueError } from '../errors.ts';
import type { ModePriors } from '../estimation/namedModes.ts';
import { fitPair, type FitChoices, type PairFit, type PairStandard, type PairStandards } from './fitPair.ts';
import { leaveGroupsOut, predict, type LeftOut } from './validate.ts';

export interface Doubts {
  /** fit of the standards nobody doubts */
  readonly fit: PairFit;
  /** names */
  readonly doubted: ReadonlySet<string>;
  /** robust standard deviation of the share among the others */
  readonly scatter: number;
}

const FEWEST = 5;
const MOST_ROUNDS = 6;
const MOST_DOUBTED = 1 / 3;
/** Only those nearly as bad as the worst go in one round; the others may be its victims. */
const NEARLY_WORST = 0.5;
const SHARE_LIMIT = 3;
const LEAST_SHARE_LIMIT = 0.01;
const TOTAL_LIMIT = 4;
const MISFIT_LIMIT = 5;
const LEAST_MISFIT_LIMIT = 0.005;
/** share; labels are not better than this, whatever their scatter */
const LEAST_SCATTER = 0.001;

/** @param fit of all standards, with the choices it was made with */
export function findDoubts(standards: PairStandards, fit: PairFit, choices: FitChoices, priors: ModePriors): Doubts {
  const { rows } = standards;
  const none: Doubts = { fit, doubted: new Set(), scatter: scatterOf(predict(fit, rows, priors, false)) };
  if (rows.length < FEWEST) return none;
  try {
    const taken = takenOut(standards, choices, priors);
    if (taken.size === 0) return none;
    const rest = { ...standards, rows: rows.filter((row) => !taken.has(row.name)) };
    const clean = fitPair(rest, choices);
    const scatter = scatterOf(predict(clean, rest.rows, priors, false));
    const limits = limitsOf(predict(clean, rest.rows, priors, false));
    const again = rows.filter((row) => taken.has(row.name));
    const accused = predict(clean, again, priors, false).filter((one, i) => suspicion(one, again[i]!, limits) > 1);
    return { fit: clean, doubted: new Set(accused.map(({ name }) => name)), scatter };
  } catch (error) {
    // Too few standards are left to fit without the suspects: then nobody can be accused.
    if (!(error instanceof TankhueError)) throw error;
    return none;
  }
}

function takenOut(standards: PairStandards, choices: FitChoices, priors: ModePriors): Set<string> {
  const taken = new Set<string>();
  for (let round = 0; round < MOST_ROUNDS; round++) {
    const rest = { ...standards, rows: standards.rows.filter((row) => !taken.has(row.name)) };
    const leftOut = leaveGroupsOut(rest, () => choices, priors);
    const limits = limitsOf(leftOut);
    const byName = new Map(rest.rows.map((row) => [row.name, row]));
    const suspicions = leftOut.map((one) => suspicion(one, byName.get(one.name)!, limits));
    const worst = Math.max(...suspicions);
    if (!(worst > 1)) break;
    const next = leftOut.filter((_, i) => suspicions[i]! > Math.max(1, NEARLY_WORST * worst));
    if (taken.size + next.length > MOST_DOUBTED * standards.rows.length) break;
    for (const { name } of next) taken.add(name);
  }
  return taken;
}

interface Limits {
  readonly share: number;
  readonly misfit: number;
}

const limitsOf = (leftOut: readonly LeftOut[]): Limits => ({
  share: Math.max(LEAST_SHARE_LIMIT, SHARE_LIMIT * scatterOf(leftOut)),
  misfit: Math.max(LEAST_MISFIT_LIMIT, MISFIT_LIMIT * medianOf(leftOut.map(({ misfit }) => misfit))),
});

/** Above 1: doubtful. */
function suspicion(one: LeftOut, row: PairStandard, limits: Limits): number {
  const total = Math.hypot(row.pathUncertainty, (row.labelFreedom * Math.SQRT2) / one.total);
  return Math.max(
    Math.abs(one.shareError) / limits.share,
    Math.abs(one.totalError) / (TOTAL_LIMIT * total),
    one.misfit / limits.misfit,
  );
}

/** 1.4826 × median absolute error of the share. */
const scatterOf = (leftOut: readonly LeftOut[]): number =>
  Math.max(LEAST_SCATTER, 1.4826 * medianOf(leftOut.map(({ shareError }) => Math.abs(shareError))));

const medianOf = (values: readonly number[]): number => {
  const sorted = values.toSorted((a, b) => a - b);
  return sorted[Math.floor(sorted.length / 2)] ?? 0;
};
