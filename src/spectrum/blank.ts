import { TankhueError } from '../errors.ts';
import { resample } from './resample.ts';
import type { Spectrum } from './spectrum.ts';

/**
 * Sample minus blank. A blank on another axis is brought onto the sample's by means over the sample's own spacing, or by interpolation
 * where it is coarser; where the blank does not reach, the result has no value.
 * @throws TankhueError `blank-apart` where the two do not overlap at all
 */
export function subtractBlank(sample: Spectrum, blank: Spectrum): Spectrum {
  const { wavelength } = sample;
  const spacing = (wavelength.at(-1)! - wavelength[0]!) / (wavelength.length - 1);
  const reference = resample(blank, wavelength, spacing).absorbance;
  const absorbance = sample.absorbance.map((value, i) => value - reference[i]!);
  if (!absorbance.some(Number.isFinite))
    throw new TankhueError(
      'blank-apart',
      `expected a blank over ${wavelength[0]} to ${wavelength.at(-1)} nm; received one over ${blank.wavelength[0]} to ${blank.wavelength.at(-1)} nm`,
      blank.origin.file || blank.name,
      'scan the blank over the range of the sample',
    );
  return { ...sample, absorbance };
}
