import { TankhueError } from '../errors.ts';

/** One measured curve: decadic absorbance (unit 1) against wavelength (nm), strictly ascending. NaN marks a point that carries no value. */
export interface Spectrum {
  readonly name: string;
  readonly wavelength: Float64Array;
  readonly absorbance: Float64Array;
  readonly origin: SpectrumOrigin;
}

/** Where a curve came from: file name as given, column name, SHA-256 of the file's bytes (empty where there is no file). */
export interface SpectrumOrigin {
  readonly file: string;
  readonly column: string;
  readonly sha256: string;
}

export const NO_ORIGIN: SpectrumOrigin = { file: '', column: '', sha256: '' };

/**
 * @param wavelength nm, strictly ascending, finite, two or more
 * @param absorbance decadic, same length, NaN where unknown
 * @throws TankhueError `axis-turns`, `not-finite`, `length-differs`, `points-missing`
 */
export function makeSpectrum(
  name: string,
  wavelength: Float64Array,
  absorbance: Float64Array,
  origin: SpectrumOrigin = NO_ORIGIN,
): Spectrum {
  if (wavelength.length !== absorbance.length)
    throw new TankhueError(
      'length-differs',
      `expected as many absorbances as wavelengths (${wavelength.length}); received ${absorbance.length}`,
      `spectrum ${name}`,
      'export the spectrum again',
    );
  if (wavelength.length < 2)
    throw new TankhueError(
      'points-missing',
      `expected two points or more; received ${wavelength.length}`,
      `spectrum ${name}`,
      'scan from the violet to the near infrared',
    );
  for (let i = 0; i < wavelength.length; i++) {
    if (!Number.isFinite(wavelength[i]))
      throw new TankhueError(
        'not-finite',
        `expected a finite wavelength in nm; received ${wavelength[i]}`,
        `spectrum ${name}, point ${i + 1}`,
        'export the spectrum again',
      );
    if (i > 0 && !(wavelength[i]! > wavelength[i - 1]!))
      throw new TankhueError(
        'axis-turns',
        `expected wavelengths in nm that only rise; received ${wavelength[i - 1]}, ${wavelength[i]}`,
        `spectrum ${name}, point ${i + 1}`,
        'sort the points, or pass the two scans as two spectra',
      );
  }
  return { name, wavelength, absorbance, origin };
}
