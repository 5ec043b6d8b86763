import type { InstrumentRecord } from '../../assay/instrumentRecord.ts';
import { DEFAULT_CEILING } from '../../estimation/cuvette.ts';
import { DEFAULT_MODE_PRIORS } from '../../estimation/namedModes.ts';
import type { PhotometerTraits } from './cuvetteDesign.ts';

/** A photometer nobody checked: 0.5 mA of noise a point, points 1 nm apart, 0.05 % of stray light [common practice, no source]. */
const UNCHECKED = { noise: { constant: 0.0005, shot: 0, step: 1 }, strayLight: 0.0005 };

/** Native points, `step` nm apart, that fall into one point of a calibration's grid; at least one. */
export const pointsInGrid = (step: number, grid: Float64Array): number =>
  Math.max(1, Math.round((grid[1]! - grid[0]!) / step));

/**
 * What is known of a photometer, from its record where it has one; what was not measured is taken from common practice.
 * @param grid wavelengths of the calibration, nm
 * @param ceiling absorbance above which points are not used; the assay's own where not given
 */
export function photometerTraits(
  record: InstrumentRecord | null,
  grid: Float64Array,
  ceiling: number = DEFAULT_CEILING,
): PhotometerTraits {
  const { constant, shot, step } = record?.noise ?? UNCHECKED.noise;
  return {
    noise: { constant, shot: shot ?? 0 },
    pointsAveraged: pointsInGrid(step, grid),
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
