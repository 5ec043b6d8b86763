import { uniformFloat64 } from 'pure-rand/distribution/uniformFloat64';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import { makeSpectrum, type Spectrum } from '../../src/spectrum/spectrum.ts';

/** Normal deviates from a seed (Box and Muller). */
export function normalDeviates(seed: number): () => number {
  const generator = xoroshiro128plus(seed);
  return () => {
    const radius = Math.sqrt(-2 * Math.log(1 - uniformFloat64(generator)));
    return radius * Math.cos(2 * Math.PI * uniformFloat64(generator));
  };
}

/** A scan of a known law of absorbance, in equal steps, nm. */
export function scan(name: string, from: number, to: number, step: number, law: (nm: number) => number): Spectrum {
  const count = Math.round((to - from) / step) + 1;
  const wavelength = Float64Array.from({ length: count }, (_, i) => from + i * step);
  return makeSpectrum(name, wavelength, wavelength.map(law), { file: `${name}.csv`, column: '', sha256: '' });
}
