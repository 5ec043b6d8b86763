import { oxidationNumber, speciesOfPair, type Pair } from '../electrolyte/species.ts';
import { newAmounts } from '../electrolyte/forwardModel.ts';
import { namedModes, type ModePriors } from '../estimation/namedModes.ts';
import type { PairModel } from '../estimation/pairModel.ts';
import { prepare, whiten } from '../estimation/prepare.ts';
import { reduce, solve } from '../estimation/solve.ts';
import { concentrationCovariance } from '../estimation/uncertainty.ts';
import { conditionOfColumns } from '../numerics/condition.ts';
import { dot } from '../numerics/gramSchmidt.ts';
import { studentQuantile } from '../numerics/distributions.ts';
import { profileConstant } from './associationConstant.ts';
import type {
  ConstantRecord,
  Domain,
  ErrorFigures,
  LimitRecord,
  PairCalibration,
  ValidationFigures,
} from './calibration.ts';
import type { Chosen } from './choose.ts';
import type { PairFit, PairStandards } from './fitPair.ts';
import {
  excessOf,
  labelUncertaintyOf,
  NO_LABEL_UNCERTAINTY,
  rootMeanSquare,
  type Excess,
  type LeftOut,
} from './validate.ts';

/** Significant digits kept in a calibration: below the noise of any photometer, so that the file stays small and reads back exactly. */
const KEPT_DIGITS = 9;

/**
 * Where no standard could be left out: labels made by volume are good to one or two points, thin cells to some per cent (common practice,
 * no source; published spectra show up to 0.8 points and 2.6 %). Freedom 8: known to 25 % (JCGM 100:2008, G.4.2).
 */
const UNVALIDATED = { share: 0.015, total: 0.03, freedom: 8 };

/** Everything a calibration says of one pair. */
export function pairRecord(
  standards: PairStandards,
  fit: PairFit,
  chosen: Chosen,
  priors: ModePriors,
): PairCalibration {
  const model = rounded(fit.model);
  const logarithms = chosen.leftOut.map((x) => Math.log(x.reducedChiSquare));
  const mean = average(logarithms);
  const groups = [...new Set(standards.rows.map((row) => row.group))];
  const betweenGroup =
    chosen.leftOut.length > 0
      ? { ...excessOf(chosen.leftOut), freedom: Math.max(1, chosen.leftOut.length - 1) }
      : UNVALIDATED;
  return {
    pair: standards.pair,
    model,
    constants: constantsOf(standards, model),
    labelsMoved: chosen.choice.labelsMove,
    labelUncertainty: chosen.choice.labelsMove ? labelUncertaintyOf(standards.rows) : NO_LABEL_UNCERTAINTY,
    betweenGroup,
    match: {
      mean: chosen.leftOut.length > 0 ? mean : 0,
      deviation: chosen.leftOut.length > 1 ? rootMeanSquare(logarithms.map((x) => x - mean)) : 1,
      count: chosen.leftOut.length,
    },
    faultScales: faultScalesOf(chosen.leftOut),
    domain: domainOf(standards),
    leftOut: chosen.leftOut,
    validation: [
      figures('all', chosen.leftOut, betweenGroup),
      ...groups.map((group) =>
        figures(
          group,
          chosen.leftOut.filter((x) => x.group === group),
          betweenGroup,
        ),
      ),
    ].filter((record) => record.count > 0),
    evidence: chosen.evidence,
    limits: limitsOf(standards, model, betweenGroup, priors),
    design: designOf(standards, model),
  };
}

const average = (values: readonly number[]): number => values.reduce((sum, value) => sum + value, 0) / values.length;

const roundedRow = (row: Float64Array): Float64Array => row.map((value) => Number(value.toPrecision(KEPT_DIGITS)) + 0);

function rounded(model: PairModel): PairModel {
  return {
    ...model,
    associations: model.associations.map((association) => ({
      ...association,
      associationConstant: Number(association.associationConstant.toPrecision(KEPT_DIGITS)),
    })),
    spectra: model.spectra.map(roundedRow),
    modes: model.modes.map(roundedRow),
    designInverse: roundedRow(model.designInverse),
  };
}

function constantsOf(standards: PairStandards, model: PairModel): ConstantRecord[] {
  return model.associations.map((association, index) => ({
    association: association.name,
    value: association.associationConstant,
    interval:
      association.associationConstant > 0
        ? profileConstant(standards, model.associations, index).interval
        : [null, null],
  }));
}

/** Scores of left-out standards are what sound samples will show; below 1 the theory stands. */
export function faultScalesOf(leftOut: readonly LeftOut[]): Record<string, number> {
  const names = Object.keys(leftOut[0]?.faultScores ?? {});
  return Object.fromEntries(
    names.map((name) => [name, Math.max(1, rootMeanSquare(leftOut.map((x) => x.faultScores[name] ?? 0)))]),
  );
}

function domainOf(standards: PairStandards): Domain {
  const range = (values: readonly number[]): [number, number] => [Math.min(...values), Math.max(...values)];
  return {
    share: range(standards.rows.map((row) => row.higher / (row.lower + row.higher))),
    total: range(standards.rows.map((row) => row.lower + row.higher)),
    path: range(standards.rows.map((row) => row.pathLength)),
    absorbance: Math.max(...standards.rows.map((row) => row.absorbance.reduce((a, b) => Math.max(a, b), -Infinity))),
  };
}

