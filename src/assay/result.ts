import type { Pair, Side, Species } from '../electrolyte/species.ts';
import type { Finding } from '../finding.ts';

export type { Finding, Severity } from '../finding.ts';

// What an assay says. These are the shapes of `tankhue/assay/1`: fields may be added, never changed.

/** A value with its standard uncertainty (k = 1), both in the unit the field's name or its comment states; null when withheld. */
export interface Quantity {
  value: number | null;
  uncertainty: number | null;
}

export type AssayState = 'sound' | 'caution' | 'withheld';
/**
 * One independent cause of error and its signed effect of one standard deviation on each concentration (mol/L of the tank).
 * The covariance of the concentrations is the sum of effect·effectᵀ over all sources. Two results whose sources carry the same
 * `key` share that error (same flask, same cell, same calibration): its effects are fully correlated between them.
 */
export interface ErrorSource {
  source: string;
  key: string;
  effect: Partial<Record<Species, number>>;
}

/** Share of one kind of error in the standard uncertainties: unit 1 (state of charge) and mol/L (total vanadium). */
export interface BudgetLine {
  source: string;
  stateOfCharge: number;
  totalVanadium: number;
  averageOxidationState: number;
}

/** A fitted systematic effect: amplitude in its own unit, and in units of its prior standard deviation. */
export interface FittedMode {
  name: string;
  amplitude: number;
  unit: string;
  inPriorUnits: number;
}

/** What the fit looked like. Arrays are on the fit's own wavelength axis and are there for drawing. */
export interface FitRecord {
  /** rms of measured − fitted, absorbance */
  residualRms: number;
  chiSquare: number;
  /** misfit in standard deviations above that of left-out standards */
  match: number;
  degreesOfFreedom: number;
  /** nm; null where not fitted */
  wavelengthShift: number | null;
  /** absorbance */
  offset: number | null;
  modes: FittedMode[];
  curve?: {
    wavelength: number[];
    measured: (number | null)[];
    fitted: number[];
    /** absorbance share of each species, and of each complex under its own name */
    shares: Record<string, number[]>;
    /** standard uncertainty of one residual, absorbance */
    residualUncertainty: number[];
  };
  /** what the undiluted electrolyte of the tank absorbs, from the fitted composition: nm, absorbance per cm; for its colour */
  tank?: { wavelength: number[]; absorbancePerCentimetre: number[] };
}

/** The numbers of an assay, before it is decided whether they may be reported. */
export interface AssayNumbers {
  /** mol/L of the tank; only the two species of the pair are listed */
  concentration: Partial<Record<Species, Quantity>>;
  /** mol/L of the tank */
  totalVanadium: Quantity;
  averageOxidationState: Quantity;
  /** 0…1, outside when over-discharged; null for a composite. `interval` is the 95 % interval. */
  stateOfCharge: Quantity & { interval: [number, number] | null };
}

export interface AssayResult extends AssayNumbers {
  sample: string;
  system: string;
  side: Side;
  pair: Pair;
  state: AssayState;
  /** between the two concentrations of the pair */
  correlation: number | null;
  errorSources: ErrorSource[];
  budget: BudgetLine[];
  fit: FitRecord | null;
  findings: Finding[];
  /** what was taken for granted because nobody said: one sentence each */
  assumed: string[];
  /** cm */
  pathLength: number;
  /** ≥ 1: tank over cuvette */
  dilution: number;
  input: { file: string; column: string; sha256: string };
  /** cuvettes of one sample that this result combines; absent for a single one */
  combinedFrom?: string[];
  /** the numbers that were withheld; absent otherwise */
  unreported?: AssayNumbers;
}

export interface AssayDocument {
  schema: 'tankhue/assay/1';
  calibration: { name: string; sha256: string };
  assays: AssayResult[];
}
