import type { InstrumentRecord } from '../../assay/instrumentRecord.ts';
import { DEFAULT_CEILING } from '../../estimation/cuvette.ts';
import { DEFAULT_MODE_PRIORS } from '../../estimation/namedModes.ts';
import type { PhotometerTraits } from './cuvetteDesign.ts';

/** A photometer nobody checked: 0.5 mA of noise a point, 0.05 % of stray light, points 1 nm apart [common practice, no source]. */
const UNCHECKED = { noise: { constant: 0.0005, shot: 0 }, strayLight: 0.0005, pointsAveraged: 5 };

/**
 * What is known of a photometer, from its record where it has one; what was not measured is taken from common practice.
 * @param ceiling absorbance above which points are not used; the assay's own where not given
 */
export function photometerTraits(record: InstrumentRecord | null, ceiling: number = DEFAULT_CEILING): PhotometerTraits {
  return {
    noise: record?.noise ? { constant: record.noise.constant, shot: record.noise.shot ?? 0 } : UNCHECKED.noise,
    pointsAveraged: UNCHECKED.pointsAveraged,
    strayLight: record?.strayLight?.value ?? UNCHECKED.strayLight,
    priors: {
      ...DEFAULT_MODE_PRIORS,
      offset: record?.offsetPrior ?? DEFAULT_MODE_PRIORS.offset,
      slope: record?.slopePrior ?? DEFAULT_MODE_PRIORS.slope,
      wavelengthShift: record?.wavelengthShift?.uncertainty ?? DEFAULT_MODE_PRIORS.wavelengthShift,
    },
    ceiling,
  };
}
