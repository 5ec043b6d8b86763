import type { Side } from '../electrolyte/species.ts';
import type { ModePriors } from '../estimation/namedModes.ts';
import type { prepare } from '../estimation/prepare.ts';
import type { Spectrum } from '../spectrum/spectrum.ts';

/** How the blank came to be subtracted: `given` from a file, `instrument` as the standards were, `missing` where one was asked for and not named. */
export type BlankState = 'given' | 'instrument' | 'missing';

/** A cuvette and what is known about it. Null means nobody said. */
export interface Sample {
  readonly name: string;
  readonly system: string;
  readonly side: Side;
  /** blank already subtracted */
  readonly spectrum: Spectrum;
  readonly blank: BlankState;
  /** cm */
  readonly pathLength: number | null;
  /** cm */
  readonly pathUncertainty: number | null;
  /** ≥ 1 */
  readonly dilution: number | null;
  /** relative */
  readonly dilutionUncertainty: number | null;
  /** K */
  readonly temperature: number | null;
  /** mol/L */
  readonly acid: number | null;
  /** ms since 1970, when it was drawn and scanned */
  readonly takenAt: number | null;
  readonly scannedAt: number | null;
  readonly inertGas: boolean | null;
  /** the physical cell and flask, so that errors they share between samples stay shared */
  readonly cell: string | null;
  readonly flask: string | null;
}

/** What belongs to the instrument and not to one sample. */
export interface AssayOptions {
  readonly priors: ModePriors;
  /** absorbance above which points are masked */
  readonly ceiling: number;
  /** keep curves for drawing in the result */
  readonly keepCurves: boolean;
  /** what repeated fillings scatter: state of charge (1) and total vanadium (relative), standard deviations; absent where not measured */
  readonly precision?: { readonly stateOfCharge: number; readonly totalVanadium: number };
  /** another `prepare`, for who assays many spectra on one axis and keeps the preparations; must give the same */
  readonly prepare?: typeof prepare;
}

/** Relative uncertainty of a dilution of unstated uncertainty: class A glassware with care (common practice, no source). */
export const ASSUMED_DILUTION_UNCERTAINTY = 0.003;
