// What        The systematic effects of a cuvette photometer that have a name, as directions in absorbance with priors.
// Equation    offset 1; slope (λ − λ̄)/100 nm; scatter (450/λ)⁴ and (450/λ)². Path, dilution and wavelength shift depend on the
//             composition and are unknowns of `solve` instead.
// Why so      A mode without a prior eats signal, one with too small a prior biases; these sizes are what a wiped cell and a fresh blank leave.
// Valid for   blank-corrected spectra.
// Units       absorbance; prior in the unit stated.
// Source      common practice, no source (sizes); λ⁻⁴ Rayleigh scattering.
import type { NamedMode } from './pairModel.ts';

/** Prior standard deviations; an instrument record or a sheet may replace them. */
export interface ModePriors {
  /** absorbance */
  readonly offset: number;
  /** absorbance per 100 nm */
  readonly slope: number;
  /** absorbance at 450 nm */
  readonly scatter: number;
  /** nm */
  readonly wavelengthShift: number;
}

export const DEFAULT_MODE_PRIORS: ModePriors = { offset: 0.001, slope: 0.0005, scatter: 0.001, wavelengthShift: 0.1 };

/** Offset, slope and the two scatter laws on an axis in nm. */
export function namedModes(wavelength: Float64Array, priors: ModePriors): NamedMode[] {
  const middle = (wavelength[0]! + wavelength[wavelength.length - 1]!) / 2;
  return [
    { name: 'offset', unit: 'A', prior: priors.offset, shape: wavelength.map(() => 1) },
    { name: 'slope', unit: 'A/100 nm', prior: priors.slope, shape: wavelength.map((nm) => (nm - middle) / 100) },
    {
      name: 'fine scatter',
      unit: 'A at 450 nm',
      prior: priors.scatter,
      shape: wavelength.map((nm) => (450 / nm) ** 4),
    },
    {
      name: 'coarse scatter',
      unit: 'A at 450 nm',
      prior: priors.scatter,
      shape: wavelength.map((nm) => (450 / nm) ** 2),
    },
  ];
}