/** Errors of left-out standards against their intervals, the between-group variance included. */
export function figures(group: string, leftOut: readonly LeftOut[], excess: Excess): ValidationFigures {
  const of = (errors: readonly number[], uncertainties: readonly number[], deviation: number): ErrorFigures => ({
    bias: errors.length > 0 ? average(errors) : 0,
    rmse: errors.length > 0 ? rootMeanSquare(errors) : 0,
    largest: Math.max(0, ...errors.map(Math.abs)),
    coverage:
      errors.filter((error, i) => Math.abs(error) <= 1.96 * Math.hypot(uncertainties[i]!, deviation)).length /
      Math.max(1, errors.length),
  });
  return {
    group,
    count: leftOut.length,
    share: of(
      leftOut.map((x) => x.shareError),
      leftOut.map((x) => x.shareUncertainty),
      excess.share,
    ),
    total: of(
      leftOut.map((x) => x.totalError),
      leftOut.map((x) => x.totalUncertainty),
      excess.total,
    ),
  };
}

/**
 * Decision, detection and quantification limits on the concentration scale by the logic of ISO 11843-2 and DIN 32645: one-sided 95 % each
 * way from the standard uncertainty at zero, in a solution of the other species at the middle of the domain; quantification where the
 * relative half interval is one third. Sensitivity and selectivity by net analyte signal (Lorber, Anal. Chem. 1986, 58, 1167).
 */
function limitsOf(
  standards: PairStandards,
  model: PairModel,
  betweenGroup: PairCalibration['betweenGroup'],
  priors: ModePriors,
): LimitRecord[] {
  const prepared = prepare(model, namedModes(model.wavelength, priors));
  const { total: totals, path } = domainOf(standards);
  const total = (totals[0] + totals[1]) / 2;
  const pathLength = path[1];
  const t = studentQuantile(0.95, betweenGroup.freedom);
  const t2 = studentQuantile(0.975, betweenGroup.freedom);
  return speciesOfPair(standards.pair).map((species, index) => {
    const lower = index === 0 ? 0 : total;
    const { amount } = prepared.amounts(lower, total - lower, newAmounts(prepared.amountCount));
    const absorbance = new Float64Array(model.wavelength.length);
    model.spectra.forEach((spectrum, k) => {
      for (let l = 0; l < absorbance.length; l++) absorbance[l]! += pathLength * amount[k]! * spectrum[l]!;
    });
    const solution = solve(prepared, reduce(prepared, absorbance), {
      pathLength,
      pathUncertainty: 0,
      wavelengthUncertainty: priors.wavelengthShift,
    });
    const covariance = concentrationCovariance(prepared, solution, pathLength);
    const u = Math.hypot(Math.sqrt(covariance[index * 3]!), betweenGroup.share * total);
    const signal = netAnalyteSignal(model, prepared.whitening, index);
    return {
      species,
      path: pathLength,
      decision: t * u,
      detection: 2 * t * u,
      quantification: 3 * t2 * u,
      ...signal,
    };
  });
}

function netAnalyteSignal(
  model: PairModel,
  whitening: Parameters<typeof whiten>[0],
  index: number,
): { sensitivity: number; selectivity: number } {
  const own = model.spectra[index]!;
  const other = model.spectra[1 - index]!;
  const projection = dot(own, other) / (dot(other, other) || 1);
  const net = own.map((value, l) => value - projection * other[l]!);
  const sensitivity = Math.sqrt(dot(net, net) / net.length);
  const whitened = whiten(whitening, net);
  return {
    sensitivity: Number.isFinite(dot(whitened, whitened)) ? sensitivity : 0,
    selectivity: Math.sqrt(dot(net, net) / (dot(own, own) || 1)),
  };
}

function designOf(standards: PairStandards, model: PairModel): PairCalibration['design'] {
  const prepared = prepare(model, []);
  const rows = standards.rows.map(
    (row) => prepared.amounts(row.lower, row.higher, newAmounts(prepared.amountCount)).amount,
  );
  const columns = model.spectra.map((_, k) => Float64Array.from(rows, (row) => row[k]!));
  const { ratio, weakest } = conditionOfColumns(columns);
  return { condition: ratio, weak: inWords(standards, model, ratio, weakest) };
}

export const NO_WEAK_DIRECTION = 'no weak direction';
/** Condition of scaled amounts above which a direction is called weak. */
const WELL_CONDITIONED = 15;

function inWords(standards: PairStandards, model: PairModel, ratio: number, weakest: readonly number[]): string {
  const names = [...speciesOfPair(standards.pair).map(romanName), ...model.associations.map((a) => a.name)];
  const involved = names.filter((_, k) => Math.abs(weakest[k] ?? 0) > 0.4);
  const { share } = domainOf(standards);
  const higher = romanName(speciesOfPair(standards.pair)[1]);
  const gaps = [
    share[0] > 0.2 ? `no standard below ${Math.round(100 * share[0])} % ${higher}` : '',
    share[1] < 0.8 ? `no standard above ${Math.round(100 * share[1])} % ${higher}` : '',
  ].filter(Boolean);
  const telling =
    ratio > WELL_CONDITIONED ? `${involved.join(' and ')} are hard to tell apart with these compositions` : '';
  return [telling, ...gaps].filter(Boolean).join('; ') || NO_WEAK_DIRECTION;
}

const romanName = (species: Parameters<typeof oxidationNumber>[0]): string =>
  `V(${['II', 'III', 'IV', 'V'][oxidationNumber(species) - 2]})`;

/** For messages: `V(IV)/V(V)`. */
export const pairInWords = (pair: Pair): string => speciesOfPair(pair).map(romanName).join('/');
