import { TankhueError } from '../errors.ts';
import type { Spectrum } from '../spectrum/spectrum.ts';
import type { Grid } from './calibration.ts';

/**
 * Range used unless asked otherwise, nm: below 430 V(V) is dark and stray light rules, above 950 water and detector edges do
 * (common practice, no source; published spectra of 99 standards agree).
 */
const USUAL_FROM = 430;
const USUAL_TO = 950;
/** nm: below the width of every vanadium band, above the optical bandwidth of common instruments */
const USUAL_STEP = 5;

/**
 * The grid of means that all spectra reach, within the usual range unless `wanted` says otherwise.
 * @throws TankhueError `ranges-apart`, `axis-outside`
 */
export function commonGrid(spectra: readonly Spectrum[], wanted: Partial<Grid>): Grid {
  const start = Math.max(...spectra.map((spectrum) => spectrum.wavelength[0]!));
  const end = Math.min(...spectra.map((spectrum) => spectrum.wavelength.at(-1)!));
  const step = wanted.step ?? USUAL_STEP;
  const from = wanted.from ?? Math.max(USUAL_FROM, Math.ceil(start / step) * step);
  const to = wanted.to ?? Math.min(USUAL_TO, Math.floor(end / step) * step);
  if (!(to - from >= 20 * step))
    throw new TankhueError(
      'ranges-apart',
      `expected a range of at least ${20 * step} nm that every standard covers; received ${from} to ${to} nm`,
      'standards sheet',
      'scan all standards over one range, 430 to 950 nm if the instrument can',
    );
  if (from < start - step / 2 || to > end + step / 2)
    throw new TankhueError(
      'axis-outside',
      `expected a range inside ${start} to ${end} nm, which every standard covers; received ${from} to ${to} nm`,
      '--from, --to',
      'ask for less, nothing is extrapolated',
    );
  return { from, to: from + Math.floor((to - from) / step + 1e-9) * step, step };
}

/** Grid points, nm. */
export const wavelengthsOf = (grid: Grid): Float64Array =>
  Float64Array.from({ length: Math.round((grid.to - grid.from) / grid.step) + 1 }, (_, i) => grid.from + i * grid.step);
