import type { AssayResult, ErrorSource } from '../assay/result.ts';
import type { Composition } from '../electrolyte/composition.ts';

/** One tank: what its cuvette says, and its volume. */
export interface TankReading {
  readonly name: string;
  readonly side: 'negative' | 'positive';
  /** mol/L; null where the assay was withheld */
  readonly concentration: Composition | null;
  /** signed effects on the concentrations, mol/L */
  readonly errorSources: readonly ErrorSource[];
  /** L */
  readonly volume: number;
  /** L; null where nobody said */
  readonly volumeUncertainty: number | null;
  readonly assay: AssayResult | null;
}

/** Relative uncertainty of a volume read from a level of unstated uncertainty (common practice, no source). */
export const ASSUMED_VOLUME_UNCERTAINTY = 0.005;

/** Both tanks in one cuvette, in stated shares. */
export interface CompositeReading {
  readonly averageOxidationState: number;
  readonly uncertainty: number;
  /** volumes drawn; null: in the ratio of the tank volumes */
  readonly shares: { readonly negative: number; readonly positive: number } | null;
  readonly assay: AssayResult | null;
}

/** What is known of a plant at one visit. */
export interface PlantReading {
  readonly system: string;
  readonly tanks: readonly TankReading[];
  readonly composite: CompositeReading | null;
  readonly cellsInSeries: number | null;
  /** V, of one cell or of the stack */
  readonly openCircuit: number | null;
  /** V, fitted to this plant; null: typical */
  readonly formalPotential: number | null;
  /** mol on each side when it was filled */
  readonly fill: { readonly negative: number; readonly positive: number } | null;
  readonly targetOxidationState: number | null;
  readonly limits: Partial<{ readonly watch: number; readonly act: number }>;
  /** ms since 1970, when the last of its cuvettes was drawn; null where nobody said */
  readonly takenAt: number | null;
  /** h between the drawing of the two sides */
  readonly hoursApart: number | null;
}
