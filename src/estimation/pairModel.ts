import type { Association } from '../electrolyte/association.ts';
import type { Pair } from '../electrolyte/species.ts';

/**
 * What an estimate needs to know of a pair: spectra of everything that absorbs, and how measured spectra differ from them.
 * All arrays lie on `wavelength` (nm, ascending).
 */
export interface PairModel {
  readonly pair: Pair;
  readonly wavelength: Float64Array;
  readonly associations: readonly Association[];
  /** lower species, higher species, then one per association; L/(mol·cm), L²/(mol²·cm) in the weak limit */
  readonly spectra: readonly Float64Array[];
  /** standard deviation of what is independent from point to point, absorbance */
  readonly noise: number;
  /** unnamed systematic directions, each of one standard deviation, absorbance */
  readonly modes: readonly Float64Array[];
  /** (FᵀF)⁻¹ of the standards' amounts × path, row-major: the calibration's own share of a prediction's covariance */
  readonly designInverse: Float64Array;
}

/** A named systematic direction: amplitude × shape is an absorbance. */
export interface NamedMode {
  readonly name: string;
  readonly unit: string;
  /** prior standard deviation of the amplitude, in `unit` */
  readonly prior: number;
  /** absorbance per unit of amplitude, on the model's axis */
  readonly shape: Float64Array;
}
