import type { AssayNumbers, AssayState, BudgetLine, ErrorSource, Quantity } from '../../assay/result.ts';
import type { Pair, Side } from '../../electrolyte/species.ts';
import type { Finding } from '../../finding.ts';
import type { StandardsSheetRow } from '../standardsRow.ts';

// What titrations say. These are the shapes of `tankhue/titration/1`: fields may be added, never changed.

export type Interval = [number, number];

/** One way of finding an end point. Volumes in mL, interval 95 %. */
export interface EndPointByMethod {
  method: 'second derivative' | 'Gran, before' | 'Gran, after';
  volume: number;
  uncertainty: number;
  interval: Interval | null;
  /** difference from the combined end point over its own uncertainty and the burette's; near 0 where they agree */
  apart: number;
}

export interface EndPoint {
  /** what happens up to here */
  step: string;
  /** mL, combined */
  volume: number;
  uncertainty: number;
  interval: Interval;
  /** mV */
  potential: number;
  methods: EndPointByMethod[];
}

/** What one curve gave. */
export interface TitrationRunResult {
  run: string;
  sample: string;
  task: 'sample' | 'standardisation' | 'blank';
  course: string;
  titrant: string;
  state: AssayState;
  endPoints: EndPoint[];
  electrode: {
    /** mV, scatter of one reading */
    scatter: number;
    /** mV per mL */
    drift: Quantity;
    /** relative error of the slope against Nernst's */
    slopeError: Quantity;
  } | null;
  findings: Finding[];
  assumed: string[];
  /** for drawing: mL and mV */
  curve: { volume: number[]; potential: number[] };
  input: { file: string; sha256: string };
}

/** Strength of a titrant, mol of electrons per litre. */
export interface TitrantStrength {
  titrant: string;
  strength: Quantity;
  origin: 'stated' | 'standardised';
  runs: string[];
  budget: { source: string; uncertainty: number }[];
  findings: Finding[];
}

/** Two results of one quantity, judged by E_n: at most 1 where they agree within their expanded uncertainties (ISO 13528). */
export interface Agreement {
  quantity: 'stateOfCharge' | 'averageOxidationState' | 'totalVanadium';
  titration: Quantity;
  assay: Quantity;
  En: number;
  agrees: boolean;
}

export interface TitrationResult extends AssayNumbers {
  sample: string;
  system: string;
  side: Side;
  /** null: total vanadium alone */
  pair: Pair | null;
  state: AssayState;
  correlation: number | null;
  errorSources: ErrorSource[];
  budget: BudgetLine[];
  runs: string[];
  findings: Finding[];
  assumed: string[];
  standardsRow: StandardsSheetRow | null;
  agreement: Agreement[];
  unreported?: AssayNumbers;
}

export interface TitrationDocument {
  schema: 'tankhue/titration/1';
  titrants: TitrantStrength[];
  titrations: TitrationResult[];
  runs: TitrationRunResult[];
}
