import type { AssayNumbers, AssayResult, AssayState, ErrorSource, FitRecord } from './result.ts';
import { bySeverity, type Finding } from '../finding.ts';
import type { Calibration } from '../calibration/calibration.ts';
import { PAIR_OF_SIDE, speciesOfPair, type Pair } from '../electrolyte/species.ts';
import { DEFAULT_CEILING } from '../estimation/cuvette.ts';
import { fittedCurve } from '../estimation/faults.ts';
import { DEFAULT_MODE_PRIORS } from '../estimation/namedModes.ts';
import { newAmounts } from '../electrolyte/forwardModel.ts';
import { dot } from '../numerics/gramSchmidt.ts';
import { millimetresFromCentimetres } from '../units.ts';
import { choosePair } from './choosePair.ts';
import { errorSourcesOf, repeatabilityBeyond } from './errorSources.ts';
import { numbersOf, withoutValues } from './numbers.ts';
import { opticalFindings } from './opticalFindings.ts';
import { fitSampleByPair, type PairFitOfSample } from './pairFit.ts';
import { ASSUMED_DILUTION_UNCERTAINTY, type AssayOptions, type Sample } from './sample.ts';
import { domainFindings, labelFindings, sheetFindings, uncertaintyFindings } from './sampleFindings.ts';

export const DEFAULT_ASSAY_OPTIONS: AssayOptions = {
  priors: DEFAULT_MODE_PRIORS,
  ceiling: DEFAULT_CEILING,
  keepCurves: true,
};

/** A calibration with the hash of its file: results name what they rest on. */
export interface CalibrationInUse {
  readonly calibration: Calibration;
  readonly sha256: string;
  /** the shipped one: of unknown acid and temperature, so that no result is better than `caution` */
  readonly isReference: boolean;
}

/**
 * Composition of one cuvette with its uncertainty, and every doubt about it. Never throws for a doubtful spectrum: what cannot be
 * answered is withheld with its reason.
 * @throws TankhueError `too-few-wavelengths` when the spectrum lacks the calibration's range altogether
 */
export function assaySample(
  sample: Sample,
  inUse: CalibrationInUse,
  options: AssayOptions = DEFAULT_ASSAY_OPTIONS,
): AssayResult {
  const { calibration } = inUse;
  const assumed: string[] = [];
  const own = PAIR_OF_SIDE[sample.side];
  const pathLength = sample.pathLength ?? pathOfStandards(calibration, own);
  const dilution = sample.dilution ?? 1;
  if (sample.pathLength === null)
    assumed.push(`path ${millimetresFromCentimetres(pathLength)} mm, that of the standards`);
  if (sample.dilution === null) assumed.push('undiluted');
  const fits = calibration.pairs.map((pair) => fitSampleByPair(sample, pathLength, calibration, pair, options));
  const choice = choosePair(own, fits);
  const fit = choice.chosen;
  const { pair } = fit.pairCalibration;
  if (sample.pathUncertainty === null)
    assumed.push(`path known to ${(100 * fit.cuvette.pathUncertainty).toFixed(1)} % (common practice, no source)`);
  if (dilution !== 1 && sample.dilutionUncertainty === null)
    assumed.push(`dilution known to ${100 * ASSUMED_DILUTION_UNCERTAINTY} % (common practice, no source)`);
  if (sample.temperature === null) assumed.push('temperature of the standards');

  const spectral = errorSourcesOf(fit, sample, dilution, `${inUse.sha256.slice(0, 12)}:${pair}`);
  const sources = options.precision
    ? [...spectral, ...repeatabilityBeyond(spectral, fit, sample, dilution, options.precision)]
    : spectral;
  const { numbers, correlation, budget } = numbersOf(
    sample.side,
    pair,
    fit.solution.lower * dilution,
    fit.solution.higher * dilution,
    sources,
    (source) => freedomOf(source, fit),
  );
  const findings = [
    ...labelFindings(sample, choice),
    ...opticalFindings(fit, numbers.averageOxidationState.uncertainty!),
    ...domainFindings(fit, numbers.averageOxidationState.uncertainty!),
    ...uncertaintyFindings(fit, numbers.averageOxidationState.uncertainty!),
    ...sheetFindings(sample, calibration, offsetOf(fit)),
    ...referenceFindings(inUse),
  ].sort(bySeverity);
  return {
    sample: sample.name,
    system: sample.system,
    side: sample.side,
    pair,
    ...reported(numbers, sample, pair, findings),
    correlation,
    errorSources: sources,
    budget,
    fit: fitRecord(fit, options.keepCurves, dilution),
    findings,
    assumed,
    pathLength,
    dilution,
    input: sample.spectrum.origin,
  };
}

