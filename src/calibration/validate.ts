// What        How far a calibration misses standards it has not seen.
// Equation    each group g left out, everything refitted on the rest, members of g assayed as samples: e = found − label.
//             Between-group variance τ²: Σ e²/(u² + τ²) = N, u² from fit, leverage and label.
// Why so      Standards of one preparation or one concentration share their errors, so leaving out single ones flatters. Uncertainty from a
//             fit alone is two to four times too small on real spectra; only what validation shows beyond it makes intervals that hold.
// Valid for   two groups or more.
// Units       share of the higher species 1; total vanadium relative.
// Source      Mandel, Paule, Anal. Chem. 1970, 42, 1194, with the labels as known means.
import { cuvetteFaults, fittedCurve, scoreFaults } from '../estimation/faults.ts';
import { foreignFaults, type ForeignSpectrum } from '../estimation/foreign.ts';
import type { ModePriors } from '../estimation/namedModes.ts';
import { namedModes } from '../estimation/namedModes.ts';
import { prepare } from '../estimation/prepare.ts';
import { reduce, solve } from '../estimation/solve.ts';
import { calibrationLeverage, concentrationCovariance, shareAndTotal } from '../estimation/uncertainty.ts';
import { fitPair, type FitChoices, type PairFit, type PairStandard, type PairStandards } from './fitPair.ts';

/** One standard predicted by a calibration that did not contain its group. */
export interface LeftOut {
  readonly name: string;
  readonly group: string;
  /** share of the higher species: label, found − label, standard uncertainty before the between-group variance */
  readonly share: number;
  readonly shareError: number;
  readonly shareUncertainty: number;
  /** mol/L in the cuvette */
  readonly total: number;
  /** relative */
  readonly totalError: number;
  readonly totalUncertainty: number;
  /** χ²/ν over 1 + leverage: a prediction carries the errors of the calibration's spectra too */
  readonly reducedChiSquare: number;
  /** root mean square of measured − fitted, absorbance */
  readonly misfit: number;
  /** scores of named faults, which are standard normal where the model is complete */
  readonly faultScores: Readonly<Record<string, number>>;
}

export interface Excess {
  readonly share: number;
  readonly total: number;
}

/** @param refit builds the choices anew for a subset (association constants belong to the fit, not to the person) */
export function leaveGroupsOut(
  standards: PairStandards,
  refit: (subset: PairStandards) => FitChoices,
  priors: ModePriors,
  foreign: readonly ForeignSpectrum[] = [],
): LeftOut[] {
  const groups = [...new Set(standards.rows.map((row) => row.group))];
  return groups.flatMap((group) => {
    const rest = { ...standards, rows: standards.rows.filter((row) => row.group !== group) };
    const choices = refit(rest);
    return predict(
      fitPair(rest, choices),
      standards.rows.filter((row) => row.group === group),
      priors,
      choices.labelsMove,
      foreign,
    );
  });
}

/**
 * Assays standards with a fit as if they were samples. Where labels were held, their errors are in the residuals and so in the modes
 * already; where they moved, the label's own uncertainty comes on top.
 */
