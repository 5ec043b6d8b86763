import type { Finding } from '../finding.ts';

// What a performance check of the photometer leaves for later assays: `tankhue/instrument/1`. Fields may be added, never changed.

/** A measured property with its standard uncertainty (k = 1), in the unit its field states. */
export interface MeasuredProperty {
  value: number;
  uncertainty: number;
}

export interface CheckedCell {
  name: string;
  /** cm */
  pathLength: number;
  /** cm, k = 1 */
  uncertainty: number;
  /** how it was measured: `fringes` (empty cell) or `absorber` (filled cell) */
  method: string;
}

/** One comparison with a limit, judged with a guard band (JCGM 106). */
export interface InstrumentTest {
  /** e.g. `holmium`, `dichromate-perchloric`, `cut-off`, `blank` */
  test: string;
  /** e.g. `536.56 nm band`, `noise` */
  property: string;
  unit: string;
  value: number;
  uncertainty: number;
  /** null = no limit on that side */
  limits: [number | null, number | null];
  /** where the limit comes from */
  limitSource: string;
  conformity: 'passed' | 'undecided' | 'failed';
  /** probability that the true value keeps the limits */
  probability: number;
}

/** What the instrument as found does to an assay that does not know of it. */
export interface InstrumentConsequence {
  /** e.g. `positive, 50 % state of charge, 1.6 mol/L, 0.1 mm` */
  sample: string;
  lines: {
    source: string;
    /** what the cause does to the state of charge (0…1) if nothing corrects for it, k = 1 */
    stateOfCharge: number;
    /** relative effect on total vanadium, k = 1 */
    totalVanadium: number;
  }[];
}

export interface InstrumentRecord {
  schema: 'tankhue/instrument/1';
  /** as given; empty when nobody said */
  instrument: string;
  /** as given, ISO date; empty when nobody said */
  checkedAt: string;
  state: 'passed' | 'undecided' | 'failed';
  /** instrument reading minus true wavelength, nm; null = not measured */
  wavelengthShift: MeasuredProperty | null;
  /** standard deviation of the offset between repeated blanks, absorbance; null = not measured */
  offsetPrior: number | null;
  /** standard deviation of the slope between repeated blanks, absorbance per 100 nm; null = not measured */
  slopePrior: number | null;
  /** share of the beam that passes without meeting the sample, 0…1, where it was measured; null = not measured */
  strayLight: (MeasuredProperty & { nm: number }) | null;
  /** measured absorbance over true absorbance − 1; null = not measured */
  photometricScale: MeasuredProperty | null;
  /** σ² = constant² + shot²·10^A, absorbance per point, points `step` nm apart; shot null = not measured apart; null = not measured */
  noise: { constant: number; shot: number | null; step: number } | null;
  cells: CheckedCell[];
  tests: InstrumentTest[];
  consequences: InstrumentConsequence[];
  findings: Finding[];
  assumed: string[];
  inputs: { file: string; column: string; sha256: string }[];
}