/** Path of the standards of the side's own pair, else of any. */
function pathOfStandards(calibration: Calibration, own: Pair): number {
  const pair = calibration.pairs.find((candidate) => candidate.pair === own) ?? calibration.pairs[0]!;
  return pair.domain.path[0];
}

const freedomOf = (source: ErrorSource, fit: PairFitOfSample): number =>
  source.source.startsWith('between') ? fit.pairCalibration.betweenGroup.freedom : Infinity;

const offsetOf = (fit: PairFitOfSample): number => fit.faults.find((fault) => fault.name === 'offset')?.amplitude ?? 0;

export const referenceFindings = (inUse: CalibrationInUse): Finding[] =>
  inUse.isReference
    ? [
        {
          code: 'reference-calibration',
          severity: 'caution',
          message:
            'the shipped reference calibration was used: its acid and temperature are not those of your electrolyte',
          hint: 'good for a first look; make a calibration from standards of your own electrolyte',
        },
      ]
    : [];

/** Decides what may be reported: all, the state of charge without amounts, or nothing; the rest is kept aside. */
function reported(
  numbers: AssayNumbers,
  sample: Sample,
  pair: Pair,
  findings: readonly Finding[],
): AssayNumbers & { state: AssayState; unreported?: AssayNumbers } {
  const withheld = findings.some((one) => one.severity === 'withhold');
  const scaleUnknown = sample.pathLength === null || sample.dilution === null;
  if (withheld || (scaleUnknown && pair === 'V4/V5'))
    return { ...withoutValues(numbers), state: 'withheld', unreported: numbers };
  const state: AssayState = findings.some((one) => one.severity === 'caution') ? 'caution' : 'sound';
  if (!scaleUnknown) return { ...numbers, state };
  const { concentration, totalVanadium } = withoutValues(numbers);
  return { ...numbers, concentration, totalVanadium, state, unreported: numbers };
}

function fitRecord(fit: PairFitOfSample, keepCurve: boolean, dilution: number): FitRecord {
  const { prepared, solution, absorbance, cuvette } = fit;
  const curve = fittedCurve(prepared, solution, cuvette.pathLength);
  const residual = absorbance.map((value, l) => value - curve.total[l]!);
  const amplitudes = Object.fromEntries(fit.faults.map((fault) => [fault.name, fault]));
  return {
    residualRms: Math.sqrt(dot(residual, residual) / residual.length),
    chiSquare: solution.chiSquare,
    degreesOfFreedom: prepared.used.length - 2,
    match: fit.match,
    wavelengthShift: solution.wavelengthShift,
    offset: amplitudes['offset']?.amplitude ?? null,
    modes: fit.faults.map((fault) => ({
      name: fault.name,
      amplitude: fault.amplitude,
      unit: fault.unit,
      inPriorUnits: fault.score,
    })),
    ...(keepCurve ? { curve: curveOf(fit, curve), tank: tankSpectrum(fit, dilution) } : {}),
  };
}

function curveOf(fit: PairFitOfSample, curve: ReturnType<typeof fittedCurve>): NonNullable<FitRecord['curve']> {
  const { prepared, absorbance } = fit;
  const { model } = prepared;
  const names = [...speciesOfPair(model.pair), ...model.associations.map((association) => association.name)];
  const variance = Float64Array.from(prepared.used, () => model.noise * model.noise);
  for (const mode of model.modes) prepared.used.forEach((i, l) => (variance[l]! += mode[i]! ** 2));
  return {
    wavelength: Array.from(prepared.used, (i) => model.wavelength[i]!),
    measured: Array.from(absorbance),
    fitted: Array.from(curve.total),
    shares: Object.fromEntries(names.map((name, k) => [name, Array.from(curve.shares[k]!)])),
    residualUncertainty: Array.from(variance, Math.sqrt),
  };
}

/** The tank as it is: at its own concentration more of a complex is bound than in a diluted cuvette. */
function tankSpectrum({ prepared, solution }: PairFitOfSample, dilution: number): NonNullable<FitRecord['tank']> {
  const { model } = prepared;
  const { amount } = prepared.amounts(
    Math.max(0, solution.lower * dilution),
    Math.max(0, solution.higher * dilution),
    newAmounts(prepared.amountCount),
  );
  return {
    wavelength: Array.from(model.wavelength),
    absorbancePerCentimetre: Array.from(model.wavelength, (_, i) =>
      model.spectra.reduce((sum, spectrum, k) => sum + amount[k]! * spectrum[i]!, 0),
    ),
  };
}
