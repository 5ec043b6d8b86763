import { TankhueError } from '../errors.ts';
import { makeSpectrum, type Spectrum, type SpectrumOrigin } from '../spectrum/spectrum.ts';
import {
  absorbanceFromMilliabsorbance,
  absorbanceFromPercentTransmittance,
  absorbanceFromTransmittance,
  nanometresFromMicrometres,
  nanometresFromWavenumber,
} from '../units.ts';
import type { AxisUnit, OrdinateUnit } from './readOptions.ts';
import type { UnderstoodSpectrum } from './understood.ts';

const same = (value: number): number => value;

const TO_NANOMETRES: Readonly<Record<AxisUnit, (value: number) => number>> = {
  nm: same,
  'cm-1': nanometresFromWavenumber,
  um: nanometresFromMicrometres,
};

const TO_ABSORBANCE: Readonly<Record<OrdinateUnit, (value: number) => number>> = {
  A: same,
  mA: absorbanceFromMilliabsorbance,
  '%T': absorbanceFromPercentTransmittance,
  T: absorbanceFromTransmittance,
};

export const toAbsorbance = (unit: OrdinateUnit): ((value: number) => number) => TO_ABSORBANCE[unit];

/** An axis as it stands in a file, and as we use it. Spectra on one axis share it. */
export interface MeasuredAxis {
  readonly unit: AxisUnit;
  /** the order of the file */
  readonly direction: 'rising' | 'falling';
  /** nm, rising */
  readonly wavelength: Float64Array;
  /** the file's order is the other way round than `wavelength` */
  readonly isReversed: boolean;
  /** nm, median distance of neighbours */
  readonly step: number;
}

function directionOf(axis: Float64Array, unit: AxisUnit, whereOf: (point: number) => string): 'rising' | 'falling' {
  const sign = Math.sign(axis[axis.length - 1]! - axis[0]!) || 1;
  for (let i = 0; i < axis.length; i++) {
    if (!(axis[i]! > 0))
      throw new TankhueError(
        'axis-value',
        `expected an axis in ${unit} above 0; received ${axis[i]}`,
        whereOf(i),
        'check that the first column holds the wavelengths',
      );
    if (i > 0 && !((axis[i]! - axis[i - 1]!) * sign > 0)) {
      const twice = axis[i] === axis[i - 1];
      throw new TankhueError(
        twice ? 'axis-repeats' : 'axis-turns',
        `expected an axis in ${unit} that only rises or only falls; received ${[...axis.subarray(Math.max(0, i - 2), i + 1)].join(', ')}`,
        whereOf(i),
        twice
          ? 'keep one of the points with the same wavelength'
          : 'sort the points, or pass the two scans as two files',
      );
    }
  }
  return sign > 0 ? 'rising' : 'falling';
}

function medianStep(wavelength: Float64Array): number {
  const steps = Float64Array.from(
    { length: wavelength.length - 1 },
    (_, i) => wavelength[i + 1]! - wavelength[i]!,
  ).sort();
  const middle = steps.length >> 1;
  return steps.length % 2 === 1 ? steps[middle]! : (steps[middle - 1]! + steps[middle]!) / 2;
}

/**
 * @param axis in the file's order and unit
 * @param whereOf `file:line:column` of a point
 * @throws TankhueError `points-missing`, `axis-value`, `axis-repeats`, `axis-turns`
 */
export function measuredAxis(axis: Float64Array, unit: AxisUnit, whereOf: (point: number) => string): MeasuredAxis {
  if (axis.length < 2)
    throw new TankhueError(
      'points-missing',
      `expected two points or more; received ${axis.length}`,
      whereOf(0),
      'export the whole scan, not one wavelength',
    );
  const direction = directionOf(axis, unit, whereOf);
  const isReversed = (direction === 'falling') !== (unit === 'cm-1');
  const wavelength = axis.map(TO_NANOMETRES[unit]);
  if (isReversed) wavelength.reverse();
  return { unit, direction, wavelength, isReversed, step: medianStep(wavelength) };
}

/** Values of one spectrum as they stand in a file. */
export interface MeasuredValues {
  readonly name: string;
  /** in the file's order and `unit`; NaN where the file has none */
  readonly values: Float64Array;
  readonly unit: OrdinateUnit;
  /** how many of those without a value were marked as over range */
  readonly overRange: number;
  readonly origin: SpectrumOrigin;
}

const countNaN = (values: Float64Array): number => {
  let count = 0;
  for (let i = 0; i < values.length; i++) if (Number.isNaN(values[i])) count++;
  return count;
};

/** Our spectrum (nm rising, absorbance, NaN where there is no value) from values of a file. */
export function measuredSpectrum(
  axis: MeasuredAxis,
  { name, values, unit, overRange, origin }: MeasuredValues,
): { spectrum: Spectrum; understood: UnderstoodSpectrum } {
  const { wavelength } = axis;
  const absorbance = unit === 'A' ? values.slice() : values.map(TO_ABSORBANCE[unit]);
  if (axis.isReversed) absorbance.reverse();
  const unknown = countNaN(values);
  const missing = unknown - overRange;
  const noLight = unit === 'A' ? 0 : countNaN(absorbance) - unknown;
  return {
    spectrum: makeSpectrum(name, wavelength, absorbance, origin),
    understood: {
      name,
      points: wavelength.length,
      from: wavelength[0]!,
      to: wavelength.at(-1)!,
      step: axis.step,
      direction: axis.direction,
      axisUnit: axis.unit,
      unit,
      overRange,
      missing,
      noLight,
    },
  };
}
