import { seededRandom } from '../../src/numerics/random.ts';
import { makeSpectrum, type Spectrum } from '../../src/spectrum/spectrum.ts';

/** Normal deviates from a seed. */
export const normalDeviates = (seed: number): (() => number) => seededRandom(seed).normal;

/** A scan of a known law of absorbance, in equal steps, nm. */
export function scan(name: string, from: number, to: number, step: number, law: (nm: number) => number): Spectrum {
  const count = Math.round((to - from) / step) + 1;
  const wavelength = Float64Array.from({ length: count }, (_, i) => from + i * step);
  return makeSpectrum(name, wavelength, wavelength.map(law), { file: `${name}.csv`, column: '', sha256: '' });
}