export function predict(
  fit: PairFit,
  rows: readonly PairStandard[],
  priors: ModePriors,
  labelsMove: boolean,
  foreign: readonly ForeignSpectrum[] = [],
): LeftOut[] {
  const prepared = prepare(fit.model, namedModes(fit.model.wavelength, priors));
  return rows.map((row) => {
    const cuvette = {
      pathLength: row.pathLength,
      pathUncertainty: row.pathUncertainty,
      wavelengthUncertainty: priors.wavelengthShift,
    };
    const solution = solve(prepared, reduce(prepared, row.absorbance), cuvette);
    const fitted = fittedCurve(prepared, solution, row.pathLength).total;
    const shapes = [...cuvetteFaults(prepared, fitted), ...foreignFaults(prepared, row.pathLength, foreign)];
    const found = shareAndTotal(
      solution.lower,
      solution.higher,
      concentrationCovariance(prepared, solution, row.pathLength),
    );
    const total = row.lower + row.higher;
    const own = labelsMove ? labelUncertaintyOf([row]) : NO_LABEL_UNCERTAINTY;
    const common = labelsMove ? labelUncertaintyOf(fit.rows) : NO_LABEL_UNCERTAINTY;
    const leverage = calibrationLeverage(prepared, solution, row.pathLength);
    return {
      name: row.name,
      group: row.group,
      share: row.higher / total,
      shareError: found.share - row.higher / total,
      shareUncertainty: Math.hypot(found.shareUncertainty, own.share, Math.sqrt(leverage) * common.share),
      total,
      totalError: found.total / total - 1,
      totalUncertainty: Math.hypot(found.totalUncertainty / total, own.total, Math.sqrt(leverage) * common.total),
      reducedChiSquare: solution.chiSquare / (1 + leverage) / (prepared.used.length - 2),
      misfit: rootMeanSquare(Array.from(prepared.used, (i, l) => row.absorbance[i]! - fitted[l]!)),
      faultScores: Object.fromEntries(
        scoreFaults(prepared, row.absorbance, solution, cuvette, shapes).map((fault) => [
          fault.name,
          fault.score / Math.sqrt(1 + leverage),
        ]),
      ),
    };
  });
}

export interface LabelUncertainty {
  /** share of the higher species, 1 */
  readonly share: number;
  /** relative */
  readonly total: number;
}

export const NO_LABEL_UNCERTAINTY: LabelUncertainty = { share: 0, total: 0 };

/** Root mean square over standards of what the labels' uncertainties make of share and total, both concentrations independent. */
export function labelUncertaintyOf(rows: readonly PairStandard[]): LabelUncertainty {
  const freedom = (row: PairStandard): number => row.labelUncertainty || row.labelFreedom;
  return {
    share: rootMeanSquare(
      rows.map((row) => (freedom(row) * Math.hypot(row.lower, row.higher)) / (row.lower + row.higher) ** 2),
    ),
    total: rootMeanSquare(rows.map((row) => (freedom(row) * Math.SQRT2) / (row.lower + row.higher))),
  };
}

/** Standard deviations beyond the stated uncertainties, for share and relative total. */
export const excessOf = (leftOut: readonly LeftOut[]): Excess => ({
  share: excessDeviation(
    leftOut.map((x) => x.shareError),
    leftOut.map((x) => x.shareUncertainty),
  ),
  total: excessDeviation(
    leftOut.map((x) => x.totalError),
    leftOut.map((x) => x.totalUncertainty),
  ),
});

function excessDeviation(errors: readonly number[], uncertainties: readonly number[]): number {
  const misfit = (variance: number): number =>
    errors.reduce((sum, e, i) => sum + (e * e) / (uncertainties[i]! ** 2 + variance), 0) - errors.length;
  if (errors.length === 0 || misfit(0) <= 0) return 0;
  let low = 0;
  let high = Math.max(...errors.map((e) => e * e));
  for (let step = 0; step < 100; step++) {
    const middle = (low + high) / 2;
    if (misfit(middle) > 0) low = middle;
    else high = middle;
  }
  return Math.sqrt(high);
}

/**
 * Mean negative logarithm of the density that the intervals give to the errors made, ½(ln v + e²/v): small when errors are small and the
 * stated uncertainties are neither too narrow nor too wide.
 */
export function surprise(leftOut: readonly LeftOut[]): number {
  const { share } = excessOf(leftOut);
  const sum = leftOut.reduce((total, x) => {
    const variance = x.shareUncertainty ** 2 + share * share;
    return total + (Math.log(variance) + x.shareError ** 2 / variance) / 2;
  }, 0);
  return sum / leftOut.length;
}

export const rootMeanSquare = (values: readonly number[]): number =>
  Math.sqrt(values.reduce((sum, value) => sum + value * value, 0) / values.length);
