import { TankhueError } from '../errors.ts';
import { resample } from './resample.ts';
import type { Spectrum } from './spectrum.ts';

export interface BlankSubtracted {
  readonly spectrum: Spectrum;
  /** points that had a value before and have none now, because the blank has none there */
  readonly lost: number;
}

const valued = ({ absorbance }: Pick<Spectrum, 'absorbance'>): number =>
  absorbance.reduce((count, value) => count + (Number.isNaN(value) ? 0 : 1), 0);

/**
 * Sample minus blank. A blank on another axis is brought onto the sample's by `resample`, as wide as the sample's own pitch; where the
 * blank does not reach or has no value, the result has none.
 * @throws TankhueError `blank-apart` where nothing is left
 */
export function subtractBlank(sample: Spectrum, blank: Spectrum): BlankSubtracted {
  const { wavelength } = sample;
  const pitch = (wavelength.at(-1)! - wavelength[0]!) / (wavelength.length - 1);
  const reference = resample(blank, wavelength, pitch).absorbance;
  const absorbance = sample.absorbance.map((value, i) => value - reference[i]!);
  const left = valued({ absorbance });
  if (left === 0)
    throw new TankhueError(
      'blank-apart',
      `expected a blank over ${wavelength[0]} to ${wavelength.at(-1)} nm; received one over ${blank.wavelength[0]} to ${blank.wavelength.at(-1)} nm`,
      blank.origin.file || blank.name,
      'scan the blank over the range of the sample',
    );
  return { spectrum: { ...sample, absorbance }, lost: valued(sample) - left };
}
