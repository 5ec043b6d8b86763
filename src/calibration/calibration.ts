import type { Finding } from '../finding.ts';
import type { Species, Pair } from '../electrolyte/species.ts';
import type { PairModel } from '../estimation/pairModel.ts';
import type { LeftOut } from './validate.ts';

/** Everything an assay needs, and everything needed to defend it. In memory; the file is `tankhue/calibration/1`. */
export interface Calibration {
  readonly name: string;
  /** where the standards came from, in the maker's words */
  readonly source: string;
  readonly grid: Grid;
  readonly matrix: Matrix;
  readonly pairs: readonly PairCalibration[];
  readonly standards: readonly StandardRecord[];
  readonly findings: readonly Finding[];
  readonly provenance: Provenance;
}

/** Wavelengths in nm: means over `step` from `from` to `to`. */
export interface Grid {
  readonly from: number;
  readonly to: number;
  readonly step: number;
}

/** What the calibration is valid for; null where the standards' sheet did not say. */
export interface Matrix {
  /** K */
  readonly temperature: number | null;
  /** total sulfate or acid as stated, mol/L */
  readonly acid: number | null;
}

export interface PairCalibration {
  readonly pair: Pair;
  readonly model: PairModel;
  readonly constants: readonly ConstantRecord[];
  readonly labelsMoved: boolean;
  /** root mean square of the labels' uncertainty where they moved, else 0: share (1), total (relative); reaches a sample through leverage */
  readonly labelUncertainty: { readonly share: number; readonly total: number };
  /** what validation shows beyond the stated uncertainties, standard deviations: share of the higher species (1), total vanadium (relative) */
  readonly betweenGroup: { readonly share: number; readonly total: number; readonly freedom: number };
  /** how well spectra of left-out standards matched: ln(χ²/ν), mean and standard deviation */
  readonly match: { readonly mean: number; readonly deviation: number; readonly count: number };
  /** root mean square score of each named fault over left-out standards, at least 1: scores are judged in these units */
  readonly faultScales: Readonly<Record<string, number>>;
  readonly domain: Domain;
  /** per standard left out with its group */
  readonly leftOut: readonly LeftOut[];
  readonly validation: readonly ValidationFigures[];
  /** models compared, best first; the first was taken */
  readonly evidence: readonly Evidence[];
  /** species' detection and quantification limits, mol/L at the stated path (cm) */
  readonly limits: readonly LimitRecord[];
  /** condition of the design (s_max/s_min of scaled amounts) and the weak direction in words */
  readonly design: { readonly condition: number; readonly weak: string };
}

export interface ConstantRecord {
  readonly association: string;
  /** L/mol; 0 in the weak limit */
  readonly value: number;
  readonly interval: readonly [number | null, number | null];
}

/** The range of the standards, in the cuvette. */
export interface Domain {
  /** share of the higher species */
  readonly share: readonly [number, number];
  /** mol/L in the cuvette */
  readonly total: readonly [number, number];
  /** cm */
  readonly path: readonly [number, number];
  /** largest absorbance of a standard */
  readonly absorbance: number;
}

export interface ValidationFigures {
  /** `all`, or the group left out */
  readonly group: string;
  readonly count: number;
  /** share of the higher species, 1 */
  readonly share: ErrorFigures;
  /** total vanadium, relative */
  readonly total: ErrorFigures;
}

export interface ErrorFigures {
  readonly bias: number;
  readonly rmse: number;
  readonly largest: number;
  /** part of the labels inside their 95 % interval */
  readonly coverage: number;
}

export interface Evidence {
  readonly model: string;
  readonly labelsMoved: boolean;
  readonly noise: number;
  readonly modeCount: number;
  /** share of the higher species, root mean square over left-out standards */
  readonly rmse: number;
  /** mean negative log density that the intervals give to the errors made (nats) */
  readonly surprise: number;
}

export interface LimitRecord {
  readonly species: Species;
  readonly path: number;
  readonly decision: number;
  readonly detection: number;
  readonly quantification: number;
  /** net analyte signal: sensitivity in absorbance·L/(mol·cm), selectivity 0…1 */
  readonly sensitivity: number;
  readonly selectivity: number;
}

export interface StandardRecord {
  readonly name: string;
  readonly pair: Pair;
  readonly role: 'calibration' | 'check' | 'left-out';
  readonly group: string;
  readonly file: string;
  readonly column: string;
  readonly sha256: string;
  /** cm */
  readonly path: number;
  readonly dilution: number;
  /** tank concentration as labelled, mol/L */
  readonly concentration: Readonly<Partial<Record<Species, number>>>;
  /** fitted path error, relative, and in units of its uncertainty */
  readonly pathMoved: number;
  readonly pathMovedInUncertainty: number;
  /** movement of the share the fit asks for, and in units of the label's and validation's uncertainty */
  readonly shareDoubt: number;
  readonly shareDoubtInUncertainty: number;
  /** 0…1 */
  readonly leverage: number;
  /** root mean square residual, absorbance */
  readonly residualRms: number;
  /** what leaving it out alone would change: share of a mid-range sample, 1 */
  readonly influence: number;
  readonly doubt: string | null;
}

export interface Provenance {
  readonly tool: string;
  readonly command: string;
  readonly sheetSha256: string;
}
