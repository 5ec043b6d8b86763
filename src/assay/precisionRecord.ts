import type { Finding } from '../finding.ts';

// What a sheet of replicates says of the scatter in real life: `tankhue/precision/1`. Fields may be added, never changed.

/** The scatter one level adds, e.g. `filling`; the last level is `repeat`, the scatter between lines of one innermost group. */
export interface PrecisionComponent {
  source: string;
  /** standard deviation, 0 where the estimate of its variance was negative */
  standardDeviation: number;
  /** as estimated; negative means that the level adds less than chance */
  variance: number;
  degreesOfFreedom: number;
}

/** A standard deviation with its 95 % interval. */
export interface PrecisionFigure {
  standardDeviation: number;
  interval: [number, number];
  degreesOfFreedom: number;
}

export interface PrecisionOfQuantity {
  /** `1` for state of charge and oxidation state, `relative` for total vanadium */
  unit: '1' | 'relative';
  /** outermost first */
  components: PrecisionComponent[];
  /** lines of one innermost group: everything the same (ISO 5725-1) */
  repeatability: PrecisionFigure;
  /** everything on the sheet different: the root of the sum of all components (ISO 5725-1) */
  reproducibility: PrecisionFigure;
  /** lines and samples the figures rest on */
  lines: number;
  samples: number;
}

export type PrecisionQuantity = 'stateOfCharge' | 'averageOxidationState' | 'totalVanadium';

export interface PrecisionRecord {
  schema: 'tankhue/precision/1';
  /** outermost first, as on the sheet, without `repeat` */
  factors: string[];
  quantities: Partial<Record<PrecisionQuantity, PrecisionOfQuantity>>;
  findings: Finding[];
  assumed: string[];
  input: { file: string; sha256: string };
}

/**
 * Standard uncertainty of a mean from the components of its scatter: u² = Σ s²/n, n the number of independent groups of that
 * level the mean runs over (1 where not given). A component belongs in a budget once: leave out of the list what the budget
 * has already, such as the photometer's noise.
 */
export function uncertaintyFromPrecision(
  precision: PrecisionOfQuantity,
  averagedOver: Readonly<Record<string, number>> = {},
): number {
  return Math.sqrt(
    precision.components.reduce((sum, { source, standardDeviation }) => {
      const groups = averagedOver[source] ?? 1;
      return sum + standardDeviation ** 2 / groups;
    }, 0),
  );
}

/** What an assay takes from a record: scatter of one filling. The mean oxidation state serves where a composite was repeated. */
export function precisionForAssay(record: PrecisionRecord): { stateOfCharge: number; totalVanadium: number } {
  const of = (quantity: PrecisionOfQuantity | undefined): number => (quantity ? uncertaintyFromPrecision(quantity) : 0);
  const { stateOfCharge, averageOxidationState, totalVanadium } = record.quantities;
  return { stateOfCharge: of(stateOfCharge ?? averageOxidationState), totalVanadium: of(totalVanadium) };
}
