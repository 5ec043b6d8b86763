// What        One pair of a calibration tried on one spectrum, and how well it fits compared with left-out standards.
// Equation    match = (ln(χ²/(1 + h)/ν) − m)/(d √(1 + 1/n)), m and d from left-out standards, h leverage of the calibration.
// Why so      The unnamed modes come from a limited number of standards, so χ² of a sound spectrum is not χ²-distributed; the standards that
//             were left out show how it is distributed.
// Valid for   calibrations with a validation; with one group left-out single standards serve.
// Units       standard deviations of ln(χ²/ν).
// Source      ours.
import type { Calibration, PairCalibration } from '../calibration/calibration.ts';
import { assumedPathUncertainty } from '../estimation/cuvette.ts';
import { foreignFaults, foreignSpectra } from '../estimation/foreign.ts';
import { cuvetteFaults, fittedCurve, scoreFaults, type FaultScore } from '../estimation/faults.ts';
import { namedModes } from '../estimation/namedModes.ts';
import { prepare, type Prepared } from '../estimation/prepare.ts';
import { reduce, solve, type CuvettePriors, type Solution } from '../estimation/solve.ts';
import { calibrationLeverage, concentrationCovariance, shareAndTotal } from '../estimation/uncertainty.ts';
import { resample } from '../spectrum/resample.ts';
import type { AssayOptions, Sample } from './sample.ts';

export interface PairFitOfSample {
  readonly pairCalibration: PairCalibration;
  readonly prepared: Prepared;
  readonly absorbance: Float64Array;
  readonly cuvette: CuvettePriors;
  readonly solution: Solution;
  readonly leverage: number;
  /** 1, or how many times darker than the darkest standard this spectrum is: what a model gets wrong grows with absorbance */
  readonly brightness: number;
  readonly share: number;
  readonly shareUncertainty: number;
  /** standard deviations above what left-out standards show */
  readonly match: number;
  readonly faults: readonly FaultScore[];
  readonly masked: { readonly count: number; readonly of: number; readonly informationLeft: number };
}

/** @throws TankhueError `too-few-wavelengths` */
export function fitSampleByPair(
  sample: Sample,
  pathLength: number,
  calibration: Calibration,
  pairCalibration: PairCalibration,
  options: AssayOptions,
): PairFitOfSample {
  const { model } = pairCalibration;
  const curve = resample(sample.spectrum, model.wavelength, calibration.grid.step).absorbance;
  const usable = Array.from(curve, (value) => Number.isFinite(value) && value <= options.ceiling);
  const prepared = (options.prepare ?? prepare)(model, namedModes(model.wavelength, options.priors), usable);
  const absorbance = Float64Array.from(prepared.used, (i) => curve[i]!);
  const cuvette: CuvettePriors = {
    pathLength,
    pathUncertainty:
      sample.pathUncertainty === null ? assumedPathUncertainty(pathLength) : sample.pathUncertainty / pathLength,
    wavelengthUncertainty: options.priors.wavelengthShift,
  };
  const solution = solve(prepared, reduce(prepared, absorbance), cuvette);
  const leverage = calibrationLeverage(prepared, solution, pathLength);
  const found = shareAndTotal(solution.lower, solution.higher, concentrationCovariance(prepared, solution, pathLength));
  const fitted = fittedCurve(prepared, solution, pathLength).total;
  const brightness = Math.max(1, fitted.reduce((a, b) => Math.max(a, b), 0) / pairCalibration.domain.absorbance);
  const freedom = prepared.used.length - 2;
  const foreign = foreignSpectra(
    model,
    calibration.pairs.map((pair) => pair.model),
  );
  return {
    pairCalibration,
    prepared,
    absorbance,
    cuvette,
    solution,
    leverage,
    brightness,
    share: found.share,
    shareUncertainty: found.shareUncertainty * brightness,
    match: matchOf(pairCalibration, solution.chiSquare / (brightness ** 2 * (1 + leverage)) / freedom),
    faults: scoreFaults(prepared, absorbance, solution, cuvette, [
      ...cuvetteFaults(prepared, fitted),
      ...foreignFaults(prepared, pathLength, foreign),
    ]),
    masked: {
      count: usable.filter((value) => !value).length,
      of: usable.length,
      informationLeft: informationLeft(prepared, usable),
    },
  };
}

/** @param reducedChiSquare per degree of freedom, calibration's share and brightness taken out */
export function matchOf({ match: { mean, deviation, count } }: PairCalibration, reducedChiSquare: number): number {
  return (Math.log(reducedChiSquare) - mean) / (Math.max(deviation, 0.3) * Math.sqrt(1 + 1 / Math.max(1, count)));
}

/** Part of the squared difference between the two species' spectra that lies on wavelengths still in use. */
function informationLeft(prepared: Prepared, usable: readonly boolean[]): number {
  const [lower, higher] = prepared.model.spectra as [Float64Array, Float64Array];
  let all = 0;
  let left = 0;
  usable.forEach((flag, i) => {
    const weight = (lower[i]! - higher[i]!) ** 2;
    all += weight;
    if (flag) left += weight;
  });
  return left / all;
}

/** Scores in units of what left-out standards showed. */
export const scaledScore = (fit: PairFitOfSample, fault: FaultScore): number =>
  fault.score / (fit.brightness * Math.sqrt(1 + fit.leverage)) / (fit.pairCalibration.faultScales[fault.name] ?? 1);
