import type { Spectrum } from './spectrum.ts';

export interface Resampled {
  /** NaN where the spectrum does not reach or has no value */
  readonly absorbance: Float64Array;
  /** native points in each mean; 0 where interpolated or NaN */
  readonly count: Int32Array;
}

/**
 * Means over `width` nm centred on each target where native points fall inside, linear interpolation between neighbours where none do,
 * NaN beyond the ends or where a point needed has no value. Never extrapolates.
 */
export function resample(spectrum: Spectrum, target: Float64Array, width: number): Resampled {
  const { wavelength, absorbance } = spectrum;
  const out = new Float64Array(target.length).fill(NaN);
  const count = new Int32Array(target.length);
  let first = 0;
  for (let t = 0; t < target.length; t++) {
    const low = target[t]! - width / 2;
    const high = target[t]! + width / 2;
    while (first < wavelength.length && wavelength[first]! < low) first++;
    let sum = 0;
    let i = first;
    for (; i < wavelength.length && wavelength[i]! < high; i++) sum += absorbance[i]!;
    count[t] = i - first;
    if (i > first) {
      if (wavelength[0]! <= target[t]! && target[t]! <= wavelength[wavelength.length - 1]!) out[t] = sum / (i - first);
    } else if (i > 0 && i < wavelength.length) {
      const share = (target[t]! - wavelength[i - 1]!) / (wavelength[i]! - wavelength[i - 1]!);
      out[t] = absorbance[i - 1]! * (1 - share) + absorbance[i]! * share;
    }
  }
  return { absorbance: out, count };
}
