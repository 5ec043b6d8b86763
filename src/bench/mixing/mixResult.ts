import type { AssayNumbers, AssayState, BudgetLine, Quantity } from '../../assay/result.ts';
import type { Pair, Side, Species } from '../../electrolyte/species.ts';
import type { StateReaction } from '../../electrolyte/mixStates.ts';
import type { Finding } from '../../finding.ts';
import type { StandardsSheetRow } from '../standardsRow.ts';

// What the mixing bench says. These are the shapes of `tankhue/mix/1`: fields may be added, never changed.

export interface Portion {
  stock: string;
  /** mL; of a solid 0 */
  volume: number;
  /** g, where it is weighed */
  mass: number | null;
  uncertainty: number;
  /** unit of the uncertainty */
  unit: 'mL' | 'g';
  by: string;
}

/** One bottle that is to be made. */
export interface Mixture extends AssayNumbers {
  name: string;
  side: Side;
  pair: Pair;
  state: AssayState;
  wanted: { concentration: Partial<Record<Species, number>>; volume: number; sulfate: number | null };
  /** mL */
  volume: Quantity;
  portions: Portion[];
  /** mol/L: total sulfate, and what of it is free acid; null where a stock's is unknown */
  sulfate: number | null;
  freeAcid: number | null;
  reactions: StateReaction[];
  /** kJ set free, and the warming it makes at most, K */
  heat: number;
  warming: number;
  colour: string;
  correlation: number | null;
  budget: BudgetLine[];
  steps: string[];
  cautions: { code: string; text: string }[];
  findings: Finding[];
  assumed: string[];
  standardsRow: StandardsSheetRow | null;
}

/** A stage of an electrolysis: when it is reached, and what is seen. */
export interface ElectrolysisStage {
  averageOxidationState: number;
  holds: string;
  colour: string;
  /** Ah from the start, current efficiency included */
  charge: number;
  /** h at the stated current; null without one */
  hours: number | null;
}

export interface MixDocument {
  schema: 'tankhue/mix/1';
  task: 'blend' | 'dilute' | 'dissolve' | 'charge';
  mixtures: Mixture[];
  stages: ElectrolysisStage[];
  disclaimer: string;
}
