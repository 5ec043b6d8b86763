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

/** Points of one spectrum as they stand in a file. */
export interface MeasuredPoints {
  readonly name: string;
  /** in the file's order and `axisUnit` */
  readonly axis: Float64Array;
  /** in `unit`; NaN where the file has no value */
  readonly values: Float64Array;
  readonly axisUnit: AxisUnit;
  readonly unit: OrdinateUnit;
  readonly overRange: number;
  readonly missing: number;
  readonly origin: SpectrumOrigin;
  /** `file:line:column` of a point */
  readonly whereOf: (point: number) => string;
}

function requireOneWay(points: MeasuredPoints): 'rising' | 'falling' {
  const { axis, axisUnit, whereOf } = points;
  const sign = Math.sign(axis[axis.length - 1]! - axis[0]!) || 1;
  for (let i = 0; i < axis.length; i++) {
    if (!(axis[i]! > 0))
      throw new TankhueError(
        'axis-value',
        `expected an axis in ${axisUnit} above 0; received ${axis[i]}`,
        whereOf(i),
        'check that the first column holds the wavelengths',
      );
    if (i > 0 && !((axis[i]! - axis[i - 1]!) * sign > 0)) {
      const twice = axis[i] === axis[i - 1];
      throw new TankhueError(
        twice ? 'axis-repeats' : 'axis-turns',
        `expected an axis in ${axisUnit} that only rises or only falls; received ${[...axis.subarray(Math.max(0, i - 2), i + 1)].join(', ')}`,
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
 * Our spectrum (nm rising, absorbance, NaN where there is no value) from points of a file.
 * @throws TankhueError `points-missing`, `axis-value`, `axis-repeats`, `axis-turns`, `no-values`
 */
export function spectrumFromPoints(points: MeasuredPoints): { spectrum: Spectrum; understood: UnderstoodSpectrum } {
  const { name, axis, values, axisUnit, unit, overRange, missing, origin } = points;
  const count = axis.length;
  if (count < 2)
    throw new TankhueError(
      'points-missing',
      `expected two points or more; received ${count}`,
      points.whereOf(0),
      'export the whole scan, not one wavelength',
    );
  const direction = requireOneWay(points);
  const reversed = (direction === 'falling') !== (axisUnit === 'cm-1');
  const wavelength = new Float64Array(count);
  const absorbance = new Float64Array(count);
  let dark = 0;
  let known = 0;
  for (let i = 0; i < count; i++) {
    const from = reversed ? count - 1 - i : i;
    wavelength[i] = TO_NANOMETRES[axisUnit](axis[from]!);
    absorbance[i] = TO_ABSORBANCE[unit](values[from]!);
    if (Number.isNaN(absorbance[i])) dark += Number.isNaN(values[from]) ? 0 : 1;
    else known++;
  }
  if (known === 0)
    throw new TankhueError(
      'no-values',
      `expected values; received ${overRange} over range, ${missing} missing, ${dark} of transmittance 0 or below`,
      points.whereOf(0),
      'dilute the sample or use a thinner cell, and check that the shutter was open',
    );
  const spectrum = makeSpectrum(name, wavelength, absorbance, origin);
  return {
    spectrum,
    understood: {
      name,
      points: count,
      from: wavelength[0]!,
      to: wavelength[count - 1]!,
      step: medianStep(wavelength),
      direction,
      axisUnit,
      unit,
      overRange,
      missing,
      noLight: dark,
    },
  };
}
