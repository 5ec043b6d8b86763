// What        What a photometer as found means for vanadium assays: the error of each fault in points of state of charge.
// Equation    each measured fault as a disturbance of the spectrum of three usual samples, through `disturbanceEffect.ts`.
// Why so      limits of a pharmacopoeia are not made for vanadium; what counts is what reaches the answer.
// Valid for   1.6 mol/L at 50 %: negative in 1 mm, positive in 0.1 mm, composite in 0.5 mm, undiluted, assayed with the usual priors.
// Units       state of charge 1, total vanadium relative; magnitudes, k = 1.
// Source      ours; usual samples: common practice, no source.
import type { InstrumentConsequence, InstrumentRecord } from '../../assay/instrumentRecord.ts';
import { PAIR_OF_SIDE, type Side } from '../../electrolyte/species.ts';
import { DEFAULT_CEILING } from '../../estimation/cuvette.ts';
import { DEFAULT_MODE_PRIORS } from '../../estimation/namedModes.ts';
import { shiftedByOneNanometre } from '../../estimation/prepare.ts';
import { designCuvette, type PhotometerTraits } from '../planning/cuvetteDesign.ts';
import { disturbanceEffect, noiseEffect } from '../planning/disturbanceEffect.ts';
import type { MeasurementModel } from '../planning/measurementModel.ts';
import { pointsInGrid } from '../planning/photometerTraits.ts';

const TOTAL = 1.6;
const USUAL: readonly { readonly side: Side; readonly pathLength: number }[] = [
  { side: 'negative', pathLength: 0.1 },
  { side: 'positive', pathLength: 0.01 },
  { side: 'composite', pathLength: 0.05 },
];

/** One for each usual sample whose pair is among the models. */
export function instrumentConsequences(
  record: InstrumentRecord,
  models: readonly MeasurementModel[],
): InstrumentConsequence[] {
  return USUAL.flatMap(({ side, pathLength }) => {
    const model = models.find(({ pair }) => pair === PAIR_OF_SIDE[side]);
    return model ? [consequenceFor(record, model, side, pathLength)] : [];
  });
}

function consequenceFor(
  record: InstrumentRecord,
  model: MeasurementModel,
  side: Side,
  pathLength: number,
): InstrumentConsequence {
  const half = TOTAL / 2;
  const cuvette = { lower: half, higher: half, pathLength, pathUncertainty: 0, fillingScatter: 0 };
  const unaware: PhotometerTraits = {
    noise: { constant: 0, shot: 0 },
    pointsAveraged: 1,
    strayLight: 0,
    priors: DEFAULT_MODE_PRIORS,
    ceiling: DEFAULT_CEILING,
  };
  const design = designCuvette(model, cuvette, unaware);
  const { absorbance } = design;
  const lines = faultsOf(record, absorbance, model.wavelength).flatMap(({ source, shape }) => {
    const effect = disturbanceEffect(design, half, half, shape);
    return effect ? [{ source, stateOfCharge: Math.abs(effect.share), totalVanadium: Math.abs(effect.total) }] : [];
  });
  const noise =
    record.noise && noiseEffect(design, half, half, photometerVariance(record.noise, absorbance, model.wavelength));
  return {
    sample: `${side}, 50 %, ${TOTAL} mol/L, ${10 * pathLength} mm`,
    lines: [
      ...lines,
      ...(noise ? [{ source: 'noise', stateOfCharge: noise.share, totalVanadium: noise.total }] : []),
    ].sort((a, b) => b.stateOfCharge - a.stateOfCharge),
  };
}

/** Of one grid point: the mean of the native points that fall into it. */
function photometerVariance(
  { constant, shot, step }: NonNullable<InstrumentRecord['noise']>,
  absorbance: Float64Array,
  wavelength: Float64Array,
): Float64Array {
  const averaged = pointsInGrid(step, wavelength);
  return absorbance.map((A) => (constant ** 2 + (shot ?? 0) ** 2 * 10 ** A) / averaged);
}

function faultsOf(
  record: InstrumentRecord,
  absorbance: Float64Array,
  wavelength: Float64Array,
): { source: string; shape: Float64Array }[] {
  const faults: { source: string; shape: Float64Array }[] = [];
  const { wavelengthShift, strayLight, photometricScale, offsetPrior, slopePrior } = record;
  if (wavelengthShift) {
    const size = Math.hypot(wavelengthShift.value, wavelengthShift.uncertainty);
    faults.push({
      source: 'wavelength axis',
      shape: shiftedByOneNanometre(wavelength, absorbance).map((value) => value * size),
    });
  }
  if (strayLight) {
    const s = strayLight.value;
    faults.push({
      source: 'stray light',
      shape: absorbance.map((A) => -Math.log10((10 ** -A + s) / (1 + s)) - A),
    });
  }
  if (photometricScale) {
    const size = Math.hypot(photometricScale.value, photometricScale.uncertainty);
    faults.push({ source: 'absorbance scale', shape: absorbance.map((A) => A * size) });
  }
  if (offsetPrior !== null) faults.push({ source: 'baseline offset', shape: absorbance.map(() => offsetPrior) });
  if (slopePrior !== null) {
    const middle = (wavelength[0]! + wavelength[wavelength.length - 1]!) / 2;
    faults.push({ source: 'baseline slope', shape: wavelength.map((nm) => (slopePrior * (nm - middle)) / 100) });
  }
  return faults;
}
